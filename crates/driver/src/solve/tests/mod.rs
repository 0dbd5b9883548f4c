//! The solvers as a caller sees them.

mod blocks;
mod bounds;
mod expander;
mod limits;
mod problems;
mod robustness;
mod simplex;

use merit_function::block::BlockProblem;

use super::{Outcome, Settings, Unwatched, run};

/// Runs with the defaults.
fn solve<P: BlockProblem>(problem: &mut P, start: &[f64]) -> Outcome {
    run(problem, start, &Settings::default(), &mut Unwatched).unwrap()
}
