//! What moves a design: the solvers, the files they start from and end in.
//!
//! # What it owns
//!
//! - [`solve`]: damped least squares over state blocks, under bounds and limits, as an argmin
//!   solver; argmin's Nelder-Mead on the same problem;
//! - [`design_file`]: a design file with its three owners' parts, its JSON Schema, and the same
//!   file with other numbers; `freedom`: its `free` and `held`;
//! - [`cam`]: movement curves, where every group stands at any ratio;
//! - [`brief`]: the requirement a design is begun from;
//! - [`start`]: first-order layouts of a brief;
//! - [`fn@optimise::optimise`]: one local optimisation from file to file;
//! - [`mod@tolerance`]: what a workshop's errors do to a design, and the yield;
//! - [`temperature`]: what a design does at other temperatures, and how it is brought back;
//! - [`overnight`]: the global search as a run, and the ranked list it leaves;
//! - [`run`]: long work in a folder, where nothing is lost; [`origin`]: which unit of it found a
//!   design;
//! - `sampling`: points that fill a space evenly, random numbers keyed by a number;
//! - [`search`]: the global search, from a problem to many finished designs;
//! - [`change`]: what came back different, in a design file; [`retune`]: then moving only what can
//!   still move; [`sweep`]: a grid or a sample over any addresses, each point optimised;
//!   [`mod@front`]: the best trade between two results;
//! - [`write_whole`]: the one function of the program that writes files.
//!
//! # What it refuses to know
//!
//! Optics (it sees a [`BlockProblem`](merit_function::block::BlockProblem)), terminals, colours.
//!
//! # The one equation it exists for
//!
//! The step p that minimises ½|r + Jp|² + ½λ|Dp|² under low ≤ x + p ≤ high and g + Gp ≥ 0, with J in
//! blocks, one a zoom state. Start reading at [`solve`].

pub mod brief;
pub mod cam;
#[doc(hidden)]
pub mod careless;
pub mod change;
pub mod design_file;
mod document_kind;
mod freedom;
pub mod front;
pub mod optimise;
pub mod origin;
pub mod overnight;
pub mod retune;
pub mod run;
mod sampling;
pub mod search;
pub mod solve;
pub mod start;
pub mod sweep;
pub mod temperature;
pub mod tolerance;
pub mod write_whole;
