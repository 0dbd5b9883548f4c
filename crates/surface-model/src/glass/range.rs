//! The wavelengths over which a glass is known.

use std::fmt;

/// A closed range of wavelengths, nm: both ends finite and positive, the first below the second.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WavelengthRange {
    low_nm: f64,
    high_nm: f64,
}

impl WavelengthRange {
    /// A range from its ends, nm; `None` unless 0 < low < high < ∞.
    pub fn new(low_nm: f64, high_nm: f64) -> Option<Self> {
        (0.0 < low_nm && low_nm < high_nm && high_nm.is_finite())
            .then_some(Self { low_nm, high_nm })
    }

    /// A range from micrometres as catalogues print them. Rounded to a femtometre, so that 0.334 µm is 334 nm exactly.
    pub(super) fn from_um(low_um: f64, high_um: f64) -> Option<Self> {
        let to_nm = |um: f64| (um * 1e9).round() / 1e6;
        Self::new(to_nm(low_um), to_nm(high_um))
    }

    /// Shortest wavelength, nm.
    pub fn low_nm(self) -> f64 {
        self.low_nm
    }

    /// Longest wavelength, nm.
    pub fn high_nm(self) -> f64 {
        self.high_nm
    }

    /// Whether the wavelength is inside; both ends are. False for NaN.
    pub fn contains(self, wavelength_nm: f64) -> bool {
        (self.low_nm..=self.high_nm).contains(&wavelength_nm)
    }

    /// Wavelengths spread evenly from end to end, ends included.
    pub(super) fn samples(self, steps: u32) -> impl Iterator<Item = f64> {
        (0..=steps).map(move |i| {
            let t = f64::from(i) / f64::from(steps);
            (self.low_nm * (1.0 - t) + self.high_nm * t).clamp(self.low_nm, self.high_nm)
        })
    }
}

impl fmt::Display for WavelengthRange {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} nm to {} nm", self.low_nm, self.high_nm)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn printed_micrometres_become_round_nanometres() {
        let range = WavelengthRange::from_um(0.334, 1.014).unwrap();
        assert_eq!((range.low_nm(), range.high_nm()), (334.0, 1014.0));
    }

    #[test]
    fn both_ends_belong_and_nan_does_not() {
        let range = WavelengthRange::new(400.0, 700.0).unwrap();
        assert!(range.contains(400.0) && range.contains(700.0));
        assert!(!range.contains(399.999) && !range.contains(700.001) && !range.contains(f64::NAN));
        assert!(range.samples(7).all(|nm| range.contains(nm)));
        assert_eq!(range.samples(7).count(), 8);
    }

    #[test]
    fn nonsense_is_no_range() {
        for (low, high) in
            [(0.0, 1.0), (2.0, 1.0), (1.0, 1.0), (1.0, f64::INFINITY), (f64::NAN, 1.0)]
        {
            assert_eq!(WavelengthRange::new(low, high), None);
        }
    }
}
