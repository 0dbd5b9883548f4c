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
use super::housing_end::Room;

/// Most steps.
const STEPS: usize = 12;
/// A step by less than this is the last, mm.
const SMALL_MM: f64 = 1e-5;
/// Room at an end of the housing that is none, mm.
const AT_END_MM: f64 = 1e-6;
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

/// A line that a step is stopped at: normal · p = level.
#[derive(Debug, Clone, PartialEq)]
struct Stop {
    normal: DVector<f64>,
    level: f64,
}

/// The lines that a step goes beyond.
fn stops<'a>(
    reach: &'a [Bounds],
    rooms: &'a [Room],
    step: &'a DVector<f64>,
) -> impl Iterator<Item = Stop> + 'a {
    let count = reach.len();
    let bounds = reach.iter().enumerate().filter_map(move |(i, bounds)| {
        let level = bounds.clamp(step[i]);
        let normal = DVector::from_fn(count, |j, _| if i == j { 1.0 } else { 0.0 });
        // To rounding: a step that is held at a line is not beyond it.
        ((level - step[i]).abs() > 1e-12).then_some(Stop { normal, level })
    });
    let ends = rooms.iter().filter_map(move |room| {
        let normal = DVector::from_column_slice(&room.by_spacing);
        let beyond = normal.dot(step) < -room.left_mm - 1e-12;
        beyond.then_some(Stop { normal, level: -room.left_mm })
    });
    bounds.chain(ends)
}

/// Where re-adjustment ended.
#[derive(Debug, Clone)]
pub(crate) struct Readjusted {
    /// By how much each spacing has moved, mm.
    pub(crate) moved_mm: Vec<f64>,
    /// Whether a spacing stopped at its bound, or a group at an end of the housing.
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

    /// The step that minimises |r + Jp|² within low ≤ p ≤ high and the room at the ends of the
    /// housing: what runs into a bound or an end is held there and the rest solved again.
    fn step(&self, residuals: &DVector<f64>, reach: &[Bounds], rooms: &[Room]) -> DVector<f64> {
        let count = reach.len();
        if count == 0 {
            return DVector::zeros(0);
        }
        let gradient = self.jacobian.tr_mul(residuals);
        let mut held: Vec<Stop> = Vec::new();
        let mut step = DVector::zeros(count);
        loop {
            let size = count + held.len();
            let (mut matrix, mut right) = (DMatrix::zeros(size, size), DVector::zeros(size));
            matrix.view_mut((0, 0), (count, count)).copy_from(&self.normal);
            right.rows_mut(0, count).copy_from(&-&gradient);
            for (row, stop) in (count..).zip(&held) {
                matrix.view_mut((0, row), (count, 1)).copy_from(&stop.normal);
                matrix.view_mut((row, 0), (1, count)).copy_from(&stop.normal.transpose());
                right[row] = stop.level;
            }
            let solved = matrix.lu().solve(&right).filter(|x| x.iter().all(|x| x.is_finite()));
            // Stops that say the same twice leave nothing to solve.
            let Some(solved) = solved else { return step };
            step = solved.rows(0, count).into_owned();
            let next = stops(reach, rooms, &step).find(|stop| !held.contains(stop));
            match next.filter(|_| held.len() < count) {
                Some(stop) => held.push(stop),
                None => return step,
            }
        }
    }

    /// What a change of the measured row is once the spacings have followed it, to first order,
    /// and by how much they have, mm.
    pub(crate) fn follow(
        &self,
        unweighted: &[f64],
        by_spacing: &[Vec<f64>],
    ) -> (Vec<f64>, Vec<f64>) {
        let open = vec![Bounds::FREE; by_spacing.len()];
        let step = self.step(&self.weighted(unweighted), &open, &[]);
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
            let rooms = self.rooms(k, packed);
            let outside = rooms.iter().any(|room| room.left_mm < -AT_END_MM);
            let step = levers.step(&residuals, &room, &rooms);
            let before: Vec<f64> = spacings.iter().map(|&(at, _)| packed[at]).collect();
            for (&(at, bounds), moved) in spacings.iter().zip(&step) {
                packed[at] = bounds.clamp(packed[at] + moved);
            }
            self.move_to(k, packed, state);
            let tried = self.measure(k, state, gauges);
            // What errors have pushed out of the tube comes back at any cost.
            let falls = || levers.weighted(&gauges.row).norm_squared() < residuals.norm_squared();
            let better = tried.ok().filter(|_| outside || falls());
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
            .any(|&(at, bounds)| packed[at] <= bounds.low || packed[at] >= bounds.high)
            || self.rooms(k, packed).iter().any(|room| room.left_mm <= AT_END_MM);
        Ok((numbers, Readjusted { moved_mm, at_bound }))
    }
}

#[cfg(test)]
mod tests {
    use surface_model::document::Document;

    use super::super::built::Mounts;
    use super::super::draw::draw;
    use super::super::item::Item;
    use super::super::kind::Form;
    use super::*;
    use crate::design_file::DesignFile;

    /// |p − (3, 1)|².
    fn levers() -> (Levers, DVector<f64>) {
        let levers = Levers {
            jacobian: DMatrix::identity(2, 2),
            normal: DMatrix::identity(2, 2),
            row_weights: vec![1.0; 2],
        };
        (levers, DVector::from_vec(vec![-3.0, -1.0]))
    }

    #[test]
    fn a_step_stops_at_an_end_of_the_housing_and_slides_along_it() {
        let (levers, residuals) = levers();
        let room = Room { left_mm: 2.0, by_spacing: vec![-1.0, -1.0] };
        let open = [Bounds::FREE; 2];
        // The point nearest to (3, 1) with p₁ + p₂ ≤ 2 is (2, 0).
        let step = levers.step(&residuals, &open, std::slice::from_ref(&room));
        assert!((step[0] - 2.0).abs() < 1e-12 && step[1].abs() < 1e-12, "{step}");
        // … and with p₂ ≥ 0.5 it is (1.5, 0.5).
        let reach = [Bounds::FREE, Bounds { low: 0.5, high: f64::INFINITY }];
        let step = levers.step(&residuals, &reach, &[room]);
        assert!((step[0] - 1.5).abs() < 1e-12 && (step[1] - 0.5).abs() < 1e-12, "{step}");
    }

    #[test]
    fn re_adjusted_groups_stay_in_the_tube() {
        // In two of its states the entry lens touches the front of the tube.
        let text = include_str!("../../../../configs/river-as-designed.json");
        let file = DesignFile::read(Document::parse("d", text.as_bytes()).unwrap()).unwrap();
        let items = Item::all(&file.design, &file.tolerances);
        let bench = Bench::new(&file, &file.tolerances, items).unwrap();
        let (mut gauges, mut at_an_end) = (Gauges::default(), 0);
        for number in 0..20 {
            let mut errors = draw(&bench, 1, number);
            for (error, item) in errors.iter_mut().zip(&bench.items) {
                error[0] *= item.item.tolerance;
                if item.item.kind.form() == Form::Across {
                    error[1] *= item.item.tolerance;
                }
            }
            let built = bench.build(&errors);
            for k in 0..bench.states.len() {
                let levers = Levers::of(&bench, k);
                let mut packed = built.packed.clone();
                let mut state = bench.state_of(&built, k, Mounts::AsGiven);
                bench.readjust(k, &levers, &mut packed, &mut state, &mut gauges).unwrap();
                for room in bench.rooms(k, &packed) {
                    assert!(room.left_mm > -1e-9, "{number} {k}: {room:?}");
                    at_an_end += usize::from(room.left_mm < AT_END_MM);
                }
            }
        }
        assert!(at_an_end > 0, "no system was stopped by the tube");
    }
}
