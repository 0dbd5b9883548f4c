//! What a search may be told.

use serde::{Deserialize, Serialize};

/// How a start goes on from the best of its points.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Strategy {
    /// It does not: multistart from low-discrepancy points (A. H. G. Rinnooy Kan and G. T. Timmer,
    /// Math. Program. 39, 27 (1987); points after Sobol), with successive halving.
    #[default]
    Multistart,
    /// Basin hopping (D. J. Wales and J. P. K. Doye, J. Phys. Chem. A 101, 5111 (1997)) in its
    /// monotonic form (R. H. Leary, J. Global Optim. 18, 367 (2000)): shake the best, optimise
    /// locally, keep it if it is better.
    BasinHopping,
    /// It does without: differential evolution (R. Storn and K. Price, J. Global Optim. 11, 341
    /// (1997)) over the points themselves, each improved a little before it is judged.
    DifferentialEvolution,
}

impl Strategy {
    /// All there are.
    pub const ALL: [Self; 3] = [Self::Multistart, Self::BasinHopping, Self::DifferentialEvolution];

    /// Its name in settings and tables.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Self::Multistart => "multistart",
            Self::BasinHopping => "basin-hopping",
            Self::DifferentialEvolution => "differential-evolution",
        }
    }
}

/// Settings of a search. They are part of what a start's result depends on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
pub struct SearchSettings {
    /// How starts go on.
    pub strategy: Strategy,
}
