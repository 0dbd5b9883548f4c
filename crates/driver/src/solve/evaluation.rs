//! Every evaluation of a problem passes here: counted, and nothing that is not finite gets by.

use std::error::Error;

use merit_function::block::{BlockProblem, Linearisation};

use super::outcome::SolveError;

/// A point that is of no use: it cannot be evaluated, or evaluates to no number.
#[derive(Debug)]
pub(crate) enum Unusable {
    /// The problem says why.
    Fault(Box<dyn Error + Send + Sync>),
    /// Something is infinite or not a number, or the sum of squares overflows.
    NotFinite,
}

impl From<Unusable> for SolveError {
    fn from(unusable: Unusable) -> Self {
        match unusable {
            Unusable::Fault(fault) => Self::Fault(fault),
            Unusable::NotFinite => Self::NotFinite,
        }
    }
}

/// A problem with its evaluations counted and checked.
pub(crate) struct Evaluator<'p, P> {
    problem: &'p mut P,
    /// Evaluations of the residuals alone.
    pub(crate) evaluations: u64,
    /// Evaluations with the Jacobian.
    pub(crate) linearisations: u64,
}

impl<'p, P: BlockProblem> Evaluator<'p, P> {
    pub(crate) fn new(problem: &'p mut P) -> Self {
        Self { problem, evaluations: 0, linearisations: 0 }
    }

    /// Residuals, written to `out`; their sum of squares.
    pub(crate) fn residuals(&mut self, at: &[f64], out: &mut [f64]) -> Result<f64, Unusable> {
        self.evaluations += 1;
        self.problem.residuals(at, out).map_err(fault)?;
        finite(out.iter().map(|r| r * r).sum())
    }

    /// Values of the limits, written to `out`.
    pub(crate) fn limits(&mut self, at: &[f64], out: &mut Vec<f64>) -> Result<(), Unusable> {
        self.problem.limits(at, out).map_err(fault)?;
        if out.iter().all(|value| value.is_finite()) { Ok(()) } else { Err(Unusable::NotFinite) }
    }

    /// Residuals, Jacobian blocks and limits, written to `out`; the sum of squares.
    pub(crate) fn linearise(
        &mut self,
        at: &[f64],
        out: &mut Linearisation,
    ) -> Result<f64, Unusable> {
        self.linearisations += 1;
        self.problem.linearise(at, out).map_err(fault)?;
        for block in &out.states {
            finite(block.by_shared.norm_squared() + block.by_own.norm_squared())?;
        }
        for limit in &out.limits {
            let gradient = limit.by_shared.norm_squared() + limit.by_own.norm_squared();
            finite(gradient)?;
            finite(limit.value)?;
        }
        finite(out.sum_of_squares())
    }
}

fn fault(fault: impl Error + Send + Sync + 'static) -> Unusable {
    Unusable::Fault(Box::new(fault))
}

fn finite(value: f64) -> Result<f64, Unusable> {
    if value.is_finite() { Ok(value) } else { Err(Unusable::NotFinite) }
}
