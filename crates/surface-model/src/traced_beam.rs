//! The beam that rays stand for: how wide it is, how far out it is traced, where it should go.

/// A Gaussian beam as far as rays are traced through it: radius, reach and wavelength are finite
/// and positive.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TracedBeam {
    radius_mm: f64,
    reach: f64,
    wavelength_nm: f64,
    /// Where the beam should come to a focus, mm behind the last vertex; `None`: nowhere.
    focus_mm: Option<f64>,
}

/// A number of a beam that is not finite or not positive.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
#[error("a beam cannot have a {what} of {value}")]
pub struct BeamFault {
    /// Which number.
    pub what: &'static str,
    /// Its value.
    pub value: f64,
}

impl TracedBeam {
    /// A beam of 1/e² radius `radius_mm`, traced to `reach` times that radius, at
    /// `wavelength_nm` in air.
    ///
    /// # Errors
    /// A number is not finite or not positive.
    pub fn new(radius_mm: f64, reach: f64, wavelength_nm: f64) -> Result<Self, BeamFault> {
        let numbers = [("radius", radius_mm), ("reach", reach), ("wavelength", wavelength_nm)];
        let edge = ("outermost ray height", radius_mm * reach);
        for (what, value) in numbers.into_iter().chain([edge]) {
            if !(value.is_finite() && value > 0.0) {
                return Err(BeamFault { what, value });
            }
        }
        Ok(Self { radius_mm, reach, wavelength_nm, focus_mm: None })
    }

    /// The same beam, which should not leave collimated but towards (or, with a negative distance,
    /// from) a point on the axis `focus_mm` behind the last vertex: its wavefront error is the
    /// departure from the sphere around that point.
    #[must_use]
    pub fn focused(self, focus_mm: f64) -> Self {
        Self { focus_mm: Some(focus_mm), ..self }
    }

    /// 1/e² radius where it enters, mm.
    #[must_use]
    pub fn radius_mm(&self) -> f64 {
        self.radius_mm
    }

    /// How far out it is traced, in radii.
    #[must_use]
    pub fn reach(&self) -> f64 {
        self.reach
    }

    /// Wavelength, nm.
    #[must_use]
    pub fn wavelength_nm(&self) -> f64 {
        self.wavelength_nm
    }

    /// Optical path, in mm, that a ray at height `exit_mm` in the plane through the last vertex has
    /// too much or too little where it should go to the focus; 0 for a collimated beam.
    pub(crate) fn path_to_focus_mm(&self, exit_mm: f64) -> f64 {
        self.focus_mm.map_or(0.0, |focus_mm| sphere_path_mm(focus_mm, exit_mm))
    }

    /// Whether it should come to (or from) a focus instead of leaving collimated.
    pub(crate) fn comes_to_a_focus(&self) -> bool {
        self.focus_mm.is_some()
    }

    /// Height of the outermost ray, mm.
    #[must_use]
    pub fn edge_mm(&self) -> f64 {
        self.radius_mm * self.reach
    }

    /// Height at the fraction `part` of the traced area.
    pub(crate) fn height(&self, part: f64) -> f64 {
        part.sqrt() * self.edge_mm()
    }

    /// Waves in a millimetre of path.
    pub(crate) fn waves_per_mm(&self) -> f64 {
        1e6 / self.wavelength_nm
    }
}

/// From a point at height `exit_mm` of a plane to a point on the axis `focus_mm` behind it, less the
/// way along the axis: √(f² + y²) − |f|, with the sign of f, mm.
#[must_use]
pub fn sphere_path_mm(focus_mm: f64, exit_mm: f64) -> f64 {
    exit_mm * exit_mm / (focus_mm + focus_mm.signum() * focus_mm.hypot(exit_mm))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_beam_of_no_size_is_no_beam() {
        for (radius, reach, wavelength) in [(0.0, 1.5, 532.0), (1.0, f64::NAN, 532.0)] {
            assert!(TracedBeam::new(radius, reach, wavelength).is_err());
        }
        let error = TracedBeam::new(1.0, 1.5, -532.0).unwrap_err();
        assert_eq!(error, BeamFault { what: "wavelength", value: -532.0 });
    }

    #[test]
    fn the_way_to_a_focus_is_the_hypotenuse() {
        let converging = sphere_path_mm(80.0, 3.0);
        assert!((converging - (80.0_f64.hypot(3.0) - 80.0)).abs() < 1e-13);
        let diverging = sphere_path_mm(-80.0, 3.0);
        assert!((diverging + (80.0_f64.hypot(3.0) - 80.0)).abs() < 1e-13);
    }
}
