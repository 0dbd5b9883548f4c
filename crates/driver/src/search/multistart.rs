//! Multistart: many points, halved again and again.

use super::candidate::Candidate;
use super::source::Quarry;
use super::workbench::{Effort, Workbench};
use crate::run::Interrupted;
use crate::sampling::RandomStream;

/// Candidates that enter the halvings.
const ENTER: usize = 24;
/// Per halving: steps each candidate is given, and how many then go on.
const HALVINGS: [(u64, usize); 2] = [(10, 6), (40, 2)];

/// The best candidates of a start, best first, improved but not finished.
pub(super) fn best(
    quarry: &mut Quarry<'_>,
    bench: &mut Workbench<'_>,
    random: &mut RandomStream,
) -> Result<Vec<Candidate>, Interrupted> {
    let mut candidates = quarry.draw(bench, ENTER, random)?;
    for (steps, count) in HALVINGS {
        bench.halve(&mut candidates, Effort::Steps(steps), count)?;
    }
    Ok(candidates)
}
