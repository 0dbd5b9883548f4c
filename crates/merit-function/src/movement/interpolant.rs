//! A smooth function of the ratio, known at a few ratios: the polynomial through Chebyshev points.
//!
//! Positions are analytic in the ratio wherever the movement does not turn back, so the polynomial
//! of degree n through the points x_j = −cos(πj/n) closes in on them faster than any power of 1/n
//! (L. N. Trefethen, *Approximation Theory and Approximation Practice*, SIAM 2013, ch. 3, 7 and 8).
//! Its variable is t = ±ln|m|, in which three thin groups have positions made of e^t and e^−t;
//! both ends of the way are points of it.

use std::f64::consts::PI;
use std::ops::Range;

/// Places in a panel that are looked at before an extremum is closed in on.
const LOOKS: usize = 12;
/// Halvings of the bracket of an extremum.
const HALVINGS: usize = 48;

/// Chebyshev points between two ratios, and the sums over them that a polynomial is told by.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Interpolant {
    /// t at both ends.
    ends: [f64; 2],
    /// −1 where ratios are negative.
    sign: f64,
    points: Vec<f64>,
    /// What each value counts in each coefficient, coefficient by coefficient.
    transform: Vec<f64>,
}

/// A polynomial by its Chebyshev coefficients.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Polynomial(Vec<f64>);

/// What is told of a position: it, or its slope by the ratio.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Aspect {
    /// The value itself.
    Value,
    /// Its derivative by the ratio.
    Slope,
}

/// The lowest value in a panel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Lowest {
    /// The value.
    pub(crate) value: f64,
    /// Where it is, as t.
    pub(crate) at: f64,
}

impl Interpolant {
    /// `count` points, at least three, from one ratio to a greater one of the same sign.
    #[must_use]
    pub(crate) fn over(low: f64, high: f64, count: usize) -> Self {
        let sign = if low < 0.0 { -1.0 } else { 1.0 };
        let t = |ratio: f64| sign * ratio.abs().ln();
        let ends = [t(low), t(high)];
        let last = (count - 1) as f64;
        let point = |j: usize| {
            let x = -(PI * j as f64 / last).cos();
            0.5 * (ends[0] * (1.0 - x) + ends[1] * (1.0 + x))
        };
        let half = |at: usize| if at == 0 || at == count - 1 { 0.5 } else { 1.0 };
        let entries = (0..count).flat_map(|k| (0..count).map(move |j| (k, j)));
        // T_k(−cos(πj/n)) = cos(πk(n − j)/n)
        let entry = |(k, j): (usize, usize)| {
            let wave = (PI * (k * (count - 1 - j)) as f64 / last).cos();
            2.0 * half(k) * half(j) / last * wave
        };
        Self {
            ends,
            sign,
            points: (0..count).map(point).collect(),
            transform: entries.map(entry).collect(),
        }
    }

    /// t at every point.
    #[must_use]
    pub(crate) fn points(&self) -> &[f64] {
        &self.points
    }

    /// t of a ratio.
    #[must_use]
    pub(crate) fn place(&self, ratio: f64) -> f64 {
        self.sign * ratio.abs().ln()
    }

    /// The ratio at t.
    #[must_use]
    pub(crate) fn ratio(&self, t: f64) -> f64 {
        self.sign * (self.sign * t).exp()
    }

    /// The polynomial through these values at the points.
    #[must_use]
    pub(crate) fn through(&self, values: &[f64]) -> Polynomial {
        let rows = self.transform.chunks(self.points.len());
        let dot = |row: &[f64]| row.iter().zip(values).map(|(count, value)| count * value).sum();
        Polynomial(rows.map(dot).collect())
    }

    /// What each value counts in the aspect of the polynomial at t.
    #[must_use]
    pub(crate) fn counts(&self, aspect: Aspect, t: f64) -> Vec<f64> {
        let mut counts = vec![0.0; self.points.len()];
        for (basis, row) in self.basis(t).zip(self.transform.chunks(self.points.len())) {
            let basis = match aspect {
                Aspect::Value => basis[0],
                Aspect::Slope => basis[1] / self.ratio(t).abs(),
            };
            for (count, entry) in counts.iter_mut().zip(row) {
                *count += basis * entry;
            }
        }
        counts
    }

    /// Chebyshev polynomials at t with their first two derivatives by t, by the three-term
    /// recurrence.
    fn basis(&self, t: f64) -> impl Iterator<Item = [f64; 3]> + use<> {
        let scale = 2.0 / (self.ends[1] - self.ends[0]);
        let x = (t - self.ends[0]) * scale - 1.0;
        let first = ([1.0, 0.0, 0.0], [x, 1.0, 0.0]);
        let pairs =
            std::iter::successors(Some(first), move |&(before, now): &([f64; 3], [f64; 3])| {
                let next = [
                    2.0 * x * now[0] - before[0],
                    2.0 * now[0] + 2.0 * x * now[1] - before[1],
                    4.0 * now[1] + 2.0 * x * now[2] - before[2],
                ];
                Some((now, next))
            });
        pairs.map(move |(now, _)| [now[0], scale * now[1], scale * scale * now[2]])
    }

    /// Value and the first two derivatives of a polynomial by t.
    fn at(&self, polynomial: &Polynomial, t: f64) -> [f64; 3] {
        let mut sum = [0.0; 3];
        for (coefficient, basis) in polynomial.0.iter().zip(self.basis(t)) {
            for (sum, basis) in sum.iter_mut().zip(basis) {
                *sum += coefficient * basis;
            }
        }
        sum
    }

    /// An aspect of a polynomial at t: dm/dt = |m|.
    #[must_use]
    pub(crate) fn aspect(&self, polynomial: &Polynomial, aspect: Aspect, t: f64) -> f64 {
        let [value, slope, _] = self.at(polynomial, t);
        match aspect {
            Aspect::Value => value,
            Aspect::Slope => slope / self.ratio(t).abs(),
        }
    }

    /// Derivative of an aspect by t, but for a factor that is always positive.
    fn sense(&self, polynomial: &Polynomial, aspect: Aspect, t: f64) -> f64 {
        let [_, slope, bend] = self.at(polynomial, t);
        match aspect {
            Aspect::Value => slope,
            Aspect::Slope => bend - self.sign * slope,
        }
    }

    /// The lowest value of `sign` times an aspect between two t.
    #[must_use]
    pub(crate) fn lowest(
        &self,
        polynomial: &Polynomial,
        aspect: Aspect,
        sign: f64,
        panel: Range<f64>,
    ) -> Lowest {
        let look = |t: f64| Lowest { value: sign * self.aspect(polynomial, aspect, t), at: t };
        let place = |i: usize| {
            let share = i as f64 / LOOKS as f64;
            if i == LOOKS { panel.end } else { panel.start + share * (panel.end - panel.start) }
        };
        let looks: Vec<Lowest> = (0..=LOOKS).map(|i| look(place(i))).collect();
        let by_value = |a: &usize, b: &usize| looks[*a].value.total_cmp(&looks[*b].value);
        let least = (0..=LOOKS).min_by(by_value).unwrap_or(0);
        let (mut low, mut high) = (place(least.saturating_sub(1)), place((least + 1).min(LOOKS)));
        let falls = |t: f64| sign * self.sense(polynomial, aspect, t) < 0.0;
        if !falls(low) || falls(high) {
            return looks[least];
        }
        for _ in 0..HALVINGS {
            let middle = 0.5 * (low + high);
            if falls(middle) {
                low = middle;
            } else {
                high = middle;
            }
        }
        let closed_in = look(0.5 * (low + high));
        if closed_in.value < looks[least].value { closed_in } else { looks[least] }
    }
}

impl Polynomial {
    /// Size of the last two coefficients: about what is missing of the function it stands for.
    #[must_use]
    pub(crate) fn tail(&self) -> f64 {
        self.0.iter().rev().take(2).map(|coefficient| coefficient.abs()).sum()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// a m + b/m with its slope a − b/m².
    fn thin(points: &Interpolant) -> Polynomial {
        let position = |&t: &f64| 2.0 * points.ratio(t) + 18.0 / points.ratio(t);
        points.through(&points.points().iter().map(position).collect::<Vec<_>>())
    }

    #[test]
    fn thin_groups_are_met_to_all_digits() {
        for (low, high) in [(2.0, 6.0), (-6.0, -2.0)] {
            let points = Interpolant::over(low, high, 14);
            let position = thin(&points);
            for i in 0..=20 {
                let m = low + (high - low) * f64::from(i) / 20.0;
                let t = points.place(m);
                assert!((points.ratio(t) / m - 1.0).abs() < 1e-14);
                let value = points.aspect(&position, Aspect::Value, t);
                assert!((value - (2.0 * m + 18.0 / m)).abs() < 1e-11, "{m}: {value}");
                let slope = points.aspect(&position, Aspect::Slope, t);
                assert!((slope - (2.0 - 18.0 / (m * m))).abs() < 1e-9, "{m}: {slope}");
                for aspect in [Aspect::Value, Aspect::Slope] {
                    let counts = points.counts(aspect, t);
                    let values = points.points().iter();
                    let values = values.map(|&t| 2.0 * points.ratio(t) + 18.0 / points.ratio(t));
                    let sum: f64 = counts.iter().zip(values).map(|(count, v)| count * v).sum();
                    assert!((sum - points.aspect(&position, aspect, t)).abs() < 1e-10);
                }
            }
            assert!(position.tail() < 1e-10);
        }
    }

    #[test]
    fn the_lowest_place_is_found_inside_and_at_the_ends() {
        let points = Interpolant::over(2.0, 6.0, 14);
        let position = thin(&points);
        let panel = |a: f64, b: f64| points.place(a)..points.place(b);
        // 2m + 18/m is least at m = 3, where it is 12.
        let inside = points.lowest(&position, Aspect::Value, 1.0, panel(2.0, 4.0));
        assert!((inside.value - 12.0).abs() < 1e-11, "{inside:?}");
        assert!((points.ratio(inside.at) - 3.0).abs() < 1e-9, "{inside:?}");
        let end = points.lowest(&position, Aspect::Value, 1.0, panel(4.0, 6.0));
        assert!((points.ratio(end.at) - 4.0).abs() < 1e-12, "{end:?}");
        // The slope 2 − 18/m² only rises.
        let slope = points.lowest(&position, Aspect::Slope, -1.0, panel(2.0, 6.0));
        assert!((slope.value + 1.5).abs() < 1e-9, "{slope:?}");
    }
}
