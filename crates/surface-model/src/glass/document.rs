//! The `glasses` section of a design file, as written.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// A glass defined by the design file, in exactly one of four ways: `from` another glass with an `index_shift` (a melt),
/// a constant `index`, measured `points`, or `sellmeier` terms with their `range_nm`.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct GlassDocument {
    /// The glass this one is a melt of: a catalogue name, or another glass of this section. Needs `index_shift`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub from: Option<String>,
    /// What the melt adds to the index of `from`, the same at every wavelength; at most 0.05 either way.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub index_shift: Option<f64>,
    /// One index for every wavelength, between 1 and 5.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub index: Option<f64>,
    /// Two or more measured points [wavelength in nm, index], ascending in wavelength. The glass is known from the first
    /// to the last.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub points: Option<Vec<[f64; 2]>>,
    /// Sellmeier terms [B, C in um^2] of n^2 - 1 = offset + sum B L^2/(L^2 - C), L in um. Needs `range_nm`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub sellmeier: Option<Vec<[f64; 2]>>,
    /// The constant beside the Sellmeier terms; zero if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub offset: Option<f64>,
    /// Shortest and longest wavelength at which the Sellmeier terms hold, nm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub range_nm: Option<[f64; 2]>,
    /// Density, g/cm^3. A melt that does not give it has that of `from`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub density_g_cm3: Option<f64>,
    /// Linear expansion, 1/K. A melt that does not give it has that of `from`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub expansion_per_k: Option<f64>,
    /// Change of the index relative to air, 1/K, the same at every wavelength and temperature. A melt that does not
    /// give it changes as `from`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub index_per_k: Option<f64>,
    /// Anything worth remembering; not read by the program.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub note: Option<String>,
}
