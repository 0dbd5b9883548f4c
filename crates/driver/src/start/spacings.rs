//! Spacings of thin groups in closed form: from the powers, a ratio and collimation.
//!
//! A ray enters parallel to the axis at height 1. At every thin group of power φ its slope changes
//! by −hφ, over every spacing d its height by du (W. T. Welford, *Aberrations of Optical Systems*
//! (1986), ch. 3). Behind the last group the height is to be the ratio M and the slope 0.
//!
//! - Two groups: d = 1/φ₁ + 1/φ₂, and M = −φ₁/φ₂ whatever one wants.
//! - Three groups: the slope before the third is Mφ₃ and behind the first −φ₁, so that
//!   h₂ = −(φ₁ + Mφ₃)/φ₂, d₁ = (1 − h₂)/φ₁, d₂ = (M − h₂)/(Mφ₃).
//! - Four groups: h₂ = x is a freedom. With u = −φ₁ − φ₂x behind the second group,
//!   h₃ = (u − Mφ₄)/φ₃, d₁ = (1 − x)/φ₁, d₂ = (h₃ − x)/u, d₃ = (M − h₃)/(Mφ₄). A [`Tie`] between
//!   the spacings makes this an equation for x, of the second degree at most.
//!
//! For thick groups in air the same holds with spacings from principal plane to principal plane.

/// Most groups there can be.
pub(super) const MOST: usize = 4;

/// What ties the spacings of four groups in a state.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub(super) enum Tie {
    /// The first spacing is given.
    First,
    /// The second spacing is given.
    Second,
    /// The third spacing is given.
    Third,
    /// The sum of the first two is given.
    FirstTwo,
    /// The sum of the last two is given.
    LastTwo,
    /// The sum of all is given.
    Whole,
}

impl Tie {
    /// The spacings it ties, from the first to the one before the second number.
    pub(super) fn span(self) -> (usize, usize) {
        match self {
            Self::First => (0, 1),
            Self::Second => (1, 2),
            Self::Third => (2, 3),
            Self::FirstTwo => (0, 2),
            Self::LastTwo => (1, 3),
            Self::Whole => (0, 3),
        }
    }
}

/// One state of a thin layout: spacings, and heights at the groups of the ray that enters at
/// height 1. Entries beyond the last group are zero.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub(super) struct Passage {
    pub(super) spacings_mm: [f64; MOST - 1],
    pub(super) heights: [f64; MOST],
}

impl Passage {
    fn sound(self) -> Option<Self> {
        let mut all = self.spacings_mm.iter().chain(&self.heights);
        all.all(|number| number.is_finite()).then_some(self)
    }

    /// All spacings together, mm.
    pub(super) fn length_mm(&self) -> f64 {
        self.spacings_mm.iter().sum()
    }
}

/// Two groups; the ratio is −φ₁/φ₂.
pub(super) fn two(powers_per_mm: [f64; 2]) -> Option<Passage> {
    let [p1, p2] = powers_per_mm;
    Passage { spacings_mm: [1.0 / p1 + 1.0 / p2, 0.0, 0.0], heights: [1.0, -p1 / p2, 0.0, 0.0] }
        .sound()
}

/// Three groups; `None` without power.
pub(super) fn three(powers_per_mm: [f64; 3], ratio: f64) -> Option<Passage> {
    let [p1, p2, p3] = powers_per_mm;
    let h2 = -(p1 + ratio * p3) / p2;
    Passage {
        spacings_mm: [(1.0 - h2) / p1, (ratio - h2) / (ratio * p3), 0.0],
        heights: [1.0, h2, ratio, 0.0],
    }
    .sound()
}

/// Four groups, the spacings of `tie` adding up to `value_mm`; none, one or two ways.
pub(super) fn four(
    powers_per_mm: [f64; 4],
    ratio: f64,
    tie: Tie,
    value_mm: f64,
) -> [Option<Passage>; 2] {
    let [p1, p2, p3, p4] = powers_per_mm;
    // h₃ = a + bx.
    let (a, b) = (-(p1 + ratio * p4) / p3, -p2 / p3);
    // The tie with d₂ kept apart: d₂ + (q₀ + q₁x) = 0, times u.
    let with_second =
        |q0: f64, q1: f64| roots(-q1 * p2, -q0 * p2 - q1 * p1 + b - 1.0, -q0 * p1 + a);
    let (first, third) = ([1.0 / p1, -1.0 / p1], [(ratio - a) / (ratio * p4), -b / (ratio * p4)]);
    let heights = match tie {
        Tie::First => [Some(1.0 - value_mm * p1), None],
        Tie::Third => [Some((ratio - value_mm * ratio * p4 - a) / b), None],
        Tie::Second => with_second(-value_mm, 0.0),
        Tie::FirstTwo => with_second(first[0] - value_mm, first[1]),
        Tie::LastTwo => with_second(third[0] - value_mm, third[1]),
        Tie::Whole => with_second(first[0] + third[0] - value_mm, first[1] + third[1]),
    };
    heights.map(|height| {
        let h2 = height?;
        let (h3, u) = (a + b * h2, -p1 - p2 * h2);
        Passage {
            spacings_mm: [(1.0 - h2) / p1, (h3 - h2) / u, (ratio - h3) / (ratio * p4)],
            heights: [1.0, h2, h3, ratio],
        }
        .sound()
    })
}

/// Real roots of ax² + bx + c, the smaller one first; the form that loses no digits (W. H. Press
/// et al., *Numerical Recipes*, section 5.6).
fn roots(a: f64, b: f64, c: f64) -> [Option<f64>; 2] {
    if a == 0.0 {
        return [Some(-c / b).filter(|root| root.is_finite()), None];
    }
    let discriminant = b * b - 4.0 * a * c;
    if discriminant.is_nan() || discriminant < 0.0 {
        return [None, None];
    }
    let q = -0.5 * (b + discriminant.sqrt().copysign(b));
    let (one, other) = (q / a, if q == 0.0 { 0.0 } else { c / q });
    let ordered = if one <= other { [one, other] } else { [other, one] };
    ordered.map(|root| root.is_finite().then_some(root))
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// Height and slope behind the last group, step by step.
    fn follow(powers: &[f64], passage: &Passage) -> (f64, f64) {
        let (mut h, mut u) = (1.0, 0.0);
        for (g, power) in powers.iter().enumerate() {
            if g > 0 {
                h += passage.spacings_mm[g - 1] * u;
            }
            assert!((h - passage.heights[g]).abs() < 1e-9 * (1.0 + h.abs()), "{passage:?}");
            u -= h * power;
        }
        (h, u)
    }

    #[test]
    fn a_galilean_is_as_long_as_its_focal_lengths_together() {
        // E. Hecht, Optics, on the Galilean telescope: d = f₁ + f₂, M = −f₂/f₁.
        let passage = two([-1.0 / 20.0, 1.0 / 100.0]).unwrap();
        assert!((passage.spacings_mm[0] - 80.0).abs() < 1e-12);
        assert!((passage.heights[1] - 5.0).abs() < 1e-14);
        assert_eq!(two([0.0, 0.01]), None);
    }

    /// Newton's method on the two conditions, with slopes by differences: knows nothing of the
    /// closed form.
    fn by_newton(powers: [f64; 3], ratio: f64, from: [f64; 2]) -> Option<[f64; 2]> {
        let miss = |d: [f64; 2]| {
            let (mut h, mut u) = (1.0, 0.0);
            for (g, power) in powers.iter().enumerate() {
                if g > 0 {
                    h += d[g - 1] * u;
                }
                u -= h * power;
            }
            [h - ratio, u * 50.0]
        };
        let mut d = from;
        for _ in 0..60 {
            let now = miss(d);
            if now[0].abs() + now[1].abs() < 1e-13 {
                return Some(d);
            }
            let by = |i: usize| {
                let (mut more, mut less) = (d, d);
                more[i] += 1e-5;
                less[i] -= 1e-5;
                let (more, less) = (miss(more), miss(less));
                [0, 1].map(|k| (more[k] - less[k]) / 2e-5)
            };
            let (j0, j1) = (by(0), by(1));
            let det = j0[0] * j1[1] - j1[0] * j0[1];
            d[0] -= (now[0] * j1[1] - j1[0] * now[1]) / det;
            d[1] -= (j0[0] * now[1] - now[0] * j0[1]) / det;
        }
        None
    }

    proptest! {
        #[test]
        fn three_groups_are_where_newton_finds_them(
            f in [20.0..90.0_f64, -40.0..-8.0_f64, 80.0..250.0_f64], ratio in 1.5..8.0_f64,
        ) {
            let powers = f.map(|f| 1.0 / f);
            let passage = three(powers, ratio).unwrap();
            let (h, u) = follow(&powers, &passage);
            prop_assert!((h / ratio - 1.0).abs() < 1e-12 && u.abs() < 1e-13);
            let near = [passage.spacings_mm[0] + 0.5, passage.spacings_mm[1] - 0.5];
            let found = by_newton(powers, ratio, near);
            prop_assume!(found.is_some());
            let found = found.unwrap();
            for (found, closed) in found.iter().zip(passage.spacings_mm) {
                prop_assert!((found - closed).abs() < 1e-7 * (1.0 + closed.abs()), "{found} {closed}");
            }
        }

        #[test]
        fn four_groups_keep_ratio_collimation_and_tie(
            f in [-90.0..90.0_f64, -90.0..90.0_f64, -90.0..90.0_f64, -250.0..250.0_f64],
            ratio in 1.5..8.0_f64, value in 1.0..150.0_f64, which in 0..6_usize,
        ) {
            prop_assume!(f.iter().all(|f| f.abs() > 5.0));
            let tie = [Tie::First, Tie::Second, Tie::Third, Tie::FirstTwo, Tie::LastTwo, Tie::Whole][which];
            let powers = f.map(|f| 1.0 / f);
            for passage in four(powers, ratio, tie, value).into_iter().flatten() {
                let largest = passage.spacings_mm.iter().fold(1.0_f64, |a, d| a.max(d.abs()));
                prop_assume!(largest < 1e4);
                let (h, u) = follow(&powers, &passage);
                prop_assert!((h / ratio - 1.0).abs() < 1e-9 * largest && u.abs() < 1e-10 * largest);
                let (from, to) = tie.span();
                let sum: f64 = passage.spacings_mm[from..to].iter().sum();
                prop_assert!((sum - value).abs() < 1e-9 * largest * largest, "{sum} {value}");
            }
        }
    }

    #[test]
    fn roots_survive_every_shape_of_equation() {
        assert_eq!(roots(1.0, -3.0, 2.0), [Some(1.0), Some(2.0)]);
        assert_eq!(roots(0.0, 2.0, -3.0), [Some(1.5), None]);
        assert_eq!(roots(1.0, 0.0, 1.0), [None, None]);
        assert_eq!(roots(0.0, 0.0, 1.0), [None, None]);
        assert_eq!(roots(f64::NAN, 1.0, 1.0), [None, None]);
    }
}
