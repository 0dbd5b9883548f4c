//! Pictures, as SVG: to scale where they show glass, with units wherever they show numbers.
//!
//! Everything is drawn on a [`Panel`]; [`Panel::stack`] puts panels together, [`Panel::into_file`]
//! makes a file of one and [`Panel::into_element`] a part of a page. All have one look (`ink.rs`):
//! curves are named at their ends, colours are safe for the colour-blind and never speak alone.
//!
//! | what | how |
//! |---|---|
//! | glass, rays, movement | [`layout()`], [`train`] for the geometry alone |
//! | exit wavefronts | [`wavefronts`] |
//! | over the ratio | [`movement`] |
//! | merit against iteration or start | [`merit_curve`] |
//! | a search | [`overnight_picture`] |
//! | a sweep | [`sweep`] over one axis or a grid of two and for a trade, [`scattered`] for points that are no grid, [`axis_name`] for what an axis is called |
//! | what counts how much | [`fn@bars`] |
//! | any curve | [`fn@chart`] |

mod axis;
mod axis_name;
mod bars;
mod chart;
mod element;
mod ink;
mod layout;
mod merit;
pub(crate) mod movement;
mod overnight_sheet;
mod panel;
mod scattered;
mod sheets;
mod sweep;
mod sweep_sheet;
pub(crate) mod train;
mod wavefront;

pub use overnight_sheet::overnight_picture;
pub use sheets::{assessment_picture, cam_picture, optimisation_picture};
pub use sweep_sheet::sweep_picture;

pub(crate) use axis::Axis;
pub(crate) use bars::{Bar, bars};
pub(crate) use chart::chart;
pub(crate) use element::element_drawing;
pub(crate) use layout::layout;
pub(crate) use merit::merit_curve;
pub(crate) use panel::Panel;
pub(crate) use sweep::Readings;
pub(crate) use wavefront::wavefronts;

/// Width that files are drawn at, px: as wide as a page of A4 between its margins, at 96 px an
/// inch.
const PICTURE_WIDTH: f64 = 720.0;
