//! Why a brief has no start whatever the lenses.

use surface_model::document::{Address, Complaint, Complaints, Place, rounded};

use crate::brief::BriefFile;

/// A contradiction in a brief that no layout gets around.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
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
    /// A pulse is too strong before any lens has done anything.
    #[error(
        "a pulse has {} J/cm² already at the first surface, beyond the limit of {most_j_cm2}",
        rounded(*.fluence_j_cm2)
    )]
    Entrance {
        /// Peak of the pulse's energy density there, J/cm².
        fluence_j_cm2: f64,
        /// The limit, J/cm².
        most_j_cm2: f64,
        /// The 1/e² diameter at which it would be kept, mm.
        wide_enough_mm: f64,
    },
}

impl StartError {
    /// The same as a complaint about the brief, at its place in the text.
    #[must_use]
    pub fn in_brief(&self, brief: &BriefFile) -> Complaints {
        let root = Address::root;
        let at = match self {
            Self::Inverted => {
                let first = brief.ratios.iter().position(|ratio| ratio.ratio < 0.0);
                root().key("ratios").index(first.unwrap_or_default())
            }
            Self::TooFewMovers { .. } => root().key("housing").key("fixed"),
            Self::TooManyMovers { .. } => root().key("limits"),
            Self::NoPair => root().key("glasses_allowed"),
            Self::Entrance { .. } => root().key("limits").key("fluence_j_cm2"),
        };
        let complaint = Complaint {
            place: Place::Value(at),
            found: self.to_string(),
            expected: None,
            advice: Some(self.advice()),
        };
        brief.document().refuse([complaint])
    }

    /// What to do about it.
    pub(super) fn advice(&self) -> String {
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
            Self::Entrance { wide_enough_mm, .. } => format!(
                "a weaker pulse, or a beam of at least {} mm; no lens changes what enters",
                rounded(*wide_enough_mm)
            ),
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
