//! A dispersion law through measured points.
//!
//! The index is a sum of powers of the wavelength L in µm, n = Σ a L^p. From two points this is Cauchy's
//! n = A + B/L² (Cauchy, 1836); from three, Conrady's n = A + B/L + C/L^3.5 (Conrady, *Applied Optics and Optical
//! Design*); from four on, the powers 0, −2, 2, −4, −6, −8 that makers use, as many as there are points.
//!
//! A rich series through badly spread points magnifies their errors: between the points, an error of e in each becomes
//! up to Λe, Λ being the greatest sum of the absolute weights with which the measured indices enter (for plain
//! interpolation, the Lebesgue constant). The richest series with Λ within [`MOST_MAGNIFICATION`] is taken, fitted by
//! least squares where it has fewer terms than there are points; no series at all if none will do. What it leaves over at
//! each point is added back, linearly in 1/L² between neighbours (Cauchy's law again, from point to point), so that the
//! law passes through every point however many there are.

use nalgebra::{DMatrix, DVector};

use super::range::WavelengthRange;

/// The powers tried, richest series first.
const SERIES: [&[f64]; 5] = [
    &[0.0, -2.0, 2.0, -4.0, -6.0, -8.0],
    &[0.0, -2.0, 2.0, -4.0, -6.0],
    &[0.0, -2.0, 2.0, -4.0],
    &[0.0, -1.0, -3.5],
    &[0.0, -2.0],
];

/// The largest magnification Λ of a measuring error that is put up with. Five points from 405 nm to 1064 nm come to
/// 5.6 with five terms; two points 1 nm apart and a third far away come to a hundred with three.
const MOST_MAGNIFICATION: f64 = 6.0;

/// Steps over the range at which the magnification is looked at.
const MAGNIFICATION_STEPS: u32 = 200;

/// The series, and what it leaves over at the points.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct PointSeries {
    exponents: &'static [f64],
    coefficients: Vec<f64>,
    /// Ascending in wavelength.
    leftovers: Vec<Leftover>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
struct Leftover {
    wavelength_um: f64,
    index: f64,
}

impl PointSeries {
    /// The law through points of wavelength in nm and index: two or more, ascending in wavelength from end to end of the
    /// range.
    pub(super) fn through(points_nm: &[[f64; 2]], range: WavelengthRange) -> Self {
        let wavelengths_um: Vec<f64> = points_nm.iter().map(|[nm, _]| nm / 1000.0).collect();
        let indices: Vec<f64> = points_nm.iter().map(|[_, index]| *index).collect();
        let mut series = SERIES
            .into_iter()
            .filter(|exponents| exponents.len() <= points_nm.len())
            .find_map(|exponents| Self::fit(exponents, &wavelengths_um, &indices, range))
            .unwrap_or(Self { exponents: &[], coefficients: Vec::new(), leftovers: Vec::new() });
        series.leftovers = std::iter::zip(wavelengths_um, indices)
            .map(|(wavelength_um, index)| Leftover {
                wavelength_um,
                index: index - series.smooth(wavelength_um),
            })
            .collect();
        series
    }

    /// Least squares by QR, leftovers not yet added; `None` where the points do not carry this many terms.
    fn fit(
        exponents: &'static [f64],
        wavelengths_um: &[f64],
        indices: &[f64],
        range: WavelengthRange,
    ) -> Option<Self> {
        let powers = |um: f64| exponents.iter().map(move |exponent| um.powf(*exponent));
        let design = DMatrix::from_row_iterator(
            wavelengths_um.len(),
            exponents.len(),
            wavelengths_um.iter().flat_map(|&um| powers(um)),
        );
        let (q, r) = design.qr().unpack();
        let magnification = |wavelength_nm: f64| -> Option<f64> {
            let row = DVector::from_iterator(exponents.len(), powers(wavelength_nm / 1000.0));
            Some((&q * r.tr_solve_upper_triangular(&row)?).lp_norm(1))
        };
        let is_safe = range.samples(MAGNIFICATION_STEPS).all(|nm| {
            magnification(nm).is_some_and(|magnification| magnification <= MOST_MAGNIFICATION)
        });
        if !is_safe {
            return None;
        }
        let indices = DVector::from_column_slice(indices);
        let coefficients = r.solve_upper_triangular(&q.tr_mul(&indices))?.as_slice().to_vec();
        Some(Self { exponents, coefficients, leftovers: Vec::new() })
    }

    fn smooth(&self, wavelength_um: f64) -> f64 {
        std::iter::zip(self.exponents, &self.coefficients)
            .map(|(exponent, coefficient)| coefficient * wavelength_um.powf(*exponent))
            .sum()
    }

    /// The index at a wavelength in µm inside the points.
    pub(super) fn index(&self, wavelength_um: f64) -> f64 {
        self.smooth(wavelength_um) + self.left_over(wavelength_um)
    }

    fn left_over(&self, wavelength_um: f64) -> f64 {
        let after = self.leftovers.partition_point(|point| point.wavelength_um <= wavelength_um);
        let before = after.checked_sub(1).and_then(|i| self.leftovers.get(i));
        match (before, self.leftovers.get(after)) {
            (Some(a), Some(b)) => {
                let x = |um: f64| 1.0 / (um * um);
                let t = (x(wavelength_um) - x(a.wavelength_um))
                    / (x(b.wavelength_um) - x(a.wavelength_um));
                a.index + t * (b.index - a.index)
            }
            (Some(end), None) | (None, Some(end)) => end.index,
            (None, None) => 0.0,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::glass::find;

    fn through(points: &[[f64; 2]]) -> PointSeries {
        let range = WavelengthRange::new(points[0][0], points[points.len() - 1][0]).unwrap();
        PointSeries::through(points, range)
    }

    fn largest_miss(glass: &str, wavelengths_nm: &[f64]) -> f64 {
        let glass = find(glass).unwrap();
        let points: Vec<_> =
            wavelengths_nm.iter().map(|&nm| [nm, glass.index(nm).unwrap()]).collect();
        let series = through(&points);
        let range = WavelengthRange::new(points[0][0], points[points.len() - 1][0]).unwrap();
        range
            .samples(500)
            .map(|nm| (series.index(nm / 1000.0) - glass.index(nm).unwrap()).abs())
            .fold(0.0, f64::max)
    }

    #[test]
    fn two_points_are_cauchy() {
        // n = 1.5 + 0.004/L² at 0.5 µm and 1 µm; at 0.8 µm it is 1.50625.
        let series = through(&[[500.0, 1.516], [1000.0, 1.504]]);
        assert!((series.index(0.8) - 1.50625).abs() < 1e-14);
    }

    #[test]
    fn three_points_are_conrady() {
        let conrady = |um: f64| 1.49 + 0.01 / um + 0.0005 / um.powf(3.5);
        let points = [450.0, 550.0, 700.0].map(|nm| [nm, conrady(nm / 1000.0)]);
        let series = through(&points);
        assert!((series.index(0.6) - conrady(0.6)).abs() < 1e-14);
    }

    #[test]
    fn real_glasses_come_back_between_their_points() {
        let four = [435.8343, 486.1327, 587.5618, 656.2725];
        assert!(largest_miss("N-BK7", &four) < 5e-6);
        assert!(largest_miss("N-SF6", &four) < 5e-5);
        let five = [405.0, 532.0, 633.0, 780.0, 1064.0];
        assert!(largest_miss("N-BK7", &five) < 2e-5);
        let eight = [404.7, 435.8, 486.1, 546.1, 587.6, 656.3, 852.1, 1014.0];
        assert!(largest_miss("N-BK7", &eight) < 1e-6);
    }

    #[test]
    fn crowded_points_do_not_swing_between() {
        // Two points 1 nm apart that disagree by 2e-5: three terms through them would be off by 1e-3 at 800 nm.
        let glass = find("N-BK7").unwrap();
        let at = |nm| glass.index(nm).unwrap();
        let points = [[587.0, at(587.0) + 1e-5], [588.0, at(588.0) - 1e-5], [1064.0, at(1064.0)]];
        let series = through(&points);
        assert!((series.index(0.8) - at(800.0)).abs() < 1e-3);
        assert!((series.index(0.588) - points[1][1]).abs() < 1e-14);
    }

    #[test]
    fn the_magnification_decides_how_many_terms() {
        let terms = |wavelengths_nm: &[f64]| {
            let points: Vec<_> = wavelengths_nm.iter().map(|nm| [*nm, 1.5]).collect();
            through(&points).coefficients.len()
        };
        assert_eq!(terms(&[532.0, 633.0]), 2);
        assert_eq!(terms(&[405.0, 532.0, 633.0]), 3);
        assert_eq!(terms(&[587.0, 588.0, 1064.0]), 2);
        assert_eq!(terms(&[405.0, 532.0, 633.0, 780.0, 1064.0]), 5);
        assert_eq!(terms(&[404.7, 435.8, 486.1, 546.1, 587.6, 656.3, 852.1, 1014.0]), 6);
    }
}
