//! Handing out units, in order, to whoever is free.

use std::sync::{Mutex, PoisonError};

use super::finished::FinishedUnits;
use super::share::Share;

/// Hands out the units of a part that are not finished.
#[derive(Debug)]
pub(super) struct Dispenser {
    share: Share,
    finished: FinishedUnits,
    at: Mutex<At>,
}

#[derive(Debug)]
struct At {
    next: u64,
    end: Option<u64>,
}

impl Dispenser {
    /// Hands out all but the finished ones, up to the part's `end`-th.
    pub(super) fn new(share: Share, finished: FinishedUnits, end: Option<u64>) -> Self {
        Self { share, finished, at: Mutex::new(At { next: 0, end }) }
    }

    /// The next unit's number.
    pub(super) fn next(&self) -> Option<u64> {
        let mut at = self.at.lock().unwrap_or_else(PoisonError::into_inner);
        loop {
            let nth = at.next;
            if at.end.is_some_and(|end| nth >= end) {
                return None;
            }
            at.next = nth.checked_add(1)?;
            if !self.finished.has(nth) {
                return self.share.number(nth);
            }
        }
    }

    /// No unit from the part's `end`-th on is wanted any more.
    pub(super) fn end_at(&self, end: u64) {
        let mut at = self.at.lock().unwrap_or_else(PoisonError::into_inner);
        at.end = Some(at.end.map_or(end, |before| before.min(end)));
    }
}
