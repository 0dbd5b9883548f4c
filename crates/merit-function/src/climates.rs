//! The goals at other temperatures than 20 °C.
//!
//! At each temperature the design is another one, whose numbers follow from the cold ones
//! ([`Growth`]); the variables stay those of the design as drawn. A state's residuals at every
//! temperature stand below one another in its block, so that nothing else changes: a design that
//! holds its goals untouched at several temperatures is only a matter of goals.

use surface_model::design::Design;
use surface_model::temperature::{Growth, TemperatureError};

use crate::block::{BlockProblem, BlockShape, Linearisation};
use crate::fault::EvaluationFault;
use crate::limits::Limits;
use crate::problem::MeritFunction;
use crate::variables::Variables;
use crate::wishes::Wishes;

/// The merit function at one more temperature.
#[derive(Debug)]
pub(crate) struct Climate {
    merit: MeritFunction,
    residuals: Vec<f64>,
    linear: Linearisation,
}

impl Climate {
    /// The goals of `wishes` at each of its temperatures other than 20 °C, over the variables of
    /// the design as drawn.
    pub(crate) fn all(
        design: &Design,
        wishes: &Wishes,
        variables: &Variables,
        rays: usize,
    ) -> Result<Vec<Self>, TemperatureError> {
        // Limits are kept by the design as drawn.
        let goals = Wishes {
            states: wishes.states.clone(),
            limits: Limits::default(),
            temperatures_c: Vec::new(),
        };
        let climate = |&temperature_c: &f64| {
            let warm = design.at_temperature(temperature_c)?;
            let variables = variables.grown(design, &Growth::of(design, temperature_c)?);
            let merit = MeritFunction::new(&warm, &goals, variables, rays)?;
            let residuals = vec![0.0; merit.shape().residuals()];
            let linear = Linearisation::zeros(merit.shape());
            Ok(Self { merit, residuals, linear })
        };
        wishes.other_temperatures_c().map(climate).collect()
    }

    pub(crate) fn shape(&self) -> &BlockShape {
        self.merit.shape()
    }

    pub(crate) fn set_aperture(&mut self, fraction: f64) {
        self.merit.set_aperture(fraction);
    }

    /// Evaluates the residuals.
    pub(crate) fn evaluate(&mut self, variables: &[f64]) -> Result<(), EvaluationFault> {
        self.merit.residuals(variables, &mut self.residuals)
    }

    /// Residuals of state `k`, evaluated before.
    pub(crate) fn residuals(&self, k: usize) -> &[f64] {
        let rows = &self.shape().rows;
        let before: usize = rows[..k].iter().sum();
        &self.residuals[before..before + rows[k]]
    }

    /// Evaluates residuals and Jacobian, and puts each state's below row `first[state]` of its
    /// block.
    pub(crate) fn linearise(
        &mut self,
        variables: &[f64],
        first: &mut [usize],
        out: &mut Linearisation,
    ) -> Result<(), EvaluationFault> {
        self.merit.linearise(variables, &mut self.linear)?;
        let states = out.states.iter_mut().zip(&self.linear.states);
        for ((into, from), first) in states.zip(first) {
            let rows = from.residuals.len();
            into.residuals.rows_mut(*first, rows).copy_from(&from.residuals);
            into.by_shared.rows_mut(*first, rows).copy_from(&from.by_shared);
            into.by_own.rows_mut(*first, rows).copy_from(&from.by_own);
            *first += rows;
        }
        Ok(())
    }
}
