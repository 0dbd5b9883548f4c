//! Which units of a part are finished: a gapless beginning and a few beyond it.

use std::collections::BTreeSet;

use super::share::Share;

/// The set of finished units of a part.
#[derive(Debug, Clone)]
pub(super) struct FinishedUnits {
    share: Share,
    /// The part's own units before this one are all finished.
    gapless: u64,
    /// Others that are.
    beyond: BTreeSet<u64>,
}

impl FinishedUnits {
    pub(super) fn new(share: Share) -> Self {
        Self { share, gapless: 0, beyond: BTreeSet::new() }
    }

    /// Adds a unit of the part; whether it is new.
    pub(super) fn insert(&mut self, number: u64) -> bool {
        let nth = self.share.nth(number);
        if nth < self.gapless || !self.beyond.insert(nth) {
            return false;
        }
        while self.beyond.remove(&self.gapless) {
            self.gapless += 1;
        }
        true
    }

    /// Whether the part's n-th unit is finished.
    pub(super) fn has(&self, nth: u64) -> bool {
        nth < self.gapless || self.beyond.contains(&nth)
    }

    /// How many are finished.
    pub(super) fn count(&self) -> u64 {
        self.gapless + self.beyond.len() as u64
    }

    /// How many of the part's first `wanted` are finished.
    pub(super) fn count_below(&self, wanted: u64) -> u64 {
        self.gapless.min(wanted) + self.beyond.range(..wanted).count() as u64
    }

    /// Whether the part's first `wanted` are all finished.
    pub(super) fn has_all_below(&self, wanted: u64) -> bool {
        self.gapless >= wanted
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn gaps_close_in_any_order() {
        let mut units = FinishedUnits::new(Share::new(2, 3).unwrap());
        for number in [4, 1, 10, 10, 1] {
            units.insert(number);
        }
        assert_eq!((units.gapless, units.count()), (2, 3));
        assert!(units.has(0) && units.has(1) && !units.has(2) && units.has(3));
        assert_eq!((units.count_below(3), units.count_below(4)), (2, 3));
        assert!(units.insert(7));
        assert!(units.has_all_below(4) && units.beyond.is_empty());
    }
}
