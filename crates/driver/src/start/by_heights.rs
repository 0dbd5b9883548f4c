//! Powers of three groups from the heights of the beam at the second one.
//!
//! Of powers taken at random few leave room between the groups at both ends of a zoom; of heights
//! x at the lowest ratio m and x′ at the highest m′ all those do that keep a few inequalities. By
//! h₂ = −(φ₁ + Mφ₃)/φ₂ at both ratios (see [`super::spacings`])
//!
//! φ₃ = −φ₂(x′ − x)/(m′ − m),   φ₁ = −φ₂(x m′ − x′m)/(m′ − m),
//!
//! and d₁ = (1 − h₂)/φ₁ and d₂ = (M − h₂)/(Mφ₃) are positive at all ratios between if they are at
//! both ends, h₂ and M − h₂ being straight lines in M:
//!
//! | sign | asks for |
//! |---|---|
//! | φ₁ positive (negative) | x and x′ below (above) 1 |
//! | φ₃ positive (negative) | x below (above) m, x′ below (above) m′ |
//! | φ₂φ₃ negative (positive) | x below (above) x′ |
//! | φ₁φ₂ negative (positive) | x above (below) x′m/m′ |

use merit_function::limits::Range;

use super::family::Sign;
use super::no_layout::NoLayout;
use super::scheme::Scheme;
use super::space::Point;
use super::spacings::MOST;
use super::thin::{NO_FOCUS, ends_of};

/// A beam is at the second group at most so many times as wide as at its widest end.
const WIDEST: f64 = 2.0;

/// Powers of the family a point names, the second focal length ±1 mm. `None` where all ratios are
/// the same, or one is inverted: heights say too little, or too much, there.
pub(super) fn by_heights(
    scheme: &Scheme,
    ratios: &[f64],
    point: Point<'_>,
) -> Result<Option<[f64; MOST]>, NoLayout> {
    let Range { min: lowest, max: highest } = ends_of(ratios.iter().copied());
    if lowest <= 0.0 || highest - lowest < 1e-6 * highest {
        return Ok(None);
    }
    let family = scheme.families.get(point.family(scheme.families.len()));
    let Some([first, second, third]) = family.map(|family| family.0.as_slice()) else {
        return Err(NoLayout::Passing);
    };
    let whole = Range { min: NO_FOCUS, max: WIDEST * highest.max(1.0) };
    let side = |sign: Sign, line: f64| match sign {
        Sign::Positive => Range { min: 0.0, max: line },
        Sign::Negative => Range { min: line, max: f64::INFINITY },
    };
    let at_highest = whole.meet(side(*first, 1.0)).meet(side(*third, highest));
    let (u, v) = point.heights();
    let x1 = at_highest.even(u).ok_or(NoLayout::Passing)?;
    let opposite =
        |one: Sign, other: Sign| if one == other { Sign::Negative } else { Sign::Positive };
    let at_lowest = whole
        .meet(side(*first, 1.0))
        .meet(side(*third, lowest))
        .meet(side(opposite(*second, *third), x1))
        .meet(side(opposite(*first, *second).other(), x1 * lowest / highest));
    let x = at_lowest.even(v).ok_or(NoLayout::Passing)?;
    let power = second.factor();
    let over = -power / (highest - lowest);
    Ok(Some([over * (x * highest - x1 * lowest), power, over * (x1 - x), 0.0]))
}

/// What is done with ranges of heights.
trait Heights {
    fn meet(self, other: Self) -> Self;
    fn even(self, place: f64) -> Option<f64>;
}

impl Heights for Range {
    fn meet(self, other: Self) -> Self {
        Self { min: self.min.max(other.min), max: self.max.min(other.max) }
    }

    /// A number of the range, even on a logarithmic scale; `None` of an empty one.
    fn even(self, place: f64) -> Option<f64> {
        (self.min < self.max).then(|| self.min * (self.max / self.min).powf(place))
    }
}
