//! The step subproblem: a strictly convex quadratic program,
//!
//! ```text
//!   minimise ½ pᵀH p + gᵀp   over   low ≤ p ≤ high,   aᵢᵀp ≥ bᵢ
//! ```
//!
//! solved by the dual active-set method of Goldfarb and Idnani (Mathematical Programming 27, 1
//! (1983)). It starts from the unconstrained minimum and takes in one violated constraint after
//! the other, dropping those whose multiplier would turn negative; most steps cross nothing and
//! cost one solve. `H` is touched only through solves with its block factors, so a program costs
//! half a solve a constraint that enters, and the dense algebra is as small as the working set.
//!
//! The same factors serve several programs (a step, its acceleration, its corrections for curved
//! limits), so the half-solved normals `L⁻¹n` are kept until the factors change.

use merit_function::block::LimitRow;

use super::cholesky::dot;
use super::normal::{HalfSolved, NormalEquations};
use super::working_set::WorkingSet;

/// Which side of which constraint: all are written `nᵀp ≥ b`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Constraint {
    /// `pⱼ ≥ lowⱼ`.
    Low(usize),
    /// `−pⱼ ≥ −highⱼ`.
    High(usize),
    /// `aᵢᵀp ≥ bᵢ`.
    Limit(usize),
}

/// One quadratic program over the factors of a step.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Program<'a> {
    pub(crate) normal: &'a NormalEquations,
    /// Squared scales, by which violations of different units are compared.
    pub(crate) scale_squares: &'a [f64],
    /// The minimum without any constraint, `−H⁻¹g`.
    pub(crate) free: &'a [f64],
    /// Smallest step of every variable, zero or negative.
    pub(crate) low: &'a [f64],
    /// Largest step of every variable, zero or positive.
    pub(crate) high: &'a [f64],
    /// The limits, whose gradients are the `aᵢ`.
    pub(crate) limits: &'a [LimitRow],
    /// `bᵢ`.
    pub(crate) required: &'a [f64],
}

/// The constraints contradict each other: no step satisfies all of them.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("no step satisfies all limits at once")]
pub(crate) struct Inconsistent;

impl Program<'_> {
    /// Constraints that could enter: bounds of variables that can move, then limits.
    fn constraints(&self) -> impl Iterator<Item = Constraint> + '_ {
        let movable = |&j: &usize| !self.normal.is_fixed(j);
        let lows = (0..self.low.len()).filter(movable).map(Constraint::Low);
        let highs = (0..self.high.len()).filter(movable).map(Constraint::High);
        lows.chain(highs).chain((0..self.limits.len()).map(Constraint::Limit))
    }

    /// `nᵀp`.
    pub(crate) fn along(&self, constraint: Constraint, step: &[f64]) -> f64 {
        match constraint {
            Constraint::Low(j) => step[j],
            Constraint::High(j) => -step[j],
            Constraint::Limit(i) => limit_along(&self.limits[i], self.normal, step),
        }
    }

    /// `b`.
    pub(crate) fn level(&self, constraint: Constraint) -> f64 {
        match constraint {
            Constraint::Low(j) => self.low[j],
            Constraint::High(j) => -self.high[j],
            Constraint::Limit(i) => self.required[i],
        }
    }

    /// How far the step falls short, `b − nᵀp`, and how far it may for rounding.
    fn shortfall(&self, constraint: Constraint, step: &[f64]) -> (f64, f64) {
        let along = self.along(constraint, step);
        let level = self.level(constraint);
        let rounding = 1e-12 * (along.abs() + level.abs()).min(f64::MAX);
        let allowed = match constraint {
            Constraint::Low(_) | Constraint::High(_) => rounding,
            Constraint::Limit(i) => rounding.max(1e-5 * self.limits[i].tolerance),
        };
        (level - along, allowed)
    }

    /// `|D⁻¹n|`, so that shortfalls of different units can be compared.
    fn scaled_length(&self, constraint: Constraint) -> f64 {
        match constraint {
            Constraint::Low(j) | Constraint::High(j) => self.scale_squares[j].sqrt().recip(),
            Constraint::Limit(i) => {
                let limit = &self.limits[i];
                let squares = |gradient: &[f64], scales: &[f64]| -> f64 {
                    gradient.iter().zip(scales).map(|(a, d)| a * a / d).sum()
                };
                let shared = squares(limit.by_shared.as_slice(), self.scale_squares);
                let own = limit.state.map_or(0.0, |state| {
                    let range = self.normal.own_range(state);
                    squares(limit.by_own.as_slice(), &self.scale_squares[range])
                });
                (shared + own).sqrt()
            }
        }
    }

    /// `L⁻¹n`.
    pub(crate) fn half_solved(&self, constraint: Constraint) -> HalfSolved {
        let (state, own, shared) = self.normal_parts(constraint);
        self.normal.half_solve(state, own, shared)
    }

    /// The normal `n`: the state it touches, its own part, its shared part. Entries of fixed
    /// variables are zero.
    fn normal_parts(&self, constraint: Constraint) -> (Option<usize>, Vec<f64>, Vec<f64>) {
        let unit = |j: usize, sign: f64| {
            let state = self.normal.owner(j);
            let mut shared = vec![0.0; self.normal.shared()];
            let range = state.map_or(0..0, |state| self.normal.own_range(state));
            let mut own = vec![0.0; range.len()];
            if state.is_some() {
                own[j - range.start] = sign;
            } else {
                shared[j] = sign;
            }
            (state, own, shared)
        };
        let movable = |(j, a): (usize, &f64)| if self.normal.is_fixed(j) { 0.0 } else { *a };
        match constraint {
            Constraint::Low(j) => unit(j, 1.0),
            Constraint::High(j) => unit(j, -1.0),
            Constraint::Limit(i) => {
                let limit = &self.limits[i];
                let range = limit.state.map_or(0..0, |state| self.normal.own_range(state));
                let own = range.zip(limit.by_own.iter()).map(movable).collect();
                let shared = limit.by_shared.iter().enumerate().map(movable).collect();
                (limit.state, own, shared)
            }
        }
    }

    /// All constraints the step violates and the working set does not hold.
    pub(crate) fn violated<'s>(
        &'s self,
        step: &'s [f64],
        working: &'s WorkingSet,
    ) -> impl Iterator<Item = Constraint> + 's {
        self.constraints().filter(move |&constraint| {
            let (shortfall, allowed) = self.shortfall(constraint, step);
            shortfall > allowed && !working.contains(constraint)
        })
    }

    /// The constraint the step violates most, if any.
    fn most_violated(&self, step: &[f64], working: &WorkingSet) -> Option<Constraint> {
        let mut worst = None;
        let mut worst_score = 0.0;
        for constraint in self.violated(step, working) {
            let (shortfall, _) = self.shortfall(constraint, step);
            let score = shortfall / self.scaled_length(constraint);
            if score > worst_score {
                (worst, worst_score) = (Some(constraint), score);
            }
        }
        worst
    }
}

/// `aᵀp` of a limit.
pub(crate) fn limit_along(limit: &LimitRow, normal: &NormalEquations, step: &[f64]) -> f64 {
    let shared = dot(limit.by_shared.as_slice(), &step[..normal.shared()]);
    shared + limit.state.map_or(0.0, |s| dot(limit.by_own.as_slice(), &step[normal.own_range(s)]))
}

/// Solves the program; `step` receives the minimiser, `working` the constraints it rests on with
/// their multipliers.
///
/// The working set found on entry, and all that the step it leads to violates, are tried first:
/// any set whose multipliers are positive is a place the dual method may start from. (Guessing a
/// second time did not pay.)
///
/// # Errors
/// The constraints are inconsistent; `step` then has no meaning and `working` is empty.
pub(crate) fn solve(
    program: &Program<'_>,
    working: &mut WorkingSet,
    step: &mut Vec<f64>,
) -> Result<(), Inconsistent> {
    working.resume(program);
    working.step(program, step);
    let violated: Vec<Constraint> = program.violated(step, working).collect();
    if violated.len() > 1 {
        working.guess(program, &violated);
        working.step(program, step);
    }
    // In exact arithmetic the dual rises at every change and no working set returns. The cap only
    // guards against rounding; what is reached then still satisfies its own working set, and the
    // caller clamps and judges by the merit.
    let changes_allowed = 10 * (program.limits.len() + program.low.len()) + 100;
    let mut changes = 0;
    while let Some(entering) = program.most_violated(step, working) {
        if let Err(inconsistent) = working.take_in(program, entering, step) {
            working.clear();
            return Err(inconsistent);
        }
        changes += 1;
        if changes == changes_allowed {
            break;
        }
    }
    if changes > 0 {
        working.polish(program, step);
    }
    Ok(())
}

#[cfg(test)]
#[path = "quadratic_tests.rs"]
mod tests;
