//! The movement between the designed states: where groups stand so that ratio and collimation hold.
//!
//! Between two states the positions of the groups are those that hold ratio and collimation
//! (`collimation.rs` says of what), found by continuation from state to state (`follow.rs`). Two
//! moving groups are just enough for the two conditions; where more move, the ones whose help is
//! needed least follow the monotone cubic through the designed states (`guide.rs`), and the other
//! two are solved for. Where only one moves, the ratio alone is held.

mod collimation;
mod follow;
mod guide;
mod interpolant;
mod knots;
mod measure;
mod set_up;
mod slide;
mod way;

pub use collimation::{Gauge, Held, HeldFault};
pub use follow::{Equations, FROM_A_STATE, Point, Stop};
pub use guide::MonotoneCubic;
#[cfg(test)]
pub(crate) use interpolant::Aspect;
pub use knots::{NoWay, SAME, knots, knots_of};
pub(crate) use measure::WayMeasure;
pub use set_up::wavelengths_nm;
pub use slide::Slide;
pub(crate) use way::{COUNTS, Way, direction};
