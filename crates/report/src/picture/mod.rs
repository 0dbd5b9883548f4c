//! Pictures, as SVG: to scale where they show glass, with units wherever they show numbers.
//!
//! Everything is drawn on a [`Panel`]; [`Panel::stack`] puts panels together, [`Panel::to_file`]
//! makes a file of one and [`Panel::to_element`] a part of a page. All have one look (`ink.rs`):
//! curves are named at their ends, colours are safe for the colour-blind and never speak alone.
//!
//! | what | how |
//! |---|---|
//! | glass, rays, movement | [`layout()`], [`train`] for the geometry alone |
//! | exit wavefronts | [`wavefronts`] |
//! | over the ratio | [`movement`] |
//! | merit against iteration or start | [`merit_curve`] |
//! | a search | [`overnight_picture`] |
//! | a sweep | [`sweep_curve`], [`sweep_map`], [`trade`]: axes have a name and a unit, the values are yours, a missing one is a point without a design; [`sweep_picture`] for the results of `sweep` |
//! | what counts how much | [`fn@bars`] |
//! | any curve | [`fn@chart`] |
//!
//! For a sweep's picture, for instance:
//!
//! ```
//! use report::picture::{Axis, PICTURE_WIDTH, SweepMap, sweep_map};
//!
//! let map = SweepMap {
//!     title: "Merit over track and top ratio".into(),
//!     x: Axis::linear("track", "mm"),
//!     x_values: vec!["120".into(), "150".into()],
//!     y: Axis::linear("top ratio", ""),
//!     y_values: vec!["5".into(), "6".into()],
//!     value: Axis::logarithmic("merit", ""),
//!     cells: vec![vec![Some(0.3), Some(0.1)], vec![None, Some(0.2)]],
//! };
//! let svg: String = sweep_map(&map, PICTURE_WIDTH).to_file();
//! assert!(svg.contains("top ratio"));
//! ```

mod axis;
mod bars;
mod chart;
mod element;
mod ink;
mod layout;
mod merit;
pub mod movement;
mod overnight_sheet;
mod panel;
mod sheets;
mod sweep;
mod sweep_sheet;
pub mod train;
mod wavefront;

pub use axis::Axis;
pub use bars::{Bar, bars};
pub use chart::{Chart, Level, Series, chart};
pub use element::element_drawing;
pub use layout::layout;
pub use merit::merit_curve;
pub use overnight_sheet::overnight_picture;
pub use panel::Panel;
pub use sheets::{assessment_picture, cam_picture, optimisation_picture};
pub use sweep::{
    Readings, SweepCurve, SweepMap, Trade, TradedDesign, sweep_curve, sweep_map, trade,
};
pub use sweep_sheet::sweep_picture;
pub use wavefront::wavefronts;

/// Width that files are drawn at, px: as wide as a page of A4 between its margins, at 96 px an
/// inch.
pub const PICTURE_WIDTH: f64 = 720.0;
