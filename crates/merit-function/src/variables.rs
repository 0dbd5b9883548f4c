//! The optimiser's variables, and how the numbers of every state's train follow from them.
//!
//! Every quantity of a train (a curvature, a gap, …) is an affine function of the variables. Most
//! are one variable each. A spacing that the housing determines is not: with first and last group
//! fixed, the last spacing of each state is the track less everything else, so that freedom is
//! removed instead of penalised.
//!
//! Between two neighbouring fixed groups, and in each state, the last free spacing is such a
//! *dependent* one. The position of a fixed middle group, the same in all states, is a shared
//! variable of its own, and so is, for each group with a limit on its travel, the foremost point
//! of its way.

use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::housing::Anchor;
use surface_model::place::Place;
use surface_model::quantities::{Quantities, Quantity, Shapes};
use surface_model::sequence::{GapId, Sequence};
use surface_model::temperature::Growth;

use crate::block::{BlockShape, Bounds};
use crate::bounds::bounds_of;
use crate::limits::{LimitKind, Limits};

/// A number the user lets the optimiser change, with the range the user gives it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FreePlace {
    /// Which number.
    pub place: Place,
    /// Its own range, in the unit of [`Place::value`] (1/mm for a radius).
    pub own_range: Bounds,
}

/// A variable by its block.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Column {
    /// Shared variable, by its number.
    Shared(usize),
    /// Own variable of the state in question, by its number in that state.
    Own(usize),
}

/// What a shared variable is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SharedVariable {
    /// A number of the glass.
    Glass(Place),
    /// Where a fixed middle group stands, mm from the front datum.
    FixedPosition(usize),
    /// The foremost point of a group's way, mm from the front datum.
    TravelStart(usize),
}

/// One quantity of a state's train as a function of the variables.
#[derive(Debug, Clone, PartialEq)]
pub struct Binding {
    /// Which quantity of the train, in the order of [`Quantities`].
    pub quantity: usize,
    /// Its value with all variables at zero.
    pub offset: f64,
    /// The variables it depends on, and how strongly.
    pub terms: Vec<(Column, f64)>,
}

impl Binding {
    /// Adds `by` times another.
    fn add(&mut self, by: f64, other: &Self) {
        self.offset += by * other.offset;
        self.terms.extend(other.terms.iter().map(|&(column, factor)| (column, by * factor)));
    }
}

/// A dependent spacing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
struct Dependent {
    after: usize,
    quantity: usize,
}

/// One state's part of the variables.
#[derive(Debug, Clone, PartialEq, Default)]
struct StateVariables {
    own: Vec<Place>,
    /// Where its own variables begin in the packed vector.
    own_start: usize,
    bindings: Vec<Binding>,
    dependents: Vec<Dependent>,
}

/// All variables of a design.
#[derive(Debug, Clone, PartialEq)]
pub struct Variables {
    shared: Vec<SharedVariable>,
    states: Vec<StateVariables>,
    bounds: Vec<Bounds>,
    start: Vec<f64>,
    quantities: Quantities,
}

/// Why the free numbers do not make a problem.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum VariablesError {
    /// A number whose ranges contradict each other.
    #[error("its own range and the limits leave no value for it")]
    NoRange(Place),
    /// Glass may change between fixed groups and no spacing may give way.
    #[error(
        "in state {} the glass between two fixed groups may change but no spacing between them may",
        .state + 1
    )]
    NothingGivesWay {
        /// Which state.
        state: usize,
    },
}

impl Variables {
    /// Sorts free numbers into shared and own ones, gives each its bounds, and works out what
    /// follows from the housing.
    ///
    /// # Errors
    /// Ranges that contradict each other, or a housing that leaves no way to move.
    pub fn new(
        design: &Design,
        limits: &Limits,
        free: &[FreePlace],
    ) -> Result<Self, VariablesError> {
        Builder::new(design, limits, free).build()
    }

    /// The same variables where they act on the trains of the design at another temperature, which
    /// has grown by `growth` from `design` at 20 °C.
    #[must_use]
    pub fn grown(&self, design: &Design, growth: &Growth) -> Self {
        let mut warm = self.clone();
        let sequence = design.sequence();
        for (state, zoom) in warm.states.iter_mut().zip(&design.states) {
            let cold = std::mem::take(&mut state.bindings);
            let in_gap = |gap: usize| {
                let quantity = self.quantities.gap(gap);
                cold.iter().find(|binding| binding.quantity == quantity)
            };
            for gap in 0..sequence.gaps.len() {
                let follows = growth.gap(gap);
                if follows.iter().all(|&(cold, _)| in_gap(cold).is_none()) {
                    continue;
                }
                let mut grown =
                    Binding { quantity: self.quantities.gap(gap), offset: 0.0, terms: Vec::new() };
                for &(cold, by) in follows {
                    match in_gap(cold) {
                        Some(binding) => grown.add(by, binding),
                        None => grown.offset += by * design.gap_mm(zoom, sequence.gaps[cold]),
                    }
                }
                state.bindings.push(grown);
            }
            for binding in &cold {
                let by = match self.quantities.at(binding.quantity) {
                    Quantity::Gap(_) => continue,
                    Quantity::Curvature(surface) => growth.curvature(surface),
                    Quantity::Asphere(surface, term) => growth.asphere(surface, term),
                    Quantity::Conic(_) | Quantity::Index(_) => 1.0,
                };
                let mut grown =
                    Binding { quantity: binding.quantity, offset: 0.0, terms: Vec::new() };
                grown.add(by, binding);
                state.bindings.push(grown);
            }
        }
        warm
    }

    /// Sizes of the blocks; `rows` is the number of residuals of each state.
    #[must_use]
    pub fn shape(&self, rows: Vec<usize>) -> BlockShape {
        let own = self.states.iter().map(|state| state.own.len()).collect();
        BlockShape { shared: self.shared.len(), own, rows }
    }

    /// Shared variables, in order.
    #[must_use]
    pub fn shared(&self) -> &[SharedVariable] {
        &self.shared
    }

    /// The own variables of a state, in order: its spacings that are free and not dependent.
    #[must_use]
    pub fn own(&self, state: usize) -> &[Place] {
        &self.states[state].own
    }

    /// Bounds of all variables, packed.
    #[must_use]
    pub fn bounds(&self) -> &[Bounds] {
        &self.bounds
    }

    /// The variables' values in the design they were made for, packed.
    #[must_use]
    pub fn start(&self) -> &[f64] {
        &self.start
    }

    /// Where a variable stands in the file, by its place in the packed vector; for a position in
    /// the tube, the group that takes it.
    #[must_use]
    pub fn address(&self, variable: usize) -> Option<Address> {
        if let Some(shared) = self.shared.get(variable) {
            return Some(match *shared {
                SharedVariable::Glass(place) => place.address(),
                SharedVariable::FixedPosition(group) | SharedVariable::TravelStart(group) => {
                    Address::root().key("groups").index(group)
                }
            });
        }
        let own = |state: &StateVariables| {
            state.own.get(variable.checked_sub(state.own_start)?).map(|place| place.address())
        };
        self.states.iter().find_map(own)
    }

    /// How the quantities of a state's train follow from the variables.
    #[must_use]
    pub fn bindings(&self, state: usize) -> &[Binding] {
        &self.states[state].bindings
    }

    /// The order of a train's quantities.
    #[must_use]
    pub fn quantities(&self) -> Quantities {
        self.quantities
    }

    /// The spacings of a state that follow from the housing, by the group they follow and their
    /// place among the train's quantities.
    pub fn dependents(&self, state: usize) -> impl Iterator<Item = (usize, usize)> + '_ {
        self.states[state].dependents.iter().map(|spacing| (spacing.after, spacing.quantity))
    }

    /// Value of a shared variable, or of an own one of `state`, in a packed vector.
    #[must_use]
    pub fn value(&self, variables: &[f64], state: usize, column: Column) -> f64 {
        match column {
            Column::Shared(number) => variables[number],
            Column::Own(number) => variables[self.states[state].own_start + number],
        }
    }

    /// Writes the variables into the design they were made for, dependent spacings included.
    pub fn write(&self, variables: &[f64], design: &mut Design) {
        for (variable, &value) in self.shared.iter().zip(variables) {
            if let SharedVariable::Glass(place) = variable {
                place.set(design, value);
            }
        }
        for (k, state) in self.states.iter().enumerate() {
            let own = &variables[state.own_start..];
            for (place, &value) in state.own.iter().zip(own) {
                place.set(design, value);
            }
            for spacing in &state.dependents {
                let binding = state.bindings.iter().find(|b| b.quantity == spacing.quantity);
                let Some(binding) = binding else { continue };
                let terms = binding
                    .terms
                    .iter()
                    .map(|&(column, factor)| factor * self.value(variables, k, column));
                // A rounding error below zero is zero.
                let value = (binding.offset + terms.sum::<f64>()).max(0.0);
                Place::Spacing { state: k, after: spacing.after }.set(design, value);
            }
        }
    }
}

/// Two neighbouring fixed groups.
struct Span {
    from: usize,
    to: usize,
}

struct Builder<'a> {
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
    fn new(design: &'a Design, limits: &'a Limits, free: &'a [FreePlace]) -> Self {
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

    fn build(&self) -> Result<Variables, VariablesError> {
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
