//! The best starts whose designs really differ.

use std::collections::BTreeMap;

use super::shape::Shape;
use super::start_result::StartResult;

/// Distance in shape from which on two designs are different.
const DIFFERENT: f64 = 1.0;

/// Order of results: limits kept first, then merit, then number.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct Rank {
    limits_crossed: bool,
    /// The bits of the merit: in the order of the numbers, as none is negative.
    merit: u64,
    number: u64,
}

/// All results of a search by rank, with their shapes and nothing else. What [`Self::best`] says
/// depends on the set of results alone, not on the order in which they came or how often.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Ranking {
    results: BTreeMap<Rank, Shape>,
}

impl Ranking {
    /// No results yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes note of a result. Starts that found nothing leave no trace.
    pub fn insert(&mut self, result: &StartResult) {
        let Some(found) = &result.found else { return };
        let rank = Rank {
            limits_crossed: !found.limits_kept,
            // −0.0 has other bits than 0.0.
            merit: found.merit.max(0.0).to_bits(),
            number: result.number,
        };
        self.results.insert(rank, found.shape.clone());
    }

    /// Numbers of the starts with the best `count` designs, best first, each really different from
    /// all before it: the best, then the best of those unlike it, and so on.
    #[must_use]
    pub fn best(&self, count: usize) -> Vec<u64> {
        self.best_below(count, None)
    }

    /// As [`Self::best`], of the starts with numbers below `below` alone.
    #[must_use]
    pub(crate) fn best_below(&self, count: usize, below: Option<u64>) -> Vec<u64> {
        let mut kept: Vec<(&Rank, &Shape)> = Vec::with_capacity(count);
        for (rank, shape) in self.counted(below) {
            if kept.len() == count {
                break;
            }
            if kept.iter().all(|(_, other)| shape.distance(other) >= DIFFERENT) {
                kept.push((rank, shape));
            }
        }
        kept.into_iter().map(|(rank, _)| rank.number).collect()
    }

    /// How many starts with numbers below `below` ended in the design of rank 1 or one that does not
    /// really differ from it.
    #[must_use]
    pub(crate) fn times_best_found(&self, below: Option<u64>) -> usize {
        let Some((_, best)) = self.counted(below).next() else { return 0 };
        self.counted(below).filter(|(_, shape)| shape.distance(best) < DIFFERENT).count()
    }

    fn counted(&self, below: Option<u64>) -> impl Iterator<Item = (&Rank, &Shape)> {
        self.results.iter().filter(move |(rank, _)| below.is_none_or(|below| rank.number < below))
    }
}
