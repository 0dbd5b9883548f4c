//! Sobol's low-discrepancy points.
//!
//! I. M. Sobol, USSR Comput. Math. Math. Phys. 7, 86 (1967), in the Gray-code order of Antonov and
//! Saleev, ibid. 19, 252 (1979), as P. Bratley and B. L. Fox, ACM TOMS 14, 88 (1988) program it:
//! coordinate j of point n is
//!
//! ```text
//! x = ⊕ over the bits i set in n ⊕ ⌊n/2⌋ of v(i),    v(i) = m(i)/2^i
//! m(i) = 2a₁m(i−1) ⊕ 2²a₂m(i−2) ⊕ … ⊕ 2^s m(i−s) ⊕ m(i−s)
//! ```
//!
//! with a primitive polynomial of degree s and coefficients a for each coordinate.

use rand::Rng;

use super::direction_numbers::{MOST_DIMENSIONS, POLYNOMIALS, Polynomial};
use super::stream;

/// Bits of a coordinate: all that a double holds.
const BITS: usize = 53;

/// Sobol points of some dimension, each by its number.
#[derive(Debug, Clone)]
pub struct Sobol {
    /// Per coordinate, the direction numbers times 2⁵³.
    directions: Vec<[u64; BITS]>,
    /// Per coordinate, the bits turned over in every point.
    shift: Vec<u64>,
}

/// More coordinates wanted than there are direction numbers for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("{asked} numbers are to be sampled together where {MOST_DIMENSIONS} are the most")]
pub(crate) struct TooManyDimensions {
    /// How many.
    pub(crate) asked: usize,
}

impl Sobol {
    /// The points as published: point 0 is the origin.
    ///
    /// # Errors
    /// There are more than [`MOST_DIMENSIONS`] coordinates.
    pub(crate) fn new(dimensions: usize) -> Result<Self, TooManyDimensions> {
        if dimensions > MOST_DIMENSIONS {
            return Err(TooManyDimensions { asked: dimensions });
        }
        Ok(Self::of(dimensions))
    }

    fn of(dimensions: usize) -> Self {
        let directions: Vec<_> = (0..dimensions.min(MOST_DIMENSIONS)).map(directions).collect();
        Self { shift: vec![0; directions.len()], directions }
    }

    /// The points with bits turned over at random, the same bits in all points of a seed (a
    /// digital shift: P. L'Ecuyer and C. Lemieux, in *Modeling Uncertainty* (2002), 419). They
    /// fill the cube as evenly, and another seed gives others. Of more than [`MOST_DIMENSIONS`]
    /// coordinates the rest is left out.
    #[must_use]
    pub(crate) fn shifted(dimensions: usize, seed: u64) -> Self {
        let mut sobol = Self::of(dimensions);
        let mut random = stream(seed, u64::MAX);
        for shift in &mut sobol.shift {
            *shift = random.next_u64() >> (u64::BITS as usize - BITS);
        }
        sobol
    }

    /// Point `number`, every coordinate from 0 to below 1. Only the first 2⁵³ differ.
    #[must_use]
    pub fn point(&self, number: u64) -> Vec<f64> {
        let gray = number ^ (number >> 1);
        let coordinate = |(directions, shift): (&[u64; BITS], &u64)| {
            let mut bits = *shift;
            let mut left = gray & ((1 << BITS) - 1);
            while left != 0 {
                bits ^= directions[left.trailing_zeros() as usize];
                left &= left - 1;
            }
            bits as f64 / (1_u64 << BITS) as f64
        };
        self.directions.iter().zip(&self.shift).map(coordinate).collect()
    }
}

/// The direction numbers of a coordinate, times 2⁵³.
fn directions(coordinate: usize) -> [u64; BITS] {
    match coordinate.checked_sub(1) {
        // The first has no polynomial: all its m are 1 (van der Corput's sequence).
        None => std::array::from_fn(|i| 1 << (BITS - 1 - i)),
        Some(at) => recur(&POLYNOMIALS[at]),
    }
}

fn recur(polynomial: &Polynomial) -> [u64; BITS] {
    let mut v = [0; BITS];
    let degree = polynomial.first.len();
    for i in 0..BITS {
        v[i] = if i < degree {
            u64::from(polynomial.first[i]) << (BITS - 1 - i)
        } else {
            let inner = (1..degree).filter(|j| polynomial.inner >> (degree - 1 - j) & 1 == 1);
            inner.fold(v[i - degree] ^ (v[i - degree] >> degree), |sum, j| sum ^ v[i - j])
        };
    }
    v
}

#[cfg(test)]
mod tests {
    use super::*;

    /// S. Joe and F. Y. Kuo, SIAM J. Sci. Comput. 30, 2635 (2008); the points as SciPy 1.17's
    /// `scipy.stats.qmc.Sobol(21, scramble=False)`, which has the same direction numbers, gives
    /// them: coordinates 1, 2, 3, 5, 8, 13 and 21 of points 1, 2, 3, 7, 100 and 1000, exact.
    #[test]
    fn the_published_points() {
        let sobol = Sobol::new(21).unwrap();
        for (number, expected) in PUBLISHED {
            let point = sobol.point(number);
            let picked = [0, 1, 2, 4, 7, 12, 20].map(|j| point[j]);
            assert_eq!(picked, expected, "{number}");
        }
    }

    const PUBLISHED: [(u64, [f64; 7]); 6] = [
        (1, [0.5, 0.5, 0.5, 0.5, 0.5, 0.5, 0.5]),
        (2, [0.75, 0.25, 0.25, 0.75, 0.75, 0.25, 0.25]),
        (3, [0.25, 0.75, 0.75, 0.25, 0.25, 0.75, 0.75]),
        (7, [0.125, 0.625, 0.375, 0.125, 0.625, 0.625, 0.875]),
        (100, [0.4140625, 0.2578125, 0.7734375, 0.8828125, 0.4765625, 0.4765625, 0.7578125]),
        (
            1000,
            [
                0.2197265625,
                0.0966796875,
                0.5185546875,
                0.2802734375,
                0.8994140625,
                0.1611328125,
                0.5224609375,
            ],
        ),
    ];

    /// The worked example of P. Bratley and B. L. Fox, ACM TOMS 14, 88 (1988), §2: x³ + x + 1 with
    /// m = 1, 3, 7 gives m₄ = 5, m₅ = 7, m₆ = 43 (values from memory; by hand m₄ = 4·3 ⊕ 8·1 ⊕ 1).
    #[test]
    fn the_published_recurrence() {
        let v = recur(&Polynomial { inner: 0b01, first: &[1, 3, 7] });
        let m: Vec<u64> = (0..6).map(|i| v[i] >> (BITS - 1 - i)).collect();
        assert_eq!(m, [1, 3, 7, 5, 7, 43]);
    }

    /// Sobol's property A and the reason for the points: among the first 2ᵏ points, each of the
    /// 2ᵏ equal slices of every coordinate holds one; a shift keeps that.
    #[test]
    fn every_slice_holds_one_point() {
        for sobol in [Sobol::new(MOST_DIMENSIONS).unwrap(), Sobol::shifted(MOST_DIMENSIONS + 9, 5)]
        {
            for j in 0..MOST_DIMENSIONS {
                let mut slices = [0; 256];
                for number in 0..256 {
                    slices[(sobol.point(number)[j] * 256.0) as usize] += 1;
                }
                assert_eq!(slices, [1; 256], "coordinate {j}");
            }
        }
    }

    #[test]
    fn seeds_differ_and_too_many_dimensions_are_told() {
        let point = |seed| Sobol::shifted(3, seed).point(9);
        assert_eq!(point(1), point(1));
        assert_ne!(point(1), point(2));
        let error = Sobol::new(MOST_DIMENSIONS + 1).unwrap_err();
        assert_eq!(error, TooManyDimensions { asked: MOST_DIMENSIONS + 1 });
    }
}
