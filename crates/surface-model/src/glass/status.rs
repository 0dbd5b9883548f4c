//! How a glass is to be had.

use std::fmt;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// How a maker stocks a glass, or what else it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum GlassStatus {
    /// The maker recommends it for new designs and keeps it in stock.
    Preferred,
    /// In the maker's regular list.
    Standard,
    /// Made to order.
    Special,
    /// The source gives no standing: it may be discontinued.
    Unlisted,
    /// A crystal: no glass melt.
    Crystal,
    /// Defined by the design file.
    Own,
}

impl GlassStatus {
    /// The word used in files and tables.
    pub fn word(self) -> &'static str {
        match self {
            Self::Preferred => "preferred",
            Self::Standard => "standard",
            Self::Special => "special",
            Self::Unlisted => "unlisted",
            Self::Crystal => "crystal",
            Self::Own => "own",
        }
    }
}

impl fmt::Display for GlassStatus {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(self.word())
    }
}
