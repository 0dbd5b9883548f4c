//! Why a brief has no start whatever the lenses.

/// A contradiction in a brief that no layout gets around.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum StartError {
    /// An inverted beam is asked for and an internal focus forbidden.
    #[error("a negative ratio inverts the beam through an internal focus, and that is forbidden")]
    Inverted,
    /// Too many groups stand still.
    #[error(
        "{groups} groups with {fixed} of them fixed cannot stay collimated at {ratios} ratios: \
         every ratio needs two spacings of its own"
    )]
    TooFewMovers {
        /// Number of groups.
        groups: usize,
        /// How many are fixed.
        fixed: usize,
        /// Number of ratios.
        ratios: usize,
    },
    /// Limits between the states where ratio and collimation leave a group free.
    #[error(
        "limits between the states are asked for, but of {groups} groups with {fixed} of them \
         fixed more than two move"
    )]
    TooManyMovers {
        /// Number of groups.
        groups: usize,
        /// How many are fixed.
        fixed: usize,
    },
    /// Cemented pairs are asked for of glasses that do not pair.
    #[error("cemented pairs are asked for, but no two allowed glasses differ enough in dispersion")]
    NoPair,
}

impl StartError {
    /// What to do about it.
    #[must_use]
    pub fn advice(&self) -> String {
        match self {
            Self::Inverted => {
                "ask for a positive ratio, or take \"internal_focus\" out of \"limits\"".into()
            }
            Self::TooFewMovers { groups: 2, .. } => {
                "two groups have one ratio only; ask for three groups, or for one ratio".into()
            }
            Self::TooFewMovers { groups: 3, .. } => {
                "take a group out of \"housing\" \"fixed\", or ask for four groups".into()
            }
            Self::TooFewMovers { .. } => "take a group out of \"housing\" \"fixed\"".into(),
            Self::TooManyMovers { .. } => {
                "fix two of four groups, or take \"monotonic\", \"slope_mm_per_ratio\" and \
                 \"between_states\" out of \"limits\""
                    .into()
            }
            Self::NoPair => {
                "allow a second glass of another dispersion under \"glasses_allowed\"".into()
            }
        }
    }
}
