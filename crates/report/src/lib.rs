//! What people read about a design: text tables for a terminal or a file.
//!
//! The numbers come from the crates below and are only laid out here; the one document of its own
//! is the path of a single ray ([`ray`]), for people and for machines. Nothing here knows of
//! the terminal's colours, or files: every function gives a text. [`picture`] draws, [`page`] puts
//! everything about a design on one page, [`shop`] makes the sheets a shop works from.
//!
//! Start reading at [`text::assessment`], then [`picture`].

pub mod page;
pub mod picture;
pub mod ray;
mod rows;
pub mod shop;
pub mod start;
pub mod text;

pub use rows::{RowsError, tolerance_rows};
