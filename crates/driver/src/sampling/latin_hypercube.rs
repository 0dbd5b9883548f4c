//! Latin hypercube sampling.
//!
//! M. D. McKay, R. J. Beckman and W. J. Conover, Technometrics 21, 239 (1979): with N points, each
//! coordinate's range is cut in N equal slices, and every slice holds one point, at a random place
//! in it; the slices of different coordinates are matched at random.

use rand::RngExt;
use rand::seq::SliceRandom;

use super::stream;

/// A Latin hypercube of a fixed number of points.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct LatinHypercube {
    points: Vec<Vec<f64>>,
}

impl LatinHypercube {
    /// `count` points of `dimensions` coordinates. A coordinate depends on the seed, the count and
    /// its own place alone: more dimensions leave the first ones as they are.
    #[must_use]
    pub(crate) fn new(count: usize, dimensions: usize, seed: u64) -> Self {
        let mut points = vec![Vec::with_capacity(dimensions); count];
        for dimension in 0..dimensions {
            let mut random = stream(seed, dimension as u64);
            let mut slices: Vec<usize> = (0..count).collect();
            slices.shuffle(&mut random);
            for (point, slice) in points.iter_mut().zip(slices) {
                let within: f64 = random.random();
                // The next number below 1 keeps rounding from reaching the end of the range.
                let place = (slice as f64 + within) / count as f64;
                point.push(place.min(1.0_f64.next_down()));
            }
        }
        Self { points }
    }

    /// The points, every coordinate from 0 to below 1.
    #[must_use]
    pub(crate) fn points(&self) -> &[Vec<f64>] {
        &self.points
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_slice_of_every_coordinate_holds_one_point() {
        let cube = LatinHypercube::new(37, 24, 11);
        for j in 0..24 {
            let mut slices = [0; 37];
            for point in cube.points() {
                assert!((0.0..1.0).contains(&point[j]));
                slices[(point[j] * 37.0) as usize] += 1;
            }
            assert_eq!(slices, [1; 37], "coordinate {j}");
        }
    }

    /// What the sampling is for (McKay, Beckman and Conover 1979, §2.2): of a sum of functions of
    /// one coordinate each, the mean comes out with far less spread than from random points. For
    /// the sum of d coordinates the variance of a mean of N is d/12N³ instead of d/12N (Stein,
    /// Technometrics 29, 143 (1987), for additive functions: the slices leave only the place
    /// within).
    #[test]
    fn the_mean_of_a_sum_has_the_published_spread() {
        let (count, dimensions, seeds) = (20, 6, 400);
        let mean = |seed| {
            let cube = LatinHypercube::new(count, dimensions, seed);
            let sum: f64 = cube.points().iter().flatten().sum();
            sum / count as f64
        };
        let squares = (0..seeds).map(|seed| (mean(seed) - dimensions as f64 / 2.0).powi(2));
        let variance = squares.sum::<f64>() / seeds as f64;
        let expected = dimensions as f64 / 12.0 / (count as f64).powi(3);
        // The variance of 400 draws has a relative spread of √(2/400) = 7 %.
        assert!((variance / expected - 1.0).abs() < 0.25, "{variance} {expected}");
    }

    #[test]
    fn seeds_differ_and_more_dimensions_change_nothing() {
        let cube = |dimensions, seed| LatinHypercube::new(9, dimensions, seed).points().to_vec();
        assert_eq!(cube(3, 1), cube(3, 1));
        assert_ne!(cube(3, 1), cube(3, 2));
        for (few, many) in cube(3, 1).iter().zip(cube(8, 1)) {
            assert_eq!(few[..], many[..3]);
        }
        assert!(LatinHypercube::new(0, 3, 1).points().is_empty());
    }
}
