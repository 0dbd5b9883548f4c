//! Multistart: many points, halved again and again.

use rand::RngExt;

use super::candidate::{Candidate, keep_best};
use super::workbench::{Effort, Interrupted, Workbench};
use crate::sampling::{MOST_DIMENSIONS, RandomStream, Sobol};

/// Points a start draws.
pub(super) const POINTS: u64 = 64;
/// Of how many points one is drawn around the numbers of the file.
const AROUND_THE_FILE: u64 = 8;
/// Per halving: steps each candidate is given, and how many then go on.
const HALVINGS: [(u64, usize); 2] = [(10, 6), (40, 2)];
/// Candidates that enter the halvings.
const ENTER: usize = 24;

/// The points of a start: its own stretch of a low-discrepancy sequence that all starts of a seed
/// share.
pub(super) fn points(
    bench: &mut Workbench<'_>,
    seed: u64,
    number: u64,
    random: &mut RandomStream,
) -> Result<Vec<Candidate>, Interrupted> {
    let dimensions = bench.template.dimensions();
    let sobol = Sobol::shifted(dimensions.min(MOST_DIMENSIONS), seed);
    let file = bench.exact().variables().start().to_vec();
    let mut candidates = Vec::new();
    for i in 0..POINTS {
        let from = if i % AROUND_THE_FILE == 0 {
            let share = if i == 0 { 0.0 } else { 10.0_f64.powf(random.random_range(-2.0..0.5)) };
            bench.template.shake(&file, share, bench.bounds(), random)
        } else {
            let at = number.wrapping_mul(POINTS).wrapping_add(i);
            let mut point = sobol.as_ref().map_or_else(|_| Vec::new(), |sobol| sobol.point(at));
            // Coordinates beyond the sequence's dimensions are random.
            point.resize_with(dimensions, || random.random());
            bench.template.place(&point)
        };
        candidates.extend(bench.bring_to_first_order(&from)?);
    }
    Ok(candidates)
}

/// The best candidates of a start, best first, improved but not finished.
pub(super) fn best(
    bench: &mut Workbench<'_>,
    seed: u64,
    number: u64,
    random: &mut RandomStream,
) -> Result<Vec<Candidate>, Interrupted> {
    let mut candidates = points(bench, seed, number, random)?;
    keep_best(&mut candidates, ENTER);
    for (steps, count) in HALVINGS {
        bench.halve(&mut candidates, Effort::Steps(steps), count)?;
    }
    Ok(candidates)
}
