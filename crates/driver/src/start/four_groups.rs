//! Powers of four groups from the layout at the lowest ratio.
//!
//! With spacings d and heights h chosen at one ratio M the slopes between the groups are
//! (h₂ − 1)/d₁, (h₃ − h₂)/d₂, (M − h₃)/d₃, and a group's power is the fall of the slope there
//! over its height. So every point leaves room between the groups at that ratio; only the others
//! have still to.

use super::scheme::{Movement, Scheme};
use super::space::{Point, Space};
use super::spacings::{MOST, Tie, four};
use super::thin::{NO_FOCUS, TIES, Tied};

/// A beam is at a group at most so many times as wide as at its wider end.
const WIDEST: f64 = 2.0;
/// Spacings differ from the first by this factor at most.
const WIDEST_SPACINGS: f64 = 50.0;
/// A tied distance changes by this factor at most from the lowest ratio to the highest.
const WIDEST_CHANGE: f64 = 30.0;

/// Powers, the first spacing 1 mm at the lowest ratio, and what ties the spacings at the others.
/// `None` where a ratio is inverted, or a group would have no power.
pub(super) fn four_groups(
    space: &Space,
    scheme: &Scheme,
    ratios: &[f64],
    point: Point<'_>,
) -> Option<([f64; MOST], Tied)> {
    if ratios.iter().any(|&ratio| ratio <= 0.0) {
        return None;
    }
    let lowest = ratios.iter().copied().fold(f64::INFINITY, f64::min);
    let spread = |(place, factor): (f64, f64)| factor.powf(2.0 * place - 1.0);
    let most = WIDEST * lowest.max(1.0);
    let height = |place: f64| NO_FOCUS * (most / NO_FOCUS).powf(place);
    let heights = [1.0, height(point.heights().0), height(point.heights().1), lowest];
    let places = point.spacings();
    let spacings = [1.0, spread((places.0, WIDEST_SPACINGS)), spread((places.1, WIDEST_SPACINGS))];
    let powers_per_mm = powers(heights, spacings)?;
    let (tie, factor) = match scheme.movement {
        Movement::Held(tie) => (tie, 1.0),
        Movement::Chosen => {
            (TIES[point.tie(TIES.len())], spread((point.tie_change(), WIDEST_CHANGE)))
        }
        Movement::Whole | Movement::Determined | Movement::Filling => (Tie::Whole, 1.0),
    };
    let (from, to) = tie.span();
    let low: f64 = spacings[from..to].iter().sum();
    let value = |state| low * (1.0 + (factor - 1.0) * space.way(state));
    let off = |passage: &super::spacings::Passage| {
        passage.heights.iter().zip(heights).map(|(is, was)| (is - was).abs()).sum::<f64>()
    };
    let ways = four(powers_per_mm, lowest, tie, low).map(|way| way.map_or(f64::MAX, |p| off(&p)));
    let root = usize::from(ways[1] < ways[0]);
    let values_mm = (0..ratios.len()).map(value).collect();
    Some((powers_per_mm, Tied { tie, values_mm, root }))
}

/// Powers that carry a beam through these heights over these spacings, parallel at both ends.
fn powers(heights: [f64; MOST], spacings: [f64; MOST - 1]) -> Option<[f64; MOST]> {
    let mut slopes = [0.0; MOST + 1];
    for (g, spacing) in spacings.iter().enumerate() {
        slopes[g + 1] = (heights[g + 1] - heights[g]) / spacing;
    }
    let mut powers = [0.0; MOST];
    for (g, power) in powers.iter_mut().enumerate() {
        *power = (slopes[g] - slopes[g + 1]) / heights[g];
    }
    powers.iter().all(|power| power.is_finite() && power.abs() > 1e-9).then_some(powers)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn powers_carry_the_beam_through_its_heights() {
        let (heights, spacings) = ([1.0, 0.4, 1.3, 5.0], [30.0, 12.0, 70.0]);
        let powers = powers(heights, spacings).unwrap();
        let (mut h, mut u) = (1.0, 0.0);
        for g in 0..MOST {
            if g > 0 {
                h += spacings[g - 1] * u;
            }
            assert!((h - heights[g]).abs() < 1e-14, "{g}");
            u -= h * powers[g];
        }
        assert!(u.abs() < 1e-16);
        assert_eq!(super::powers([1.0; 4], spacings), None, "no group bends the beam");
    }
}
