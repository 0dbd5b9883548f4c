//! Families of layouts: which groups gather light and which spread it.

use serde::Serialize;

/// The sign of a group's power.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Sign {
    /// Positive power: gathers light.
    Positive,
    /// Negative power: spreads light.
    Negative,
}

impl Sign {
    /// +1 or −1.
    #[must_use]
    pub(crate) fn factor(self) -> f64 {
        match self {
            Self::Positive => 1.0,
            Self::Negative => -1.0,
        }
    }

    /// The opposite sign.
    pub(super) fn other(self) -> Self {
        match self {
            Self::Positive => Self::Negative,
            Self::Negative => Self::Positive,
        }
    }

    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Positive => "positive",
            Self::Negative => "negative",
        }
    }
}

/// The signs of the groups' powers, from left to right.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize)]
#[serde(transparent)]
pub struct Family(pub Vec<Sign>);

impl Family {
    /// The signs of some powers.
    pub(super) fn of(powers: &[f64]) -> Self {
        let sign = |&power: &f64| if power > 0.0 { Sign::Positive } else { Sign::Negative };
        Self(powers.iter().map(sign).collect())
    }

    /// Every pattern of signs that could keep a beam collimated, upright or, where `inverted`,
    /// with a focus inside. Groups of negative power alone spread it for good; groups of positive
    /// power alone make it cross the axis, which an upright beam without internal focus must not.
    pub(super) fn all(groups: usize, inverted: bool) -> Vec<Self> {
        let pattern = |bits: usize| {
            let sign =
                |g: usize| if (bits >> g) & 1 == 0 { Sign::Positive } else { Sign::Negative };
            Self((0..groups).map(sign).collect())
        };
        let count = 1_usize << groups;
        let all = (0..count).map(pattern);
        all.filter(|family| {
            let any = |sign| family.0.contains(&sign);
            any(Sign::Positive) && (inverted || any(Sign::Negative))
        })
        .collect()
    }

    /// The signs in words: "positive, negative, positive".
    #[must_use]
    pub fn in_words(&self) -> String {
        let words: Vec<&str> = self.0.iter().map(|sign| sign.word()).collect();
        words.join(", ")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_kind_of_group_alone_makes_no_upright_expander() {
        assert_eq!(Family::all(2, false).len(), 2);
        assert_eq!(Family::all(3, false).len(), 6);
        assert_eq!(Family::all(4, false).len(), 14);
        assert_eq!(Family::all(3, true).len(), 7);
        assert_eq!(Family::all(2, false)[0].in_words(), "negative, positive");
    }
}
