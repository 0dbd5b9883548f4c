//! Which waist a beam has, from the keys that are given.

use super::{BeamForm, BeamFormError};

/// A waist as the keys make it.
#[derive(Debug, Clone, Copy)]
pub(super) struct Waist {
    /// Its 1/e² diameter, mm.
    pub(super) diameter_mm: f64,
    /// The full divergence, rad.
    pub(super) divergence_rad: f64,
    /// How far before the first surface it is, mm; negative behind it.
    pub(super) distance_mm: f64,
}

/// What the waist is worked out from beside the keys.
#[derive(Debug, Clone, Copy)]
pub(super) struct AtEntry {
    /// The beam's 1/e² diameter at the first surface, mm.
    pub(super) diameter_mm: f64,
    /// Waist diameter times divergence of a beam with M² = 1, 4λ/π, mm.
    pub(super) product_mm: f64,
}

impl AtEntry {
    /// The waist of a beam of this form.
    ///
    /// # Errors
    /// The keys contradict each other.
    pub(super) fn waist(self, form: &BeamForm) -> Result<Waist, BeamFormError> {
        let (waist, divergence, distance) = match form.waist_distance_mm {
            None => self.on_the_way_in(form)?,
            Some(distance) => self.at_a_distance(form, distance)?,
        };
        Ok(Waist { diameter_mm: waist, divergence_rad: divergence, distance_mm: distance })
    }

    /// Waist, divergence and distance where the distance follows from the others.
    fn on_the_way_in(self, form: &BeamForm) -> Result<(f64, f64, f64), BeamFormError> {
        let Self { diameter_mm, product_mm: product } = self;
        let quality = form.m_squared.unwrap_or(1.0);
        let free = form.m_squared.is_none();
        let divergence = form.divergence_mrad.map(|mrad| mrad * 1e-3);
        Ok(match (divergence, form.waist_diameter_mm) {
            (None, None) => (diameter_mm, product * quality / diameter_mm, 0.0),
            (Some(divergence), None) if free => (diameter_mm, divergence, 0.0),
            (Some(divergence), None) => {
                let waist = product * quality / divergence;
                let contradicted = |_| BeamFormError::TooNarrow {
                    m_squared: quality,
                    divergence_mrad: divergence * 1e3,
                    waist_diameter_mm: waist,
                    diameter_mm,
                };
                (waist, divergence, self.wider(waist).map_err(contradicted)? / divergence)
            }
            (None, Some(waist)) => {
                let divergence = product * quality / waist;
                (waist, divergence, self.wider(waist)? / divergence)
            }
            (Some(divergence), Some(waist)) if free => {
                (waist, divergence, self.wider(waist)? / divergence)
            }
            (Some(_), Some(_)) => return Err(BeamFormError::TooMany),
        })
    }

    /// Waist, divergence and distance where the distance is given.
    fn at_a_distance(
        self,
        form: &BeamForm,
        distance: f64,
    ) -> Result<(f64, f64, f64), BeamFormError> {
        let Self { diameter_mm, product_mm: product } = self;
        let quality = form.m_squared.unwrap_or(1.0);
        let free = form.m_squared.is_none();
        let divergence = form.divergence_mrad.map(|mrad| mrad * 1e-3);
        let too_far = BeamFormError::TooFar { diameter_mm, waist_distance_mm: distance };
        Ok(match (divergence, form.waist_diameter_mm) {
            (None, Some(waist)) if free => {
                let wider = self.wider(waist)?;
                if distance == 0.0 && wider == 0.0 {
                    (waist, product / waist, 0.0)
                } else if distance == 0.0 || wider == 0.0 {
                    return Err(too_far);
                } else {
                    (waist, wider / distance.abs(), distance)
                }
            }
            (Some(divergence), None) if free => {
                let room = diameter_mm * diameter_mm - (divergence * distance).powi(2);
                if room <= 0.0 {
                    return Err(too_far);
                }
                (room.sqrt(), divergence, distance)
            }
            (None, None) => {
                let spread = 2.0 * product * quality * distance.abs();
                let room =
                    (diameter_mm * diameter_mm - spread) * (diameter_mm * diameter_mm + spread);
                if room < 0.0 {
                    return Err(too_far);
                }
                let waist = (0.5 * (diameter_mm * diameter_mm + room.sqrt())).sqrt();
                (waist, product * quality / waist, distance)
            }
            _ => return Err(BeamFormError::TooMany),
        })
    }

    /// By how much, in squares, the beam is wider at the first surface than at its waist, mm.
    fn wider(self, waist_diameter_mm: f64) -> Result<f64, BeamFormError> {
        let diameter_mm = self.diameter_mm;
        let room = diameter_mm * diameter_mm - waist_diameter_mm * waist_diameter_mm;
        if room >= 0.0 {
            Ok(room.sqrt())
        } else {
            Err(BeamFormError::WaistTooWide { waist_diameter_mm, diameter_mm })
        }
    }
}
