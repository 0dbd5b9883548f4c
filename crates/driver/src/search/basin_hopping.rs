//! Basin hopping: shake the best, optimise, keep it if it is better.

use rand::RngExt;

use super::candidate::Candidate;
use super::workbench::{Effort, Workbench};
use crate::run::Interrupted;
use crate::sampling::RandomStream;

/// Hops of a start.
const HOPS: usize = 40;
/// Steps of the local optimisation after a hop.
const STEPS: u64 = 40;
/// How far hops go, as powers of ten of an ordinary shake: from next door to another valley.
const REACH: std::ops::Range<f64> = -1.5..0.3;

/// Hops from a candidate, which becomes the best that was seen.
pub(super) fn hop(
    bench: &mut Workbench<'_>,
    best: &mut Candidate,
    random: &mut RandomStream,
) -> Result<(), Interrupted> {
    for _ in 0..HOPS {
        let share = 10.0_f64.powf(random.random_range(REACH));
        let shaken = bench.shake(best, share, random);
        let landed = bench.improve(best.ground, &shaken, Effort::Steps(STEPS))?;
        if let Some(landed) = landed.filter(|landed| landed.is_better_than(best)) {
            *best = landed;
        }
    }
    Ok(())
}
