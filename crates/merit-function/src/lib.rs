//! What is wanted of a design, as numbers: goals and limits, their residuals and derivatives, and
//! the assessment people read.
//!
//! # What it owns
//!
//! - [`goals`] and [`limits`] as a design file writes them, resolved into [`wishes`];
//! - [`variables`]: which numbers are free, and how every state's train follows from them, the
//!   housing's conditions solved and not penalised;
//! - [`problem::MeritFunction`]: residuals, block Jacobian and limits with gradients, as a
//!   [`block::BlockProblem`];
//! - [`movement`]: where groups stand between the states, and how that follows from the glass;
//! - [`assessment`]: every state's numbers and every limit, wavefronts integrated to convergence.
//!
//! # What it refuses to know
//!
//! How the merit is lowered (the driver does that), terminals, files.
//!
//! # The one equation it exists for
//!
//! merit = Σ over states of weight × [ Σ over wavelengths (RMS/within)² + (ratio error/within)² +
//! (exit slope/within)² + the same for the goals about the real beam ]
//!
//! One unit of merit is one goal missed by exactly its `within`. Start reading at [`problem`].

pub mod assessment;
mod beam_rows;
pub mod block;
mod bounds;
mod climates;
mod edge;
pub mod fault;
mod focus_rows;
pub mod goals;
mod limit_evaluation;
mod limit_item;
mod limit_rows;
pub mod limits;
pub mod movement;
mod paraxial_rows;
pub mod problem;
#[cfg(test)]
mod problem_tests;
mod ray_weights;
mod sight;
mod state_optics;
pub mod variables;
mod way_rows;
pub mod wishes;
