//! What people read about a design: text tables for a terminal or a file.
//!
//! The numbers come from the crates below and are only laid out here; the one document of its own
//! is the path of a single ray ([`ray`]), for people and for machines. Nothing here knows of
//! colours, terminals or files: every function gives a text.
//!
//! Start reading at [`text::assessment`], then [`text::optimisation`].

pub mod ray;
mod rows;
pub mod start;
pub mod text;

pub use rows::{RowsError, tolerance_rows};
