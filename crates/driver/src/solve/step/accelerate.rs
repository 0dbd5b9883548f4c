//! The second half of a step: bent by its geodesic acceleration.

use merit_function::block::BlockProblem;

use super::super::acceleration::{PROBE, WORTHWHILE, half_second_derivative, is_moderate};
use super::super::evaluation::Evaluator;
use super::super::normal::{jacobian_times, transpose_times};
use super::super::quadratic::limit_along;
use super::Stepper;

impl Stepper {
    /// Bends the step by its geodesic acceleration.
    pub(crate) fn accelerate<P: BlockProblem>(
        &mut self,
        evaluator: &mut Evaluator<'_, P>,
        ratio: Option<f64>,
    ) {
        let Some(ratio) = ratio else { return };
        if self.predicted <= WORTHWHILE * self.point.sum_of_squares {
            return;
        }
        self.place_trial(PROBE);
        let probed = evaluator
            .residuals(&self.trial.variables, &mut self.residuals)
            .and_then(|_| evaluator.limits(&self.trial.variables, &mut self.trial.limits));
        if probed.is_err() {
            return;
        }
        jacobian_times(&self.here, &self.shape, &self.step, &mut self.along);
        let here = self.here.states.iter().flat_map(|block| block.residuals.iter());
        for ((probed, here), along) in self.residuals.iter_mut().zip(here).zip(&self.along) {
            half_second_derivative(*here, *along, probed);
        }
        transpose_times(&self.here, &self.shape, &self.residuals, &mut self.bent);
        for (j, (gradient, bend)) in self.subproblem.gradient.iter_mut().zip(&self.bent).enumerate()
        {
            *gradient += if self.normal.is_fixed(j) { 0.0 } else { *bend };
        }
        for ((required, limit), probed) in
            self.subproblem.required.iter_mut().zip(&self.here.limits).zip(&mut self.trial.limits)
        {
            let along = limit_along(limit, &self.normal, &self.step);
            half_second_derivative(limit.value, along, probed);
            *required -= *probed;
        }
        self.bent.copy_from_slice(&self.step);
        self.solve_free();
        if self.solve_program().is_err() {
            self.step.copy_from_slice(&self.bent);
            return;
        }
        let straight = self.scaling.length_squared(&self.bent);
        self.bent.iter_mut().zip(&self.step).for_each(|(straight, bent)| *straight -= bent);
        let bend = self.scaling.length_squared(&self.bent);
        if !is_moderate(bend, straight, ratio) {
            self.step.iter_mut().zip(&self.bent).for_each(|(bent, undo)| *bent += undo);
        }
    }
}
