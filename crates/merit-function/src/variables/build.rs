//! Sorting what is free into shared and own variables, and working out what follows from the
//! housing.

use surface_model::design::Design;
use surface_model::housing::Anchor;
use surface_model::place::Place;
use surface_model::quantities::{Quantities, Shapes};
use surface_model::sequence::{GapId, Sequence};

use super::{
    Binding, Column, Dependent, FreePlace, SharedVariable, StateVariables, Variables,
    VariablesError,
};
use crate::block::Bounds;
use crate::bounds::bounds_of;
use crate::limits::{LimitKind, Limits};

/// Two neighbouring fixed groups.
struct Span {
    from: usize,
    to: usize,
}

pub(super) struct Builder<'a> {
    design: &'a Design,
    limits: &'a Limits,
    free: &'a [FreePlace],
    /// Per state and spacing, its own range if it is free.
    free_spacings: Vec<Vec<Option<Bounds>>>,
    /// Per state, where each group's first vertex stands in the housing.
    positions_mm: Vec<Vec<f64>>,
    sequence: Sequence,
    quantities: Quantities,
}

impl<'a> Builder<'a> {
    pub(super) fn new(design: &'a Design, limits: &'a Limits, free: &'a [FreePlace]) -> Self {
        let sequence = design.sequence();
        let shaped = free.iter().filter_map(|free| match free.place {
            Place::Conic(id) | Place::Asphere(id, _) => sequence.place_of_surface(id),
            _ => None,
        });
        let shapes = shaped.fold(Shapes::None, Shapes::with);
        let quantities = Quantities::new(sequence.surfaces.len(), shapes);
        let states = design.states.iter();
        let mut free_spacings: Vec<Vec<Option<Bounds>>> =
            states.map(|state| vec![None; state.spacings_mm.len()]).collect();
        for free in free {
            if let Place::Spacing { state, after } = free.place {
                free_spacings[state][after] = Some(free.own_range);
            }
        }
        let positions_mm = design.all_positions_mm();
        Self { design, limits, free, free_spacings, positions_mm, sequence, quantities }
    }

    pub(super) fn build(&self) -> Result<Variables, VariablesError> {
        let spans = self.spans();
        let mut shared: Vec<SharedVariable> = self
            .free
            .iter()
            .filter(|free| !matches!(free.place, Place::Spacing { .. }))
            .map(|free| SharedVariable::Glass(free.place))
            .collect();
        shared.extend(self.free_positions(&spans).map(SharedVariable::FixedPosition));
        if self.limits.range(LimitKind::TravelMm).is_some() {
            let moving = (0..self.design.groups.len()).filter(|&g| !self.design.housing.fixed[g]);
            shared.extend(moving.map(SharedVariable::TravelStart));
        }
        let mut states = Vec::with_capacity(self.design.states.len());
        let mut own_start = shared.len();
        for k in 0..self.design.states.len() {
            let state = self.state(k, own_start, &shared, &spans)?;
            own_start += state.own.len();
            states.push(state);
        }
        let mut bounds = Vec::new();
        let mut start = Vec::new();
        for variable in &shared {
            bounds.push(match variable {
                SharedVariable::Glass(place) => self.bounds(*place)?,
                _ => Bounds::FREE,
            });
            start.push(self.start_of(variable));
        }
        for state in &states {
            for &place in &state.own {
                bounds.push(self.bounds(place)?);
                start.push(place.value(self.design));
            }
        }
        Ok(Variables { shared, states, bounds, start, quantities: self.quantities })
    }

    fn bounds(&self, place: Place) -> Result<Bounds, VariablesError> {
        let own = match place {
            Place::Spacing { state, after } => self.free_spacings[state][after],
            _ => self.free.iter().find(|free| free.place == place).map(|free| free.own_range),
        };
        let own = own.unwrap_or(Bounds::FREE);
        bounds_of(place, self.design, self.limits)
            .and_then(|bounds| bounds.meet(own))
            .ok_or(VariablesError::NoRange(place))
    }

    fn start_of(&self, variable: &SharedVariable) -> f64 {
        let mut positions = self.positions_mm.iter();
        match *variable {
            SharedVariable::Glass(place) => place.value(self.design),
            SharedVariable::FixedPosition(group) => positions.next().map_or(0.0, |z| z[group]),
            SharedVariable::TravelStart(group) => {
                positions.map(|z| z[group]).fold(f64::INFINITY, f64::min)
            }
        }
    }

    fn spans(&self) -> Vec<Span> {
        let fixed: Vec<usize> = self.design.housing.fixed_groups().collect();
        fixed.windows(2).map(|pair| Span { from: pair[0], to: pair[1] }).collect()
    }

    /// Fixed middle groups whose position is a variable: the lone one that positions are measured
    /// from, and those with free spacings on both sides in every state.
    fn free_positions<'b>(&'b self, spans: &'b [Span]) -> impl Iterator<Item = usize> + 'b {
        let last = self.design.groups.len() - 1;
        let fixed = self.design.housing.fixed_groups();
        fixed.filter(move |&g| g != 0 && g != last).filter(move |&g| {
            let beside: Vec<&Span> =
                spans.iter().filter(|span| span.from == g || span.to == g).collect();
            let lone = self.design.housing.anchor() == Anchor::Middle(g) && beside.is_empty();
            lone || beside.iter().all(|span| {
                (0..self.design.states.len())
                    .all(|k| (span.from..span.to).any(|after| self.spacing_is_free(k, after)))
            })
        })
    }

    fn spacing_is_free(&self, state: usize, after: usize) -> bool {
        self.free_spacings[state][after].is_some()
    }

    fn state(
        &self,
        k: usize,
        own_start: usize,
        shared: &[SharedVariable],
        spans: &[Span],
    ) -> Result<StateVariables, VariablesError> {
        let spacings = self.design.groups.len() - 1;
        let mut dependent_in = Vec::new();
        for span in spans {
            let give_way = (span.from..span.to).rev().find(|&after| self.spacing_is_free(k, after));
            dependent_in.push(give_way);
        }
        let mut state = StateVariables { own_start, ..StateVariables::default() };
        for after in 0..spacings {
            if self.spacing_is_free(k, after) && !dependent_in.contains(&Some(after)) {
                state.own.push(Place::Spacing { state: k, after });
            }
        }
        self.bind_variables(k, shared, &mut state);
        for (span, give_way) in spans.iter().zip(dependent_in) {
            self.bind_span(k, span, give_way, shared, &mut state)?;
        }
        Ok(state)
    }

    /// Quantities that are one variable each.
    fn bind_variables(&self, k: usize, shared: &[SharedVariable], state: &mut StateVariables) {
        let columns = shared.iter().enumerate().filter_map(|(j, variable)| match variable {
            SharedVariable::Glass(place) => Some((*place, Column::Shared(j))),
            _ => None,
        });
        let own = state.own.iter().enumerate().map(|(j, &place)| (place, Column::Own(j)));
        let bindings: Vec<Binding> = columns
            .chain(own)
            .filter_map(|(place, column)| {
                let quantity = self.quantity(place)?;
                Some(Binding { quantity, offset: 0.0, terms: vec![(column, 1.0)] })
            })
            .collect();
        debug_assert!(k < self.design.states.len());
        state.bindings.extend(bindings);
    }

    fn quantity(&self, place: Place) -> Option<usize> {
        let surface = |id| self.sequence.place_of_surface(id);
        let gap = |id| self.sequence.place_of_gap(id).map(|gap| self.quantities.gap(gap));
        match place {
            Place::Radius(id) => surface(id).map(|s| self.quantities.curvature(s)),
            Place::Conic(id) => surface(id).map(|s| self.quantities.conic(s)),
            Place::Asphere(id, term) => surface(id).map(|s| self.quantities.asphere(s, term)),
            Place::Thickness { group, element, glass } => {
                gap(GapId::Thickness { group, element, glass })
            }
            Place::Air { group, after } => gap(GapId::Air { group, after }),
            Place::Spacing { after, .. } => gap(GapId::Spacing { after }),
        }
    }

    /// Between two fixed groups: lengths and spacings add up to the distance between them, so one
    /// spacing follows from the rest.
    fn bind_span(
        &self,
        k: usize,
        span: &Span,
        give_way: Option<usize>,
        shared: &[SharedVariable],
        state: &mut StateVariables,
    ) -> Result<(), VariablesError> {
        let inside = self.sequence.first_surface(span.from)..self.sequence.first_surface(span.to);
        let mut terms = Vec::new();
        for gap in inside {
            let quantity = self.quantities.gap(gap);
            for binding in state.bindings.iter().filter(|b| b.quantity == quantity) {
                terms.extend(binding.terms.iter().map(|&(column, factor)| (column, -factor)));
            }
        }
        let position = |group: usize| {
            let wanted = SharedVariable::FixedPosition(group);
            shared.iter().position(|&variable| variable == wanted).map(Column::Shared)
        };
        let last = self.design.groups.len() - 1;
        terms.extend(position(span.to).map(|column| (column, 1.0)));
        terms.extend(position(span.from).map(|column| (column, -1.0)));
        if span.to == last {
            // The last group's own length moves its front vertex away from the rear stop.
            let gaps = self.sequence.first_surface(last)..self.sequence.gaps.len();
            for gap in gaps {
                let quantity = self.quantities.gap(gap);
                for binding in state.bindings.iter().filter(|b| b.quantity == quantity) {
                    terms.extend(binding.terms.iter().map(|&(column, factor)| (column, -factor)));
                }
            }
        }
        let Some(after) = give_way else {
            let stuck = terms.is_empty();
            return if stuck { Ok(()) } else { Err(VariablesError::NothingGivesWay { state: k }) };
        };
        let place = Place::Spacing { state: k, after };
        let Some(quantity) = self.quantity(place) else { return Ok(()) };
        let at_start: f64 = terms
            .iter()
            .map(|&(column, factor)| factor * self.start_value(column, shared, state))
            .sum();
        let offset = place.value(self.design) - at_start;
        state.bindings.push(Binding { quantity, offset, terms });
        state.dependents.push(Dependent { after, quantity });
        Ok(())
    }

    fn start_value(
        &self,
        column: Column,
        shared: &[SharedVariable],
        state: &StateVariables,
    ) -> f64 {
        match column {
            Column::Shared(number) => self.start_of(&shared[number]),
            Column::Own(number) => state.own[number].value(self.design),
        }
    }
}
