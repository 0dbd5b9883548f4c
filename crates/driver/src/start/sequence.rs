//! Points of the unit cube by number, spread evenly.
//!
//! Coordinate j of point k is the fractional part of s_j + k√p_j with p_j the j-th prime
//! (Richtmyer's sequence; H. Niederreiter, Bull. Amer. Math. Soc. 84, 957 (1978), section 1).
//! The shift s_j is drawn from the seed (R. Cranley and T. N. L. Patterson, SIAM J. Numer. Anal.
//! 13, 904 (1976)), so that other seeds look elsewhere and every number has its own point at once.

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};

/// Points of a cube of so many dimensions.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Sequence {
    /// Fractional parts of the square roots of the primes.
    steps: Vec<f64>,
}

impl Sequence {
    pub(super) fn new(dimensions: usize) -> Self {
        let prime = |n: &u32| (2..).take_while(|d| d * d <= *n).all(|d| !n.is_multiple_of(d));
        let primes = (2_u32..).filter(prime).take(dimensions);
        Self { steps: primes.map(|p| f64::from(p).sqrt().fract()).collect() }
    }

    pub(super) fn dimensions(&self) -> usize {
        self.steps.len()
    }

    /// Point `number`, every coordinate in [0, 1).
    pub(super) fn point(&self, number: u64, seed: u64) -> Vec<f64> {
        let mut random = ChaCha8Rng::seed_from_u64(seed);
        self.steps
            .iter()
            .map(|step| {
                let shift = (random.next_u64() >> 11) as f64 / (1_u64 << 53) as f64;
                (shift + turns(number, *step)).fract()
            })
            .collect()
    }
}

/// The fractional part of number × step without loss of digits for large numbers: the number is
/// taken in two halves.
fn turns(number: u64, step: f64) -> f64 {
    const HALF: u64 = 1 << 26;
    let (high, low) = ((number / HALF) as f64, (number % HALF) as f64);
    let big_step = (step * HALF as f64).fract();
    ((high * big_step).fract() + (low * step).fract()).fract()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn points_fill_the_cube_evenly_whatever_the_seed() {
        let sequence = Sequence::new(5);
        for seed in [0, 7] {
            let points: Vec<Vec<f64>> = (0..4096).map(|k| sequence.point(k, seed)).collect();
            for dimension in 0..5 {
                let mut cells = [0_i32; 16];
                for point in &points {
                    assert!((0.0..1.0).contains(&point[dimension]));
                    cells[(16.0 * point[dimension]) as usize] += 1;
                }
                // Drawn at random a cell would hold 256 ± 15.
                assert!(cells.iter().all(|count| (count - 256).abs() <= 6), "{cells:?}");
            }
        }
        assert_ne!(sequence.point(3, 0), sequence.point(3, 1));
    }

    #[test]
    fn numbers_far_out_have_points_of_their_own() {
        let sequence = Sequence::new(3);
        let far = u64::MAX - 5;
        assert_ne!(sequence.point(far, 1), sequence.point(far + 1, 1));
        assert!(sequence.point(far, 1).iter().all(|x| (0.0..1.0).contains(x)));
    }
}
