//! First order: the focal data of a train or of a part of it.
//!
//! The system matrix takes height and reduced slope from the first vertex to the last,
//!
//! ```text
//! h′   = A h + B nu
//! n′u′ = C h + D nu,      AD − BC = 1
//! ```
//!
//! and everything else follows from it (E. Hecht, *Optics*, ch. 6; the power is K = −C). n is the
//! index before the part and n′ that behind it; neither need be air.

use std::ops::Range;

use crate::train::Train;

/// Rounding of a sum of surface powers, in units of the sum of their magnitudes and of the
/// spacing of numbers, below which a power counts as none.
const POWER_ROUNDING: f64 = 8.0;

/// The system matrix, from the first vertex to the last; it acts on (height, index × slope).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SystemMatrix {
    /// Height behind per height before.
    pub a: f64,
    /// Height behind per reduced slope before, mm.
    pub b: f64,
    /// Reduced slope behind per height before, 1/mm.
    pub c: f64,
    /// Reduced slope behind per reduced slope before.
    pub d: f64,
}

/// First-order data of a train or of a part of it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FirstOrder {
    /// The system matrix.
    pub matrix: SystemMatrix,
    /// Power K = −C, 1/mm; positive when it converges.
    pub power_per_mm: f64,
    /// Focal points and principal planes; `None` when afocal.
    pub focal: Option<FocalData>,
}

/// Focal length, focal points and principal planes of a part that has power.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FocalData {
    /// Effective focal length 1/K, mm: in air the distance from the rear principal plane to the
    /// rear focal point.
    pub effective_focal_length_mm: f64,
    /// From the last vertex to the rear focal point, mm, positive to the right: n′A/K.
    pub back_focal_distance_mm: f64,
    /// From the first vertex to the front focal point, mm, positive to the right: −nD/K.
    pub front_focal_distance_mm: f64,
    /// From the last vertex to the rear principal plane, mm, positive to the right: n′(A − 1)/K.
    pub rear_principal_mm: f64,
    /// From the first vertex to the front principal plane, mm, positive to the right: n(1 − D)/K.
    pub front_principal_mm: f64,
}

/// Why there are no first-order data.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum FirstOrderError {
    /// The part has no surface, or surfaces that the train has not.
    #[error("surfaces {} to {} are no part of a train of {surfaces}", .part.start + 1, .part.end)]
    Part {
        /// The surfaces asked for.
        part: Range<usize>,
        /// How many the train has.
        surfaces: usize,
    },
    /// A number is too large to be told.
    #[error("the first-order data are out of all bounds")]
    Overflow,
}

/// First-order data of the surfaces `part` of a train, with the media around them as they are in
/// the train: the one before the first and the one behind the last of them.
///
/// A power that is lost in the rounding of its own sum counts as none.
///
/// # Errors
/// The part is empty or reaches beyond the train, or a number leaves the range of numbers.
pub fn first_order(train: &Train, part: Range<usize>) -> Result<FirstOrder, FirstOrderError> {
    let surfaces = train.len();
    if part.is_empty() || part.end > surfaces {
        return Err(FirstOrderError::Part { part, surfaces });
    }
    let (before, behind) = (train.indices()[part.start], train.indices()[part.end]);
    let mut m = SystemMatrix { a: 1.0, b: 0.0, c: 0.0, d: 1.0 };
    let mut sum_of_magnitudes = 0.0;
    for i in part.clone() {
        let index = train.indices()[i];
        if i > part.start {
            let reduced = train.gaps()[i - 1] / index;
            m.a += reduced * m.c;
            m.b += reduced * m.d;
        }
        let power = train.surfaces()[i].curvature * (train.indices()[i + 1] - index);
        sum_of_magnitudes += (power * m.a).abs();
        m.c -= power * m.a;
        m.d -= power * m.b;
    }
    if ![m.a, m.b, m.c, m.d].iter().all(|number| number.is_finite()) {
        return Err(FirstOrderError::Overflow);
    }
    let power = -m.c;
    let afocal = power.abs() <= POWER_ROUNDING * f64::EPSILON * sum_of_magnitudes;
    let focal = if afocal { None } else { Some(FocalData::new(&m, before, behind)?) };
    Ok(FirstOrder { matrix: m, power_per_mm: power, focal })
}

impl FocalData {
    fn new(m: &SystemMatrix, before: f64, behind: f64) -> Result<Self, FirstOrderError> {
        let length = -1.0 / m.c;
        let data = Self {
            effective_focal_length_mm: length,
            back_focal_distance_mm: behind * m.a * length,
            front_focal_distance_mm: -before * m.d * length,
            rear_principal_mm: behind * (m.a - 1.0) * length,
            front_principal_mm: before * (1.0 - m.d) * length,
        };
        let numbers = [
            data.effective_focal_length_mm,
            data.back_focal_distance_mm,
            data.front_focal_distance_mm,
            data.rear_principal_mm,
            data.front_principal_mm,
        ];
        let sound = numbers.iter().all(|number| number.is_finite());
        if sound { Ok(data) } else { Err(FirstOrderError::Overflow) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::paraxial::ParaxialRay;
    use crate::surface::Surface;

    /// A pair, then a singlet that faces water.
    fn train() -> Train {
        let surfaces = [0.03, -0.02, 0.012, 0.0, -0.015].map(|c| Surface::sphere(c, 9.0)).into();
        let indices = vec![1.0, 1.6, 1.75, 1.0, 1.5, 1.33];
        Train::new(surfaces, vec![4.0, 2.0, 11.0, 2.5], indices).unwrap()
    }

    #[test]
    fn the_matrix_is_two_paraxial_rays() {
        let train = train();
        let m = first_order(&train, 0..5).unwrap().matrix;
        assert!((m.a * m.d - m.b * m.c - 1.0).abs() < 1e-14);
        let mut ray = ParaxialRay::new();
        for (height, slope) in [(1.0, 0.0), (0.0, 1.0), (2.0, -0.3)] {
            ray.trace(&train, height, slope).unwrap();
            let last = ray.heights()[4];
            assert!((m.a * height + m.b * slope - last).abs() < 1e-12);
            let reduced = 1.33 * ray.exit_slope().unwrap();
            assert!((m.c * height + m.d * slope - reduced).abs() < 1e-13);
        }
    }

    #[test]
    fn rays_through_the_focal_points_and_principal_planes() {
        let train = train();
        let focal = first_order(&train, 0..5).unwrap().focal.unwrap();
        let mut ray = ParaxialRay::new();
        ray.trace(&train, 1.0, 0.0).unwrap();
        let (last, slope) = (ray.heights()[4], ray.exit_slope().unwrap());
        assert!((last + slope * focal.back_focal_distance_mm).abs() < 1e-13);
        assert!((last + slope * focal.rear_principal_mm - 1.0).abs() < 1e-13);
        // The ray from the front focal point leaves parallel, as high as it meets the front
        // principal plane.
        ray.trace(&train, -focal.front_focal_distance_mm, 1.0).unwrap();
        assert!(ray.exit_slope().unwrap().abs() < 1e-14);
        let at_plane = focal.front_principal_mm - focal.front_focal_distance_mm;
        assert!((at_plane - ray.heights()[4]).abs() < 1e-11);
    }

    #[test]
    fn a_part_stands_between_its_own_media() {
        let train = train();
        let part = first_order(&train, 1..2).unwrap();
        // A single surface: K = (n′ − n)c, both principal planes at the vertex.
        assert!((part.power_per_mm - (1.75 - 1.6) * -0.02).abs() < 1e-16);
        let focal = part.focal.unwrap();
        assert_eq!((focal.rear_principal_mm, focal.front_principal_mm), (0.0, 0.0));
        assert!((focal.back_focal_distance_mm - 1.75 / (0.15 * -0.02)).abs() < 1e-9);
        assert!((focal.front_focal_distance_mm + 1.6 / (0.15 * -0.02)).abs() < 1e-9);
    }

    #[test]
    fn afocal_is_none_and_so_is_rounding() {
        let flat = Train::new(vec![Surface::sphere(0.0, 5.0)], vec![], vec![1.0, 1.5]).unwrap();
        assert_eq!(first_order(&flat, 0..1).unwrap().focal, None);
        // Two thin lenses (f = ±1/0.3) 0 apart: the powers cancel up to rounding alone.
        let curvatures = [0.1, -0.2, -0.3, 0.3].map(|c| Surface::sphere(c, 5.0)).into();
        let indices = vec![1.0, 1.7, 1.0, 1.35, 1.0];
        let pair = Train::new(curvatures, vec![0.0; 3], indices).unwrap();
        let data = first_order(&pair, 0..4).unwrap();
        assert_eq!(data.focal, None, "{}", data.power_per_mm);
    }

    #[test]
    fn parts_that_are_none_are_told() {
        let train = train();
        for part in [2..2, 4..6] {
            let error = first_order(&train, part.clone()).unwrap_err();
            assert_eq!(error, FirstOrderError::Part { part, surfaces: 5 });
        }
        let huge = Train::new(vec![Surface::sphere(1e308, 1.0)], vec![], vec![1.0, 9.0]).unwrap();
        assert_eq!(first_order(&huge, 0..1), Err(FirstOrderError::Overflow));
    }
}
