//! A point on its way to a design.

use std::cmp::Ordering;

/// A point of a ground's variables and how good it is.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Candidate {
    /// Which ground of the workbench it stands on.
    pub(super) ground: usize,
    /// Its variables, packed.
    pub(super) variables: Vec<f64>,
    /// Sum of squares of the exact residuals; finite.
    pub(super) merit: f64,
    /// Whether every limit is kept.
    pub(super) limits_kept: bool,
}

impl Candidate {
    /// Better first: limits kept before limits crossed, then by merit.
    pub(super) fn compare(&self, other: &Self) -> Ordering {
        let crossed = |candidate: &Self| !candidate.limits_kept;
        crossed(self).cmp(&crossed(other)).then(self.merit.total_cmp(&other.merit))
    }

    pub(super) fn is_better_than(&self, other: &Self) -> bool {
        self.compare(other) == Ordering::Less
    }
}

/// Keeps the best `count`, best first. The sort is stable: equals stay in the order they came in.
pub(super) fn keep_best(candidates: &mut Vec<Candidate>, count: usize) {
    candidates.sort_by(Candidate::compare);
    candidates.truncate(count);
}
