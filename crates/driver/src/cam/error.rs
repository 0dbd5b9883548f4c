//! Why a design has no movement curve.

use surface_model::glass::GlassError;

/// Why a design has no movement curve.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum CamError {
    /// Every group is fixed.
    #[error("no group moves, so there is no movement curve")]
    NothingMoves,
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
    /// No positions near a state's hold its ratio and collimation.
    #[error("near state {state} no positions hold the ratio {ratio} {and}: {reason}")]
    State {
        /// Name of the state.
        state: String,
        /// Its ratio.
        ratio: f64,
        /// What else is held.
        and: &'static str,
        /// What stands in the way.
        reason: String,
    },
    /// A glass is not known at the wavelength.
    #[error(transparent)]
    Glass(#[from] GlassError),
    /// A setting is out of range.
    #[error("{option}: {found}, but it must be {constraint}")]
    Setting {
        /// Which.
        option: &'static str,
        /// Its value.
        found: f64,
        /// What would do.
        constraint: &'static str,
    },
}
