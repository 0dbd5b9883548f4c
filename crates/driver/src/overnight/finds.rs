//! What the starts of a run have found, taken in any order.

use std::collections::BTreeMap;

use serde::Serialize;

use super::merit_with_limits_kept;
use super::ranked::{Ranked, RankedList};
use crate::run::Finished;
use crate::search::{Found, Ranking, StartResult};

/// Designs held beside those that rank: one that is no longer among the best may become so again
/// when a better one takes the place of those it resembles.
const SPARE: usize = 4000;

/// What the starts of a run have found.
#[derive(Debug)]
pub struct Finds {
    ranking: Ranking,
    keep: usize,
    held: BTreeMap<u64, Found>,
    falls: Vec<Fall>,
    ends: Vec<StartEnd>,
    /// How often the ends that are kept were halved.
    halvings: u32,
    starts: u64,
}

/// Most ends of starts that are kept, for a picture.
const ENDS: usize = 2000;

/// Where a start ended.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct StartEnd {
    /// When: seconds of the run, all sessions together.
    pub seconds: f64,
    /// Which.
    pub start: u64,
    /// The merit of its design.
    pub merit: f64,
    /// Whether that keeps every limit.
    pub limits_kept: bool,
}

/// The best merit fell.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Fall {
    /// When: seconds of the run, all sessions together.
    pub seconds: f64,
    /// The start that found it.
    pub start: u64,
    /// To this.
    pub merit: f64,
}

impl Finds {
    /// Nothing yet; the best `keep` designs are wanted.
    #[must_use]
    pub fn new(keep: usize) -> Self {
        Self {
            ranking: Ranking::new(),
            keep,
            held: BTreeMap::new(),
            falls: Vec::new(),
            ends: Vec::new(),
            halvings: 0,
            starts: 0,
        }
    }

    /// Takes note of a finished start.
    pub fn insert(&mut self, finished: Finished<StartResult>) {
        let Finished { seconds, done, .. } = finished;
        self.starts += 1;
        self.ranking.insert(&done);
        if let Some(merit) = merit_with_limits_kept(&done) {
            self.falls.push(Fall { seconds, start: done.number, merit });
            if self.falls.len() > 2 * SPARE {
                self.falls = self.falls();
            }
        }
        if let Some(found) = &done.found {
            let Found { merit, limits_kept, .. } = *found;
            self.end(StartEnd { seconds, start: done.number, merit, limits_kept });
        }
        if let Some(found) = done.found {
            self.held.insert(done.number, found);
            if self.held.len() > self.keep + 2 * SPARE {
                self.let_go();
            }
        }
    }

    /// Keeps the end of a start; of many, those of a half, a quarter, … of all starts.
    fn end(&mut self, end: StartEnd) {
        if is_kept(end.start, self.halvings) {
            self.ends.push(end);
        }
        while self.ends.len() > ENDS {
            self.halvings += 1;
            self.ends.retain(|end| is_kept(end.start, self.halvings));
        }
    }

    /// Where starts ended, in order of time: all of them, or of many an even part.
    #[must_use]
    pub fn ends(&self) -> Vec<StartEnd> {
        let mut ends = self.ends.clone();
        ends.sort_by(|a, b| a.seconds.total_cmp(&b.seconds).then(a.start.cmp(&b.start)));
        ends
    }

    /// Keeps the designs that rank and, as spare, those with the best merits.
    fn let_go(&mut self) {
        let mut by_merit: Vec<(u64, u64)> =
            self.held.iter().map(|(&number, found)| (found.merit.to_bits(), number)).collect();
        by_merit.sort_unstable();
        let mut wanted = self.ranking.best(self.keep);
        wanted.extend(by_merit.into_iter().take(SPARE).map(|(_, number)| number));
        wanted.sort_unstable();
        self.held.retain(|number, _| wanted.binary_search(number).is_ok());
    }

    /// Starts finished.
    #[must_use]
    pub fn starts(&self) -> u64 {
        self.starts
    }

    /// How the best merit of a design that keeps its limits fell with time.
    #[must_use]
    pub fn falls(&self) -> Vec<Fall> {
        let mut falls = self.falls.clone();
        falls.sort_by(|a, b| a.seconds.total_cmp(&b.seconds).then(a.start.cmp(&b.start)));
        let mut best = f64::INFINITY;
        falls.retain(|fall| {
            let falls = fall.merit < best;
            best = best.min(fall.merit);
            falls
        });
        falls
    }

    /// Merits of the best few, best first.
    #[must_use]
    pub fn best_merits(&self, count: usize) -> Vec<f64> {
        let best = self.ranking.best(count);
        best.iter().filter_map(|number| Some(self.held.get(number)?.merit)).collect()
    }

    /// Numbers of ranking designs, of starts below `below`, that are no longer held:
    /// [`fetch`](super::fetch) reads them once more.
    #[must_use]
    pub fn missing(&self, below: Option<u64>) -> Vec<u64> {
        let mut best = self.ranking.best_below(self.keep, below);
        best.retain(|number| !self.held.contains_key(number));
        best
    }

    /// Holds a design again.
    pub(crate) fn hold(&mut self, number: u64, found: Found) {
        self.held.insert(number, found);
    }

    /// The ranked list of the starts below `below`, of which `starts` are finished.
    #[must_use]
    pub fn list(&self, below: Option<u64>, starts: u64) -> RankedList {
        let best = self.ranking.best_below(self.keep, below);
        let held = best.iter().filter_map(|number| Some((*number, self.held.get(number)?)));
        let ranked = held.zip(1..).map(|((number, found), rank)| Ranked::of(rank, number, found));
        RankedList::new(starts, self.ranking.times_best_found(below) as u64, ranked.collect())
    }
}

/// Whether a start is still among those that are kept after so many halvings. Fibonacci hashing
/// (D. E. Knuth, The Art of Computer Programming 3, section 6.4) scatters the numbers, so that
/// every second start is not all of one part of a run.
fn is_kept(start: u64, halvings: u32) -> bool {
    start.wrapping_mul(0x9E37_79B9_7F4A_7C15).leading_zeros() >= halvings
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn of_many_ends_an_even_part_is_kept_whatever_their_order() {
        let end =
            |start: u64| StartEnd { seconds: start as f64, start, merit: 1.0, limits_kept: true };
        let kept = |numbers: &mut dyn Iterator<Item = u64>| {
            let mut finds = Finds::new(1);
            numbers.for_each(|number| finds.end(end(number)));
            finds.ends().iter().map(|end| end.start).collect::<Vec<_>>()
        };
        let forward = kept(&mut (0..20_000));
        assert_eq!(kept(&mut (0..20_000).rev()), forward);
        assert!((ENDS / 3..=ENDS).contains(&forward.len()), "{}", forward.len());
        let of_a_part = kept(&mut (0..5000).map(|nth| 4 * nth + 3));
        assert!((ENDS / 3..=ENDS).contains(&of_a_part.len()), "{}", of_a_part.len());
        assert_eq!(kept(&mut (0..100)).len(), 100);
    }
}
