//! What moves a design: the solvers, the files they start from and end in.
//!
//! # What it owns
//!
//! - [`solve`]: damped least squares over state blocks, under bounds and limits, as an argmin
//!   solver; argmin's Nelder-Mead on the same problem;
//! - [`design_file`]: a design file with its three owners' parts, its JSON Schema, and the same
//!   file with other numbers; [`freedom`]: its `free` and `held`;
//! - [`cam`]: movement curves, where every group stands at any ratio;
//! - [`fn@optimise::optimise`]: one local optimisation from file to file;
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

pub mod cam;
pub mod design_file;
pub mod freedom;
pub mod optimise;
pub mod solve;
pub mod write_whole;
