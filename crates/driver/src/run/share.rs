//! The part of the units that one process takes.

use std::fmt;
use std::num::NonZeroU64;
use std::str::FromStr;

use serde::{Deserialize, Serialize};

/// Every `of`-th unit, beginning with unit `index` − 1. The whole is part 1 of 1.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(into = "(u64, u64)", try_from = "(u64, u64)")]
pub struct Share {
    of: NonZeroU64,
    index: NonZeroU64,
}

/// Not a part.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum ShareError {
    /// Not written as a part.
    #[error("{0:?} is not of the form I/N, such as 3/16")]
    Form(String),
    /// There is no such part.
    #[error(
        "there is no part {index} of {of}: parts are numbered 1 to N, N at most {}",
        Share::MOST
    )]
    Range {
        /// The part asked for.
        index: u64,
        /// Number of parts.
        of: u64,
    },
}

impl Share {
    /// All units.
    pub const WHOLE: Self = Self { of: NonZeroU64::MIN, index: NonZeroU64::MIN };

    /// Most parts a run can be split into.
    pub(crate) const MOST: u64 = 100_000;

    /// Part `index` of `of`, counted from one.
    ///
    /// # Errors
    /// There is no such part.
    pub fn new(index: u64, of: u64) -> Result<Self, ShareError> {
        match (NonZeroU64::new(index), NonZeroU64::new(of)) {
            (Some(i), Some(n)) if i <= n && of <= Self::MOST => Ok(Self { of: n, index: i }),
            _ => Err(ShareError::Range { index, of }),
        }
    }

    /// Which part, from one.
    #[must_use]
    pub(crate) fn index(self) -> u64 {
        self.index.get()
    }

    /// Of how many.
    #[must_use]
    pub fn of(self) -> u64 {
        self.of.get()
    }

    /// Whether this is everything.
    #[must_use]
    pub fn is_whole(self) -> bool {
        self.of() == 1
    }

    /// All parts of a run split like this one.
    pub(crate) fn all(of: u64) -> impl Iterator<Item = Self> {
        (1..=of).filter_map(move |index| Self::new(index, of).ok())
    }

    /// Whether a unit belongs to it.
    #[must_use]
    pub(crate) fn holds(self, number: u64) -> bool {
        number % self.of == self.index() - 1
    }

    /// How many of the first `total` units belong to it.
    #[must_use]
    pub(crate) fn count(self, total: u64) -> u64 {
        total.saturating_add(self.of() - self.index()) / self.of
    }

    /// Its own n-th unit, from zero; `None` beyond the last number there is.
    pub(super) fn number(self, nth: u64) -> Option<u64> {
        nth.checked_mul(self.of())?.checked_add(self.index() - 1)
    }

    /// Which of its own units a number is.
    pub(super) fn nth(self, number: u64) -> u64 {
        number / self.of
    }
}

impl fmt::Display for Share {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}/{}", self.index, self.of)
    }
}

impl FromStr for Share {
    type Err = ShareError;

    fn from_str(text: &str) -> Result<Self, ShareError> {
        let numbers = text
            .split_once('/')
            .and_then(|(index, of)| Some((index.trim().parse().ok()?, of.trim().parse().ok()?)));
        let (index, of) = numbers.ok_or_else(|| ShareError::Form(text.to_owned()))?;
        Self::new(index, of)
    }
}

impl From<Share> for (u64, u64) {
    fn from(share: Share) -> Self {
        (share.index(), share.of())
    }
}

impl TryFrom<(u64, u64)> for Share {
    type Error = ShareError;

    fn try_from((index, of): (u64, u64)) -> Result<Self, ShareError> {
        Self::new(index, of)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_parts_make_up_the_whole_and_share_nothing() {
        for of in [1, 2, 3, 7] {
            for total in 0..30 {
                let parts: Vec<Share> = Share::all(of).collect();
                for number in 0..total {
                    assert_eq!(parts.iter().filter(|part| part.holds(number)).count(), 1);
                }
                for part in parts {
                    let held = (0..total).filter(|&number| part.holds(number));
                    let own: Vec<u64> =
                        (0..part.count(total)).filter_map(|nth| part.number(nth)).collect();
                    assert_eq!(held.collect::<Vec<_>>(), own);
                    assert!(own.iter().enumerate().all(|(n, &x)| part.nth(x) == n as u64));
                }
            }
        }
    }

    #[test]
    fn a_part_is_read_as_it_is_written() {
        assert_eq!("3/16".parse::<Share>().unwrap().to_string(), "3/16");
        for wrong in ["0/4", "5/4", "1/0", "1/100001"] {
            assert!(matches!(wrong.parse::<Share>(), Err(ShareError::Range { .. })), "{wrong}");
        }
        for wrong in ["", "3", "3/", "a/b", "-1/3", "1/2/3"] {
            assert!(matches!(wrong.parse::<Share>(), Err(ShareError::Form(_))), "{wrong}");
        }
    }
}
