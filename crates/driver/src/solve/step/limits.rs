//! What a step does about limits: how much of a crossed one it must restore, and how it is bent
//! back to one that is curved.

use merit_function::block::BlockProblem;

use super::super::evaluation::Evaluator;
use super::super::quadratic::limit_along;
use super::{Rejected, Stepper};

/// Limits crossed by less than this share of their tolerance need no correction.
const CROSSED: f64 = 1e-4;
/// Corrections for the curvature of limits, at most.
const CORRECTIONS: usize = 4;
/// A demand to restore crossed limits weaker than this share is no demand.
const LEAST_RESTORATION: f64 = 1e-3;

impl Stepper {
    /// `aᵢᵀp ≥ −gᵢ` for limits that are kept, `≥ −τ gᵢ` for those that are crossed.
    pub(super) fn require_restoration(&mut self) {
        let restoration = self.restoration;
        self.subproblem.required.clear();
        self.subproblem
            .required
            .extend(self.point.limits.iter().map(|&g| if g < 0.0 { -restoration * g } else { -g }));
    }

    pub(super) fn demand_less(&mut self) {
        self.restoration /= 4.0;
        if self.restoration < LEAST_RESTORATION {
            self.restoration = 0.0;
        }
    }

    pub(super) fn demand_more(&mut self) {
        self.restoration = (4.0 * self.restoration).clamp(LEAST_RESTORATION, 1.0);
    }

    /// Places the trial point and, where it crosses a limit by its curvature, corrects the step
    /// to second order: the same program with the limits' values at the trial point.
    pub(crate) fn keep_limits<P: BlockProblem>(
        &mut self,
        evaluator: &mut Evaluator<'_, P>,
    ) -> Result<(), Rejected> {
        self.place_trial(1.0);
        if self.here.limits.is_empty() {
            self.trial.limits.clear();
            return Ok(());
        }
        for _ in 0..CORRECTIONS {
            evaluator.limits(&self.trial.variables, &mut self.trial.limits)?;
            let targets = self.targets();
            if self
                .trial
                .limits
                .iter()
                .zip(&targets)
                .zip(&self.here.limits)
                .all(|((value, target), limit)| *value >= target - CROSSED * limit.tolerance)
            {
                return Ok(());
            }
            self.bent.copy_from_slice(&self.step);
            self.subproblem.required.clear();
            for ((limit, value), target) in
                self.here.limits.iter().zip(&self.trial.limits).zip(&targets)
            {
                let along = limit_along(limit, &self.normal, &self.step);
                self.subproblem.required.push(along - value + target);
            }
            if self.solve_program().is_err() {
                self.step.copy_from_slice(&self.bent);
                return Ok(());
            }
            self.place_trial(1.0);
        }
        evaluator.limits(&self.trial.variables, &mut self.trial.limits)?;
        Ok(())
    }

    /// The value each limit is to have after the step, at least: zero, or what partial
    /// restoration asks for.
    fn targets(&self) -> Vec<f64> {
        let left = 1.0 - self.restoration;
        self.point.limits.iter().map(|value| value.min(0.0) * left).collect()
    }

    pub(super) fn largest_violation(&self, limits: &[f64]) -> f64 {
        let tolerances =
            self.here.limits.iter().map(|limit| limit.tolerance.max(f64::MIN_POSITIVE));
        limits
            .iter()
            .zip(tolerances)
            .map(|(value, tolerance)| -value / tolerance)
            .fold(0.0, f64::max)
    }
}
