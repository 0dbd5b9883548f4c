//! The smooth path of the groups that ratio and collimation leave free: the monotone cubic
//! through the designed states.
//!
//! F. N. Fritsch and R. E. Carlson, SIAM J. Numer. Anal. 17, 238 (1980), with the three-point
//! derivatives of F. N. Fritsch and J. Butland, SIAM J. Sci. Stat. Comput. 5, 300 (1984): a C¹
//! curve that never swings beyond the states it goes through.

/// A curve through points with ascending abscissae.
#[derive(Debug, Clone, PartialEq)]
pub struct MonotoneCubic {
    at: Vec<f64>,
    values: Vec<f64>,
    slopes: Vec<f64>,
}

impl MonotoneCubic {
    /// Through at least two points whose abscissae ascend.
    pub(crate) fn through(at: &[f64], values: &[f64]) -> Self {
        let steps: Vec<f64> = at.windows(2).map(|pair| pair[1] - pair[0]).collect();
        let rises = values.windows(2).zip(&steps).map(|(pair, step)| (pair[1] - pair[0]) / step);
        let rises: Vec<f64> = rises.collect();
        let count = at.len();
        let slope = |i: usize| {
            if i == 0 {
                return end_slope(&steps, &rises);
            }
            if i + 1 == count {
                let (mut steps, mut rises) = (steps.clone(), rises.clone());
                steps.reverse();
                rises.reverse();
                return end_slope(&steps, &rises);
            }
            let (left, right) = (rises[i - 1], rises[i]);
            if left * right <= 0.0 {
                return 0.0;
            }
            let (h0, h1) = (steps[i - 1], steps[i]);
            let (w0, w1) = (2.0 * h1 + h0, h1 + 2.0 * h0);
            (w0 + w1) / (w0 / left + w1 / right)
        };
        Self { at: at.to_vec(), values: values.to_vec(), slopes: (0..count).map(slope).collect() }
    }

    /// Value and derivative; beyond the ends the end cubics go on.
    pub fn at(&self, x: f64) -> (f64, f64) {
        let last = self.at.len().saturating_sub(2);
        let i = self.at.partition_point(|&at| at <= x).saturating_sub(1).min(last);
        let h = self.at[i + 1] - self.at[i];
        let t = (x - self.at[i]) / h;
        let (y0, y1) = (self.values[i], self.values[i + 1]);
        let (d0, d1) = (self.slopes[i] * h, self.slopes[i + 1] * h);
        let (square, cube) = (t * t, t * t * t);
        let value = y0 * (2.0 * cube - 3.0 * square + 1.0)
            + y1 * (3.0 * square - 2.0 * cube)
            + d0 * (cube - 2.0 * square + t)
            + d1 * (cube - square);
        let slope = (6.0 * (square - t) * (y0 - y1)
            + d0 * (3.0 * square - 4.0 * t + 1.0)
            + d1 * (3.0 * square - 2.0 * t))
            / h;
        (value, slope)
    }
}

/// Slope at the first point: that of the parabola through three, kept from overshooting.
fn end_slope(steps: &[f64], rises: &[f64]) -> f64 {
    let (Some(&h0), Some(&first)) = (steps.first(), rises.first()) else { return 0.0 };
    let (Some(&h1), Some(&second)) = (steps.get(1), rises.get(1)) else { return first };
    let slope = ((2.0 * h0 + h1) * first - h0 * second) / (h0 + h1);
    if slope * first <= 0.0 {
        0.0
    } else if first * second <= 0.0 && slope.abs() > 3.0 * first.abs() {
        3.0 * first
    } else {
        slope
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_straight_line_stays_one() {
        let line = MonotoneCubic::through(&[1.0, 2.0, 4.5], &[3.0, 5.0, 10.0]);
        for x in [1.0, 1.3, 2.0, 3.9, 4.5] {
            let (value, slope) = line.at(x);
            assert!((value - (1.0 + 2.0 * x)).abs() < 1e-12 && (slope - 2.0).abs() < 1e-12);
        }
        assert_eq!(MonotoneCubic::through(&[2.0, 6.0], &[1.0, 0.0]).at(3.0).0, 0.75);
    }

    #[test]
    fn it_goes_through_its_points_and_never_beyond_them() {
        let (at, values) = ([2.0, 3.0, 4.0, 5.0, 6.0], [9.0, 8.0, 3.0, 2.9, 0.5]);
        let curve = MonotoneCubic::through(&at, &values);
        for (x, y) in at.iter().zip(values) {
            assert!((curve.at(*x).0 - y).abs() < 1e-12);
        }
        let fine: Vec<f64> = (0..=400).map(|i| curve.at(2.0 + 0.01 * f64::from(i)).0).collect();
        assert!(fine.windows(2).all(|pair| pair[1] <= pair[0] + 1e-12));
        // The slope is the derivative.
        let (h, x) = (1e-6, 3.4);
        let difference = (curve.at(x + h).0 - curve.at(x - h).0) / (2.0 * h);
        assert!((curve.at(x).1 - difference).abs() < 1e-6);
    }
}
