//! The laser as its data sheet describes it: beam quality, waist, pulses, pointing; and what the
//! maker says coatings and glass will bear.

mod waist;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use crate::gaussian::GaussianBeam;
use waist::AtEntry;

/// The keys of a data sheet that, with the diameter at the first surface, fix a Gaussian beam: at
/// most two of them. Without `m_squared`, and where nothing else says it, M² is 1; without a word
/// on the waist, it is at the first surface.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct BeamForm {
    /// Beam propagation factor, at least 1.
    pub m_squared: Option<f64>,
    /// Divergence, full angle between 1/e² points far away, mrad.
    pub divergence_mrad: Option<f64>,
    /// 1/e² diameter of the waist, mm.
    pub waist_diameter_mm: Option<f64>,
    /// From the waist to the first surface, mm; negative when the waist would be behind it.
    pub waist_distance_mm: Option<f64>,
}

/// Keys that do not make a beam.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum BeamFormError {
    /// More keys than a beam has freedoms.
    #[error(
        "m_squared, divergence_mrad, waist_diameter_mm and waist_distance_mm contradict each other"
    )]
    TooMany,
    /// A waist wider than the beam elsewhere.
    #[error("the waist of {} mm is wider than the beam of {diameter_mm} mm", digits(*.waist_diameter_mm))]
    WaistTooWide {
        /// The waist given or found, mm.
        waist_diameter_mm: f64,
        /// Diameter at the first surface, mm.
        diameter_mm: f64,
    },
    /// M² and divergence whose waist is wider than the beam.
    #[error(
        "M² {m_squared} and a divergence of {divergence_mrad} mrad contradict the diameter: they \
         make a waist of {} mm, wider than the beam of {diameter_mm} mm",
        digits(*.waist_diameter_mm)
    )]
    TooNarrow {
        /// M² given.
        m_squared: f64,
        /// Full angle given, mrad.
        divergence_mrad: f64,
        /// The waist they make, mm.
        waist_diameter_mm: f64,
        /// Diameter at the first surface, mm.
        diameter_mm: f64,
    },
    /// A beam better than diffraction allows.
    #[error("waist and divergence make M² {m_squared:.4} at {wavelength_nm} nm")]
    BelowDiffraction {
        /// What M² would have to be.
        m_squared: f64,
        /// The wavelength, nm.
        wavelength_nm: f64,
    },
    /// A waist so far away that the beam could not be so narrow at the first surface.
    #[error("no beam of {diameter_mm} mm has its waist {waist_distance_mm} mm away")]
    TooFar {
        /// Diameter at the first surface, mm.
        diameter_mm: f64,
        /// The distance given, mm.
        waist_distance_mm: f64,
    },
}

impl BeamFormError {
    /// What would have been right.
    #[must_use]
    pub fn expected(&self) -> String {
        match self {
            Self::TooMany => "at most two of them beside diameter_mm: the rest follows".into(),
            Self::WaistTooWide { .. } => {
                "a waist no wider than diameter_mm, the diameter at the first surface".into()
            }
            Self::TooNarrow { m_squared, waist_diameter_mm, diameter_mm, divergence_mrad } => {
                let ratio = waist_diameter_mm / diameter_mm;
                let divergence =
                    format!("a divergence of at least {} mrad", digits(divergence_mrad * ratio));
                let m_squared = m_squared / ratio;
                if m_squared < 1.0 {
                    return divergence;
                }
                format!("M² of at most {}, or {divergence}", digits(m_squared))
            }
            Self::BelowDiffraction { .. } => "M² of at least 1: no beam is better".into(),
            Self::TooFar { .. } => {
                "a waist so near, or a beam so good, that diffraction allows it".into()
            }
        }
    }

    /// What to do about it.
    #[must_use]
    pub fn advice(&self) -> Option<String> {
        match self {
            Self::TooMany => Some("leave out what the maker gives with the least certainty".into()),
            Self::BelowDiffraction { m_squared, .. } => Some(format!(
                "waists are 1/e² diameters and divergences full angles: their product has to be {:.4} \
                 times as large",
                1.0 / m_squared
            )),
            Self::TooNarrow { .. } => {
                Some("divergences are full angles: a data sheet may give half of them".into())
            }
            Self::WaistTooWide { .. } | Self::TooFar { .. } => None,
        }
    }
}

/// A computed number with as many digits as somebody would compare it by.
fn digits(number: f64) -> String {
    crate::document::rounded(number).to_string()
}

/// How far below 1 a computed M² may be from rounding alone.
const M_SQUARED_ROUNDING: f64 = 1e-9;

impl BeamForm {
    /// Whether no key is given.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// The beam of 1/e² diameter `diameter_mm` at the first surface, its plane of reference, at a
    /// wavelength in air.
    ///
    /// Where two beams fit (distance of the waist and M²), it is the one with the wider waist, not
    /// further off than its Rayleigh length. Where the keys do not say on which side the waist is,
    /// it is before the first surface.
    ///
    /// # Errors
    /// The keys contradict each other, or diffraction.
    pub fn beam(
        &self,
        diameter_mm: f64,
        wavelength_nm: f64,
    ) -> Result<GaussianBeam, BeamFormError> {
        let product_mm = 4.0 * wavelength_nm * 1e-6 / std::f64::consts::PI;
        let waist = AtEntry { diameter_mm, product_mm }.waist(self)?;
        let found = waist.diameter_mm * waist.divergence_rad / product_mm;
        if found < 1.0 - M_SQUARED_ROUNDING {
            return Err(BeamFormError::BelowDiffraction { m_squared: found, wavelength_nm });
        }
        Ok(GaussianBeam {
            waist_radius_mm: 0.5 * waist.diameter_mm,
            half_divergence_rad: 0.5 * waist.divergence_rad,
            waist_at_mm: -waist.distance_mm,
        })
    }
}

/// A coating of every surface that faces air.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct CoatingDocument {
    /// What one surface reflects at the wavelengths of the beam, per cent.
    pub reflectance_percent: f64,
}

/// What surfaces and glass bear, from their maker's damage data: the design's own, never the
/// program's.
#[derive(Debug, Clone, Copy, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ThresholdsDocument {
    /// Of the surfaces that face air, coated or not.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub coating: Option<ThresholdDocument>,
    /// Of the glass, inside and at cemented surfaces.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub glass: Option<ThresholdDocument>,
}

/// A damage threshold in the terms of ISO 21254-1, as a peak value of the beam's cross-section.
#[derive(Debug, Clone, Copy, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ThresholdDocument {
    /// Threshold energy density of a pulse, J/cm².
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub fluence_j_cm2: Option<f64>,
    /// Threshold power density of the mean power, W/cm².
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub irradiance_w_cm2: Option<f64>,
    /// Effective pulse length the energy density was measured at, ns.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub pulse_length_ns: Option<f64>,
    /// How to carry the energy density over to the beam's pulse length; not at all if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub scaling: Option<ScalingDocument>,
}

/// A rule to carry a threshold from one pulse length to another.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub enum ScalingDocument {
    /// In proportion to the square root of the pulse length: heat that diffuses away. Holds from
    /// about 20 ps up (B. C. Stuart et al., Phys. Rev. Lett. 74, 2248 (1995); from memory)
    /// to about 100 ns (common practice, no published source).
    #[serde(rename = "square-root")]
    SquareRoot,
}

/// Pulse lengths between which the square root may be used, ns.
pub const SQUARE_ROOT_RANGE_NS: (f64, f64) = (0.02, 100.0);

impl ThresholdDocument {
    /// Threshold energy density at a pulse length, J/cm²: as given, or scaled where a rule is.
    #[must_use]
    pub fn fluence_j_cm2_at(&self, pulse_length_ns: Option<f64>) -> Option<f64> {
        let given = self.fluence_j_cm2?;
        let lengths = self.pulse_length_ns.zip(pulse_length_ns);
        Some(match (self.scaling, lengths) {
            (Some(ScalingDocument::SquareRoot), Some((from, to))) => given * (to / from).sqrt(),
            _ => given,
        })
    }
}

/// What is known of the laser beside its beam's shape.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Laser {
    /// What fixes the Gaussian beam.
    pub form: BeamForm,
    /// Mean power, W.
    pub power_w: Option<f64>,
    /// Energy of a pulse, mJ.
    pub pulse_energy_mj: Option<f64>,
    /// Effective length of a pulse: its energy over its peak power (ISO 21254-1), ns.
    pub pulse_length_ns: Option<f64>,
    /// Largest angle between beam and axis, mrad.
    pub pointing_mrad: Option<f64>,
    /// What a surface that faces air reflects, 0 to 1; `None` if uncoated.
    pub reflectance: Option<f64>,
    /// What surfaces and glass bear.
    pub thresholds: ThresholdsDocument,
}

impl Laser {
    /// Whether the file says anything of the laser beside wavelength and diameter.
    #[must_use]
    pub fn is_described(&self) -> bool {
        *self != Self::default()
    }

    /// Whether power or energy is given, so that there is something to fear.
    #[must_use]
    pub fn has_power(&self) -> bool {
        self.power_w.is_some() || self.pulse_energy_mj.is_some()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_beam_better_than_diffraction_allows_is_asked_for() {
        let form = |m_squared| BeamForm {
            m_squared: Some(m_squared),
            divergence_mrad: Some(0.1),
            ..BeamForm::default()
        };
        let expected = |m_squared| beam(form(m_squared)).unwrap_err().expected();
        // 4 λ M²/(π θ) of M² = 1.3 is 8.8 mm, of which 2.4 mm would need M² = 0.35.
        assert!(expected(1.3).starts_with("a divergence of at least 0.366"), "{}", expected(1.3));
    }

    const D: f64 = 2.4;
    const NM: f64 = 532.0;

    fn beam(form: BeamForm) -> Result<GaussianBeam, BeamFormError> {
        form.beam(D, NM)
    }

    /// Every pair of keys taken from one beam gives that beam back.
    #[test]
    fn any_two_keys_of_a_beam_give_it_back() {
        let whole = GaussianBeam {
            waist_radius_mm: 1.1,
            half_divergence_rad: (1.2_f64.powi(2) - 1.1_f64.powi(2)).sqrt() / 900.0,
            waist_at_mm: -900.0,
        };
        let m_squared = Some(whole.m_squared(NM));
        let divergence_mrad = Some(2e3 * whole.half_divergence_rad);
        let (waist_diameter_mm, waist_distance_mm) = (Some(2.2), Some(900.0));
        let none = BeamForm::default();
        for form in [
            BeamForm { m_squared, divergence_mrad, ..none },
            BeamForm { m_squared, waist_diameter_mm, ..none },
            BeamForm { m_squared, waist_distance_mm, ..none },
            BeamForm { divergence_mrad, waist_diameter_mm, ..none },
            BeamForm { divergence_mrad, waist_distance_mm, ..none },
            BeamForm { waist_diameter_mm, waist_distance_mm, ..none },
        ] {
            let found = beam(form).unwrap();
            let close = |a: f64, b: f64| (a / b - 1.0).abs() < 1e-9;
            assert!(close(found.waist_radius_mm, whole.waist_radius_mm), "{form:?} {found:?}");
            assert!(close(found.waist_at_mm, whole.waist_at_mm), "{form:?} {found:?}");
            assert!(close(found.half_divergence_rad, whole.half_divergence_rad), "{form:?}");
        }
        let three = BeamForm { m_squared, divergence_mrad, waist_diameter_mm, ..none };
        assert_eq!(beam(three), Err(BeamFormError::TooMany));
    }

    #[test]
    fn a_single_key_has_its_waist_at_the_first_surface() {
        let plain = beam(BeamForm::default()).unwrap();
        assert!((plain.m_squared(NM) - 1.0).abs() < 1e-14 && plain.waist_at_mm == 0.0);
        let wide = beam(BeamForm { divergence_mrad: Some(1.0), ..BeamForm::default() }).unwrap();
        assert_eq!((wide.waist_radius_mm, wide.waist_at_mm), (1.2, 0.0));
        let back = beam(BeamForm { waist_distance_mm: Some(-50.0), ..BeamForm::default() });
        assert_eq!(back.unwrap().waist_at_mm, 50.0);
    }

    #[test]
    fn what_diffraction_forbids_is_refused() {
        let none = BeamForm::default();
        let better = beam(BeamForm { divergence_mrad: Some(0.1), ..none });
        assert!(matches!(better, Err(BeamFormError::BelowDiffraction { .. })), "{better:?}");
        let wider = beam(BeamForm { waist_diameter_mm: Some(3.0), ..none });
        assert!(matches!(wider, Err(BeamFormError::WaistTooWide { .. })), "{wider:?}");
        let far = beam(BeamForm { waist_distance_mm: Some(1e5), ..none });
        assert!(matches!(far, Err(BeamFormError::TooFar { .. })), "{far:?}");
        let beside =
            BeamForm { waist_diameter_mm: Some(2.0), waist_distance_mm: Some(0.0), ..none };
        assert!(beam(beside).is_err());
    }

    #[test]
    fn thresholds_scale_only_when_asked() {
        let given = ThresholdDocument {
            fluence_j_cm2: Some(10.0),
            pulse_length_ns: Some(10.0),
            ..ThresholdDocument::default()
        };
        assert_eq!(given.fluence_j_cm2_at(Some(2.5)), Some(10.0));
        let scaled = ThresholdDocument { scaling: Some(ScalingDocument::SquareRoot), ..given };
        assert_eq!(scaled.fluence_j_cm2_at(Some(2.5)), Some(5.0));
    }
}
