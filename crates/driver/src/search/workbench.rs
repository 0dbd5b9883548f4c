//! Where a start does its work: the grounds of its candidates, and the local solver on them.

use std::sync::atomic::{AtomicBool, Ordering};

use merit_function::problem::MeritFunction;

use super::candidate::{Candidate, keep_best};
use super::ground::Ground;
use crate::run::Interrupted;
use crate::sampling::RandomStream;
use crate::solve::{self, Interruptible, Outcome, Settings, Stopped, Unwatched};

/// A merit at which nothing is left to gain: every goal met more than ten thousand times over.
const NOTHING_LEFT: f64 = 1e-9;

/// How much work a local optimisation may be.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Effort {
    /// At most so many steps, and none once they bring less than a thousandth.
    Steps(u64),
    /// To convergence.
    Whole,
}

/// The grounds of a start, and the flag that ends it.
pub(super) struct Workbench<'p> {
    grounds: Vec<Ground>,
    interrupt: &'p AtomicBool,
    /// Local optimisations done.
    pub(super) optimisations: u64,
    /// Steps they took.
    pub(super) iterations: u64,
}

impl<'p> Workbench<'p> {
    pub(super) fn new(interrupt: &'p AtomicBool) -> Self {
        Self { grounds: Vec::new(), interrupt, optimisations: 0, iterations: 0 }
    }

    /// Makes room for a ground and tells its place.
    pub(super) fn lay(&mut self, ground: Ground) -> usize {
        self.grounds.push(ground);
        self.grounds.len() - 1
    }

    pub(super) fn ground(&self, candidate: &Candidate) -> &Ground {
        &self.grounds[candidate.ground]
    }

    /// Heeds the flag.
    pub(super) fn watch(&self) -> Result<(), Interrupted> {
        if self.interrupt.load(Ordering::Relaxed) { Err(Interrupted) } else { Ok(()) }
    }

    /// A point of a ground as a candidate that keeps its limits; `None` where it loses rays.
    pub(super) fn stand(&mut self, ground: usize, variables: Vec<f64>) -> Option<Candidate> {
        let merit = self.grounds[ground].merit(&variables)?;
        Some(Candidate { ground, variables, merit, limits_kept: true })
    }

    /// The local solver on any problem of the start; `None` where it cannot begin.
    pub(super) fn solve(
        &self,
        problem: &mut MeritFunction,
        from: &[f64],
        settings: &Settings,
    ) -> Result<Option<Outcome>, Interrupted> {
        solve(problem, from, settings, self.interrupt)
    }

    /// Optimises locally from a point of a ground; `None` where it cannot be evaluated.
    pub(super) fn improve(
        &mut self,
        ground: usize,
        from: &[f64],
        effort: Effort,
    ) -> Result<Option<Candidate>, Interrupted> {
        self.watch()?;
        self.optimisations += 1;
        let settings = match effort {
            Effort::Whole => Settings::default().with_target(NOTHING_LEFT).unwrap_or_default(),
            Effort::Steps(most) => short(most),
        };
        let problem = &mut self.grounds[ground].exact;
        let outcome = solve(problem, from, &settings, self.interrupt)?;
        self.iterations += outcome.as_ref().map_or(0, |outcome| outcome.iterations);
        Ok(outcome.map(|outcome| Candidate {
            ground,
            limits_kept: outcome.limits_kept(),
            merit: outcome.sum_of_squares,
            variables: outcome.variables,
        }))
    }

    /// Improves each candidate and keeps the best `count`, best first.
    pub(super) fn halve(
        &mut self,
        candidates: &mut Vec<Candidate>,
        effort: Effort,
        count: usize,
    ) -> Result<(), Interrupted> {
        for candidate in candidates.iter_mut() {
            let improved = self.improve(candidate.ground, &candidate.variables, effort)?;
            if let Some(improved) = improved {
                *candidate = improved;
            }
        }
        keep_best(candidates, count);
        Ok(())
    }

    /// A candidate's variables, shaken.
    pub(super) fn shake(
        &self,
        candidate: &Candidate,
        share: f64,
        random: &mut RandomStream,
    ) -> Vec<f64> {
        self.ground(candidate).shake(&candidate.variables, share, random)
    }
}

fn solve(
    problem: &mut MeritFunction,
    from: &[f64],
    settings: &Settings,
    interrupt: &AtomicBool,
) -> Result<Option<Outcome>, Interrupted> {
    let mut observer = Interruptible { stop: interrupt, observer: Unwatched };
    match solve::run(problem, from, settings, &mut observer) {
        Ok(outcome) if outcome.stopped == Stopped::Interrupted => Err(Interrupted),
        outcome => Ok(outcome.ok()),
    }
}

/// A short local optimisation: three steps in a row that bring less than a thousandth of the merit
/// end it.
pub(super) fn short(most: u64) -> Settings {
    let short = Settings::default().with_max_iterations(most);
    let short = short.and_then(|settings| settings.with_reduction(1e-3));
    short.and_then(|settings| settings.with_target(NOTHING_LEFT)).unwrap_or_default()
}
