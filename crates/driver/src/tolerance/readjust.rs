//! Re-adjustment: the spacings a user turns until the system is as good as it gets.
//!
//! Minimised is what the goals make of the state: Σ (measured/within)². The measured row is exact;
//! its derivatives by the spacings are those of the design as drawn, which the errors hardly
//! change, so that the Gauss-Newton step is a chord step: it converges in proportion to the
//! errors, a digit or two a step (C. T. Kelley, *Iterative Methods for Linear and Nonlinear
//! Equations*, SIAM 1995, §5.4.1).

use merit_function::block::Bounds;
use nalgebra::{DMatrix, DVector};

use super::bench::Bench;
use super::built::{BuiltState, Gauges, StateFault, StateNumbers};

/// Most steps.
const STEPS: usize = 12;
/// A step by less than this is the last, mm.
const SMALL_MM: f64 = 1e-5;
/// Added to the diagonal so that a spacing that does nothing stays where it is, as a part of the
/// largest entry.
const DAMPING: f64 = 1e-12;

/// How the spacings of one state act on what is measured there.
#[derive(Debug, Clone)]
pub(crate) struct Levers {
    /// Weighted derivatives, rows × spacings.
    jacobian: DMatrix<f64>,
    /// JᵀJ, damped.
    normal: DMatrix<f64>,
    /// What each row counts: one over what is allowed.
    row_weights: Vec<f64>,
}

/// Where re-adjustment ended.
#[derive(Debug, Clone)]
pub(crate) struct Readjusted {
    /// By how much each spacing has moved, mm.
    pub(crate) moved_mm: Vec<f64>,
    /// Whether a spacing stopped at its bound.
    pub(crate) at_bound: bool,
}

impl Levers {
    /// The levers of a state.
    pub(crate) fn of(bench: &Bench<'_>, k: usize) -> Self {
        let state = &bench.states[k];
        let rays = bench.roots.len() * state.trains.len();
        let row_weights = state.requirement.row_weights(rays);
        let spacings = bench.readjusted(k);
        let mut jacobian = DMatrix::zeros(row_weights.len(), spacings.len());
        for (column, &(packed, _)) in spacings.iter().enumerate() {
            let by = bench.by_packed(k, packed);
            for (row, weight) in row_weights.iter().enumerate() {
                jacobian[(row, column)] = weight * by[row];
            }
        }
        let mut normal = jacobian.tr_mul(&jacobian);
        let largest = normal.diagonal().max();
        for i in 0..normal.nrows() {
            normal[(i, i)] += DAMPING * largest.max(f64::MIN_POSITIVE);
        }
        Self { jacobian, normal, row_weights }
    }

    /// The measured row, weighted.
    fn weighted(&self, row: &[f64]) -> DVector<f64> {
        DVector::from_iterator(
            row.len(),
            row.iter().zip(&self.row_weights).map(|(row, weight)| row * weight),
        )
    }

    /// The step that minimises |r + Jp|² within low ≤ p ≤ high: what runs into a bound is held
    /// there and the rest solved again.
    fn step(&self, residuals: &DVector<f64>, room: &[Bounds]) -> DVector<f64> {
        let count = room.len();
        let gradient = self.jacobian.tr_mul(residuals);
        let mut step = DVector::zeros(count);
        let mut held = vec![false; count];
        for _ in 0..=count {
            let free: Vec<usize> = (0..count).filter(|&i| !held[i]).collect();
            let normal = self.normal.select_rows(&free).select_columns(&free);
            let mut right = DVector::zeros(free.len());
            for (i, &at) in free.iter().enumerate() {
                let by_held: f64 =
                    (0..count).filter(|&j| held[j]).map(|j| self.normal[(at, j)] * step[j]).sum();
                right[i] = -gradient[at] - by_held;
            }
            let Some(solved) = normal.cholesky().map(|factor| factor.solve(&right)) else {
                return step;
            };
            for (i, &at) in free.iter().enumerate() {
                step[at] = solved[i];
            }
            let outside = free.iter().copied().find(|&at| room[at].clamp(step[at]) != step[at]);
            let Some(at) = outside else { return step };
            step[at] = room[at].clamp(step[at]);
            held[at] = true;
        }
        step
    }

    /// What a change of the measured row is once the spacings have followed it, to first order,
    /// and by how much they have, mm.
    pub(crate) fn follow(
        &self,
        unweighted: &[f64],
        by_spacing: &[Vec<f64>],
    ) -> (Vec<f64>, Vec<f64>) {
        let open = vec![Bounds::FREE; by_spacing.len()];
        let step = self.step(&self.weighted(unweighted), &open);
        let mut after = unweighted.to_vec();
        for (moved, by) in step.iter().zip(by_spacing) {
            for (after, by) in after.iter_mut().zip(by) {
                *after += moved * by;
            }
        }
        (after, step.as_slice().to_vec())
    }
}

impl Bench<'_> {
    /// Re-adjusts a state: the packed variables and the state itself are moved to where it is
    /// best.
    pub(crate) fn readjust(
        &self,
        k: usize,
        levers: &Levers,
        packed: &mut [f64],
        state: &mut BuiltState,
        gauges: &mut Gauges,
    ) -> Result<(StateNumbers, Readjusted), StateFault> {
        let spacings = self.readjusted(k);
        let start: Vec<f64> = spacings.iter().map(|&(at, _)| packed[at]).collect();
        let mut numbers = self.measure(k, state, gauges)?;
        let mut residuals = levers.weighted(&gauges.row);
        let steps = if spacings.is_empty() { 0 } else { STEPS };
        for _ in 0..steps {
            let room: Vec<Bounds> = spacings
                .iter()
                .map(|&(at, Bounds { low, high })| Bounds {
                    low: low - packed[at],
                    high: high - packed[at],
                })
                .collect();
            let step = levers.step(&residuals, &room);
            let before: Vec<f64> = spacings.iter().map(|&(at, _)| packed[at]).collect();
            for (&(at, bounds), moved) in spacings.iter().zip(&step) {
                packed[at] = bounds.clamp(packed[at] + moved);
            }
            self.move_to(k, packed, state);
            let tried = self.measure(k, state, gauges);
            let better = tried
                .ok()
                .filter(|_| levers.weighted(&gauges.row).norm_squared() < residuals.norm_squared());
            let Some(better) = better else {
                for (&(at, _), before) in spacings.iter().zip(before) {
                    packed[at] = before;
                }
                self.move_to(k, packed, state);
                break;
            };
            (numbers, residuals) = (better, levers.weighted(&gauges.row));
            if step.amax() < SMALL_MM {
                break;
            }
        }
        let moved_mm =
            spacings.iter().zip(start).map(|(&(at, _), start)| packed[at] - start).collect();
        let at_bound = spacings
            .iter()
            .any(|&(at, bounds)| packed[at] <= bounds.low || packed[at] >= bounds.high);
        Ok((numbers, Readjusted { moved_mm, at_bound }))
    }
}
