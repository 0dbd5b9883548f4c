//! A glass as one row of a table.

use schemars::JsonSchema;
use serde::Serialize;

use super::{Glass, GlassStatus};

/// One glass as a row of a table or of machine-readable output.
#[derive(Clone, Debug, PartialEq, Serialize, JsonSchema)]
pub struct GlassSummary {
    /// The name a design file would use.
    pub name: String,
    /// Who makes it; null for crystals and own glasses.
    pub maker: Option<String>,
    /// How the maker stocks it, or what else it is.
    pub status: GlassStatus,
    /// The six-digit code, nd − 1 in thousandths and vd in tenths.
    pub code: Option<String>,
    /// Index at the d line, null where that is outside the range.
    pub nd: Option<f64>,
    /// Abbe number, null where it has no meaning.
    pub vd: Option<f64>,
    /// Shortest and longest wavelength at which the index is known, nm; null means everywhere.
    pub range_nm: Option<[f64; 2]>,
    /// Density, g/cm³.
    pub density_g_cm3: Option<f64>,
    /// Linear expansion, 1/K, from −30 °C to 70 °C.
    pub expansion_per_k: Option<f64>,
    /// The paper the numbers are from, where no maker stands for them.
    pub source: Option<String>,
}

impl Glass {
    /// The glass as one row of a table.
    pub fn summary(&self) -> GlassSummary {
        GlassSummary {
            name: self.full_name(),
            maker: self.maker().map(str::to_owned),
            status: self.status(),
            code: self.code().map(str::to_owned),
            nd: self.nd(),
            vd: self.vd(),
            range_nm: self.range().map(|range| [range.low_nm(), range.high_nm()]),
            density_g_cm3: self.density_g_cm3(),
            expansion_per_k: self.expansion_per_k(),
            source: self.source().map(str::to_owned),
        }
    }
}

impl Serialize for Glass {
    /// Writes the [`GlassSummary`].
    fn serialize<S: serde::Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        self.summary().serialize(serializer)
    }
}
