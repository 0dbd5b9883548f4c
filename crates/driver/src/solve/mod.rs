//! Solving: from a start to a minimum of a block least-squares problem,
//!
//! ```text
//!   minimise Σₖ |rₖ(x)|²   over   lowⱼ ≤ xⱼ ≤ highⱼ,   gᵢ(x) ≥ 0.
//! ```
//!
//! [`run`] is the front door. It knows nothing of terminals and files: an [`Observer`] is told of
//! every iteration and may ask for a stop. The same input gives the same bits.
//!
//! Start reading at `damped_least_squares.rs`, whose `next_iter` is the method; `step.rs` holds
//! its steps, `normal.rs` the elimination of the states, `quadratic.rs` the bounds and limits.

mod acceleration;
mod boldness;
mod cholesky;
mod convergence;
mod damped_least_squares;
mod damping;
mod evaluation;
mod events;
mod growing_cholesky;
mod nelder_mead;
mod normal;
mod outcome;
mod penalty;
mod quadratic;
mod scaling;
mod settings;
mod step;
mod working_set;

#[cfg(test)]
mod tests;

use std::time::Instant;

use argmin::core::{Executor, State};
use merit_function::block::{BlockProblem, Bounds};

use damped_least_squares::DampedLeastSquares;
use evaluation::Evaluator;
use step::Stepper;

pub(crate) use events::Interruptible;
pub use events::{Observer, Progress, Unwatched};
pub use outcome::{Outcome, SolveError, Stopped};
pub use settings::{Method, Settings, SettingsError};

/// Solves a problem from a start; a start outside the bounds is moved to the nearest point
/// within.
///
/// # Errors
/// The start does not fit the problem or cannot be evaluated, or a range of the bounds is empty.
/// Later points that cannot be evaluated are rejected steps, not errors.
pub fn run<P: BlockProblem>(
    problem: &mut P,
    start: &[f64],
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Outcome, SolveError> {
    let began = Instant::now();
    let start = admit(problem, start)?;
    let mut outcome = match settings.method() {
        Method::DampedLeastSquares => damped_least_squares(problem, start, settings, observer),
        Method::NelderMead => nelder_mead::run(problem, start, settings, observer),
    }?;
    outcome.time = began.elapsed();
    Ok(outcome)
}

fn damped_least_squares<P: BlockProblem>(
    problem: &mut P,
    start: Vec<f64>,
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Outcome, SolveError> {
    let stepper = Stepper::new(problem.shape(), problem.bounds(), start);
    let solver = DampedLeastSquares::new(settings, observer, stepper);
    let result = Executor::new(Evaluator::new(problem), solver)
        .configure(|state| state.max_iters(settings.max_iterations()))
        .ctrlc(false)
        .timer(false)
        .run()
        .map_err(unwrap_frame)?;
    let evaluator = result.problem.problem;
    let stopped = result.solver.stopped().unwrap_or(Stopped::IterationLimit);
    let stepper = result.solver.into_stepper();
    Ok(Outcome {
        violation: stepper.violation(),
        variables: stepper.best().variables.clone(),
        sum_of_squares: stepper.best().sum_of_squares,
        stopped,
        iterations: result.state.get_iter(),
        evaluations: evaluator.as_ref().map_or(0, |evaluator| evaluator.evaluations),
        linearisations: evaluator.as_ref().map_or(0, |evaluator| evaluator.linearisations),
        time: std::time::Duration::ZERO,
    })
}

/// Checks the start against the problem and moves it within the bounds.
fn admit<P: BlockProblem>(problem: &P, start: &[f64]) -> Result<Vec<f64>, SolveError> {
    let bounds = problem.bounds();
    let expected = problem.shape().variables();
    if expected == 0 {
        return Err(SolveError::NoVariables);
    }
    if start.len() != expected || bounds.len() != expected {
        return Err(SolveError::WrongLength { expected, given: start.len().min(bounds.len()) });
    }
    start
        .iter()
        .zip(bounds)
        .enumerate()
        .map(|(variable, (&value, range))| {
            let Bounds { low, high } = *range;
            // An infinite bound is open, but a range lying altogether at infinity holds no number.
            let is_range = low <= high && low < f64::INFINITY && high > f64::NEG_INFINITY;
            if !is_range {
                Err(SolveError::NoRange { variable, low, high })
            } else if value.is_finite() {
                Ok(range.clamp(value))
            } else {
                Err(SolveError::StartNotFinite { variable, value })
            }
        })
        .collect()
}

/// Our own errors travel through argmin's and come out as they went in.
fn unwrap_frame(error: argmin::core::Error) -> SolveError {
    error.downcast().unwrap_or_else(|other| SolveError::Frame(other.to_string()))
}
