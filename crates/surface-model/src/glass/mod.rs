//! Optical glass: how its refractive index depends on wavelength, and where a glass comes from.
//!
//! A [`Glass`] comes from the embedded catalogue ([`find`]) or from the `glasses` section of a design file
//! (`GlassShelf`). Its one question is [`Glass::index`]: the index at a wavelength, or an error that says over which
//! range the glass is known. There is no extrapolation.
//!
//! The index is relative to air, at 20 °C and 1 atm (some makers measure at 25 °C).
//! Wavelengths are in air, in nanometres; the dispersion laws themselves take micrometres, as they are published.

mod catalogue;
mod common_names;
mod definition;
mod document;
mod equivalents;
mod error;
mod law;
mod points;
mod range;
mod record;
mod search;
mod shelf;
mod status;
mod suggestion;
mod summary;
mod thermal;

use std::sync::Arc;

pub use catalogue::find;
pub use document::GlassDocument;
pub use equivalents::{Equivalent, equivalents};
pub use error::{DefinitionError, GlassError, LookupError, SHORTEST_NM, SearchError};
pub use range::WavelengthRange;
pub use search::search;
pub(crate) use shelf::GlassShelf;
pub use status::GlassStatus;
pub use summary::GlassSummary;
pub use thermal::{REFERENCE_C, THERMAL_RANGE_C};

use law::DispersionLaw;
use thermal::ThermalTerms;

/// The helium d line, nm: the wavelength of `nd`.
pub const D_LINE_NM: f64 = 587.5618;
/// The hydrogen F line, nm: the blue end of the main dispersion nF − nC.
pub const F_LINE_NM: f64 = 486.1327;
/// The hydrogen C line, nm: the red end of the main dispersion nF − nC.
pub const C_LINE_NM: f64 = 656.2725;

/// An optical glass, crystal or made-up medium. Cheap to clone: clones share their data.
#[derive(Clone, Debug, PartialEq)]
pub struct Glass {
    data: Arc<GlassData>,
    /// Where it is not at 20 °C, its temperature.
    temperature_c: Option<f64>,
}

#[derive(Clone, Debug, PartialEq)]
struct GlassData {
    name: String,
    maker: Option<String>,
    status: GlassStatus,
    code: Option<String>,
    source: Option<String>,
    law: DispersionLaw,
    /// What a melt, or a chain of melts, adds to the law.
    index_shift: f64,
    range: Option<WavelengthRange>,
    measured_at_c: Option<f64>,
    density_g_cm3: Option<f64>,
    expansion_per_k: Option<f64>,
    thermal: Option<ThermalTerms>,
    /// Change of the index relative to air, 1/K, where the design file gives it.
    index_per_k: Option<f64>,
}

impl Glass {
    fn new(data: GlassData) -> Self {
        Self { data: Arc::new(data), temperature_c: None }
    }

    /// The same glass at another temperature than 20 °C: its index changes by the maker's terms,
    /// or by the `index_per_k` of the design file.
    ///
    /// # Errors
    /// Nothing is known of how it changes, or not at this temperature.
    pub fn at_temperature(&self, temperature_c: f64) -> Result<Self, GlassError> {
        let glass = || self.data.name.clone();
        let (low, high) = THERMAL_RANGE_C;
        if !(low..=high).contains(&temperature_c) {
            return Err(GlassError::OutsideTemperatures { glass: glass(), temperature_c });
        }
        if self.data.thermal.is_none() && self.data.index_per_k.is_none() {
            return Err(GlassError::NoThermalTerms { glass: glass() });
        }
        Ok(Self { data: Arc::clone(&self.data), temperature_c: Some(temperature_c) })
    }

    /// What its temperature makes of an index.
    fn warmed(&self, index: f64, wavelength_um: f64) -> f64 {
        let Some(temperature_c) = self.temperature_c else { return index };
        match (self.data.index_per_k, &self.data.thermal) {
            (Some(per_k), _) => index + per_k * (temperature_c - REFERENCE_C),
            (None, Some(terms)) => {
                let at_c = self.data.measured_at_c.unwrap_or(REFERENCE_C);
                thermal::relative_index(terms, (index, at_c), wavelength_um, temperature_c)
            }
            (None, None) => index,
        }
    }

    /// Refractive index at a wavelength in air, nm.
    ///
    /// # Errors
    /// [`GlassError::OutsideRange`] where the glass is not known (both ends of the range are inside), and
    /// [`GlassError::NotAWavelength`] for zero, negative and non-finite numbers.
    pub fn index(&self, wavelength_nm: f64) -> Result<f64, GlassError> {
        let glass = || self.data.name.clone();
        if !(wavelength_nm.is_finite() && wavelength_nm > 0.0) {
            return Err(GlassError::NotAWavelength { glass: glass(), wavelength_nm });
        }
        if let Some(range) = self.data.range
            && !range.contains(wavelength_nm)
        {
            return Err(GlassError::OutsideRange { glass: glass(), wavelength_nm, range });
        }
        let index = self.data.law.index(wavelength_nm / 1000.0) + self.data.index_shift;
        let index = self.warmed(index, wavelength_nm / 1000.0);
        if index.is_finite() {
            Ok(index)
        } else {
            Err(GlassError::NoRealIndex { glass: glass(), wavelength_nm })
        }
    }

    /// The name, without its maker.
    pub fn name(&self) -> &str {
        &self.data.name
    }

    /// Who makes it: `None` for crystals and for glasses of a design file that have no maker's glass behind them.
    pub fn maker(&self) -> Option<&str> {
        self.data.maker.as_deref()
    }

    /// The name a design file would use: with the maker in front (`Schott:F2`) where the name alone is shared.
    pub fn full_name(&self) -> String {
        match self.maker() {
            Some(maker)
                if self.status() != GlassStatus::Own && catalogue::is_shared(self.name()) =>
            {
                format!("{maker}:{}", self.name())
            }
            _ => self.name().to_owned(),
        }
    }

    /// How the maker stocks it, or what else it is.
    pub fn status(&self) -> GlassStatus {
        self.data.status
    }

    /// The six-digit code as the maker prints it: nd − 1 in thousandths, then vd in tenths.
    pub fn code(&self) -> Option<&str> {
        self.data.code.as_deref()
    }

    /// The paper behind the numbers, where no maker stands for them.
    pub fn source(&self) -> Option<&str> {
        self.data.source.as_deref()
    }

    /// Where the index is known; `None` means at every wavelength.
    pub fn range(&self) -> Option<WavelengthRange> {
        self.data.range
    }

    /// Index at the d line, 587.5618 nm; `None` where that is outside the range.
    pub fn nd(&self) -> Option<f64> {
        self.index(D_LINE_NM).ok()
    }

    /// Abbe number (nd − 1)/(nF − nC); `None` where a line is outside the range, or without dispersion.
    pub fn vd(&self) -> Option<f64> {
        let main = self.index(F_LINE_NM).ok()? - self.index(C_LINE_NM).ok()?;
        Some((self.nd()? - 1.0) / main).filter(|vd| vd.is_finite())
    }

    /// Density, g/cm³.
    pub fn density_g_cm3(&self) -> Option<f64> {
        self.data.density_g_cm3
    }

    /// Linear expansion, 1/K, from −30 °C to 70 °C.
    pub fn expansion_per_k(&self) -> Option<f64> {
        self.data.expansion_per_k
    }

    /// Terms of the temperature formula for the absolute index.
    #[cfg(test)]
    fn thermal(&self) -> Option<&ThermalTerms> {
        self.data.thermal.as_ref()
    }
}
