//! Why a design has no movement curve.

use merit_function::movement::NoWay;
use surface_model::glass::GlassError;

/// Why a design has no movement curve.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum CamError {
    /// Every group is fixed.
    #[error("no group moves, so there is no movement curve")]
    NothingMoves,
    /// There are not two ratios to go between, or no way leads from one to the other.
    #[error(transparent)]
    Way(#[from] NoWay),
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
