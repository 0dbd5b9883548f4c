//! The designed states in the order of their ratios.

use surface_model::design::Design;

/// Ratios nearer than this part of the way are one.
pub const SAME: f64 = 1e-9;

/// Why no movement leads over a design's states.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum NoWay {
    /// There are not two ratios to go between.
    #[error("a movement curve goes from ratio to ratio; the design has only one")]
    OneRatio,
    /// Upright and inverted states.
    #[error(
        "the states go from a ratio of {low} to one of {high}: no movement leads from an inverted \
         beam to an upright one"
    )]
    BothSigns {
        /// Smallest ratio.
        low: f64,
        /// Largest ratio.
        high: f64,
    },
}

/// The states that the curve goes through, by ascending ratio; of those with one ratio the first.
///
/// # Errors
/// There are not two ratios, or a beam would have to turn from inverted to upright.
pub fn knots(design: &Design) -> Result<Vec<usize>, NoWay> {
    let all: Vec<usize> = (0..design.states.len()).collect();
    knots_of(design, &all)
}

/// As [`knots`], of these states alone.
///
/// # Errors
/// As [`knots`].
pub fn knots_of(design: &Design, states: &[usize]) -> Result<Vec<usize>, NoWay> {
    let ratio = |&k: &usize| design.states[k].ratio;
    let mut knots = states.to_vec();
    knots.sort_by(|a, b| ratio(a).total_cmp(&ratio(b)).then(a.cmp(b)));
    let (Some(low), Some(high)) = (knots.first().map(ratio), knots.last().map(ratio)) else {
        return Err(NoWay::OneRatio);
    };
    knots.dedup_by(|b, a| (ratio(b) - ratio(a)) <= SAME * (high - low));
    if knots.len() < 2 {
        return Err(NoWay::OneRatio);
    }
    if low < 0.0 && high > 0.0 {
        return Err(NoWay::BothSigns { low, high });
    }
    Ok(knots)
}
