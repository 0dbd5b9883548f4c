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
//! one solve a constraint that enters, and the dense algebra is as small as the working set.
//!
//! The same factors serve several programs (a step, its acceleration, its corrections for curved
//! limits), so the solved columns `H⁻¹n` are kept until the factors change.

use merit_function::block::LimitRow;

use super::cholesky::dot;
use super::normal::NormalEquations;
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

    /// The normal `n`, written to `out`; entries of fixed variables are zero.
    pub(crate) fn write_normal(&self, constraint: Constraint, out: &mut [f64]) {
        out.fill(0.0);
        match constraint {
            Constraint::Low(j) => out[j] = 1.0,
            Constraint::High(j) => out[j] = -1.0,
            Constraint::Limit(i) => {
                let limit = &self.limits[i];
                out[..self.normal.shared()].copy_from_slice(limit.by_shared.as_slice());
                if let Some(state) = limit.state {
                    out[self.normal.own_range(state)].copy_from_slice(limit.by_own.as_slice());
                }
                for (j, entry) in out.iter_mut().enumerate() {
                    if self.normal.is_fixed(j) {
                        *entry = 0.0;
                    }
                }
            }
        }
    }

    /// The constraint the step violates most, if any, and by how much.
    fn most_violated(&self, step: &[f64], working: &WorkingSet) -> Option<Constraint> {
        let mut worst = None;
        let mut worst_score = 0.0;
        for constraint in self.constraints().filter(|&c| !working.contains(c)) {
            let (shortfall, allowed) = self.shortfall(constraint, step);
            if shortfall <= allowed {
                continue;
            }
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
/// their multipliers. The working set found on entry is tried first.
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
    // In exact arithmetic the dual rises at every change and no working set returns. The cap only
    // guards against rounding; what is reached then still satisfies its own working set, and the
    // caller clamps and judges by the merit.
    let changes_allowed = 10 * (program.limits.len() + program.low.len()) + 100;
    for _ in 0..changes_allowed {
        let Some(entering) = program.most_violated(step, working) else { break };
        if let Err(inconsistent) = working.take_in(program, entering, step) {
            working.clear();
            return Err(inconsistent);
        }
        working.settle(program);
        working.step(program, step);
    }
    Ok(())
}

#[cfg(test)]
#[path = "quadratic_tests.rs"]
mod tests;
