//! Where a start does its work: one template's merit functions, and the local solver on them.

use std::sync::atomic::{AtomicBool, Ordering};

use merit_function::block::{BlockProblem, Bounds};
use merit_function::problem::{MeritFunction, RAYS};

use super::candidate::Candidate;
use super::template::Template;
use crate::optimise::{OptimiseError, merit_of};
use crate::solve::{self, Interruptible, Settings, Stopped, Unwatched};

/// Steps in which a point must reach first order.
const FIRST_ORDER_STEPS: u64 = 30;
/// How far off the goals a point may still be, as a sum of squares in units of their `within`, to
/// count as at first order.
const FIRST_ORDER_REACHED: f64 = 1e-2;

/// The user wants to stop; what is under way is worth nothing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Interrupted;

/// How much work a local optimisation may be.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Effort {
    /// At most so many steps, and none once they bring less than a thousandth.
    Steps(u64),
    /// To convergence.
    Whole,
}

/// One template's merit functions, reused from point to point.
pub(super) struct Workbench<'p> {
    pub(super) template: &'p Template,
    exact: MeritFunction,
    first_order: MeritFunction,
    interrupt: &'p AtomicBool,
    residuals: Vec<f64>,
    /// Local optimisations done.
    pub(super) optimisations: u64,
}

impl<'p> Workbench<'p> {
    pub(super) fn new(
        template: &'p Template,
        interrupt: &'p AtomicBool,
    ) -> Result<Self, OptimiseError> {
        let exact = merit_of(&template.file)?;
        let variables = exact.variables().clone();
        let design = &template.file.design;
        let first_order = MeritFunction::new(design, &template.first_order, variables, RAYS)?;
        let residuals = vec![0.0; exact.shape().residuals()];
        Ok(Self { template, exact, first_order, interrupt, residuals, optimisations: 0 })
    }

    pub(super) fn exact(&self) -> &MeritFunction {
        &self.exact
    }

    pub(super) fn bounds(&self) -> &[Bounds] {
        self.exact.bounds()
    }

    fn watch(&self) -> Result<(), Interrupted> {
        if self.interrupt.load(Ordering::Relaxed) { Err(Interrupted) } else { Ok(()) }
    }

    /// Brings a point to the ratio, collimation and limits wanted, to first order, and traces it;
    /// `None` where it does not get there, or loses rays.
    pub(super) fn bring_to_first_order(
        &mut self,
        point: &[f64],
    ) -> Result<Option<Candidate>, Interrupted> {
        self.watch()?;
        let settings = steps(FIRST_ORDER_STEPS).with_target(FIRST_ORDER_REACHED);
        let Ok(settings) = settings else { return Ok(None) };
        let mut observer = Interruptible { stop: self.interrupt, observer: Unwatched };
        let outcome = solve::run(&mut self.first_order, point, &settings, &mut observer);
        let Ok(outcome) = outcome else { return Ok(None) };
        if outcome.stopped == Stopped::Interrupted {
            return Err(Interrupted);
        }
        let reached = outcome.limits_kept() && outcome.sum_of_squares <= FIRST_ORDER_REACHED;
        if !reached || self.exact.residuals(&outcome.variables, &mut self.residuals).is_err() {
            return Ok(None);
        }
        let merit: f64 = self.residuals.iter().map(|r| r * r).sum();
        let candidate = Candidate { variables: outcome.variables, merit, limits_kept: true };
        Ok(merit.is_finite().then_some(candidate))
    }

    /// Optimises locally from a point; `None` where it cannot be evaluated.
    pub(super) fn improve(
        &mut self,
        from: &[f64],
        effort: Effort,
    ) -> Result<Option<Candidate>, Interrupted> {
        self.watch()?;
        self.optimisations += 1;
        let settings = match effort {
            Effort::Whole => Settings::default(),
            Effort::Steps(most) => steps(most),
        };
        let mut observer = Interruptible { stop: self.interrupt, observer: Unwatched };
        let outcome = solve::run(&mut self.exact, from, &settings, &mut observer);
        let Ok(outcome) = outcome else { return Ok(None) };
        if outcome.stopped == Stopped::Interrupted {
            return Err(Interrupted);
        }
        Ok(Some(Candidate {
            limits_kept: outcome.limits_kept(),
            merit: outcome.sum_of_squares,
            variables: outcome.variables,
        }))
    }

    /// Improves each candidate, drops what cannot be evaluated, keeps the best `count`.
    pub(super) fn halve(
        &mut self,
        candidates: &mut Vec<Candidate>,
        effort: Effort,
        count: usize,
    ) -> Result<(), Interrupted> {
        for candidate in candidates.iter_mut() {
            if let Some(improved) = self.improve(&candidate.variables, effort)? {
                *candidate = improved;
            }
        }
        super::candidate::keep_best(candidates, count);
        Ok(())
    }
}

/// A short local optimisation: three steps that bring less than a thousandth of the merit end it.
fn steps(most: u64) -> Settings {
    let short = Settings::default().with_max_iterations(most);
    short.and_then(|settings| settings.with_reduction(1e-3)).unwrap_or_default()
}
