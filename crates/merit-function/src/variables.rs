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

mod build;

use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::place::Place;
use surface_model::quantities::{Quantities, Quantity};
use surface_model::temperature::Growth;

use crate::block::{BlockShape, Bounds};
use crate::limits::Limits;

use build::Builder;

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
    pub(crate) fn grown(&self, design: &Design, growth: &Growth) -> Self {
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
    pub(crate) fn shape(&self, rows: Vec<usize>) -> BlockShape {
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
