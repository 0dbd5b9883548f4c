//! argmin's own Nelder-Mead on the same problems.
//!
//! The simplex knows neither bounds nor limits nor faults, so it is given a cost that is finite
//! everywhere: variables are clamped into their bounds before evaluation, a crossed limit costs
//! more than any kept one, the more the further, and a fault costs more than any crossed limit,
//! the more the further from the start. Variables without room are left out of the simplex.

use std::cell::RefCell;
use std::time::Duration;

use argmin::core::{
    CostFunction, Error, Executor, KV, Problem, Solver, State, TerminationReason, TerminationStatus,
};
use argmin::solver::neldermead::NelderMead;
use merit_function::block::{BlockProblem, Bounds, LimitRow, Linearisation};

use super::damped_least_squares::{SolverState, evaluator};
use super::evaluation::Evaluator;
use super::events::{Observer, Progress};
use super::outcome::{Outcome, SolveError, Stopped};
use super::settings::Settings;
use super::unwrap_frame;

/// Cost of crossing a limit at all, and of every tolerance by which it is crossed.
const CROSSED: f64 = 1e12;
/// Cost of a point that cannot be evaluated.
const FAULT: f64 = 1e200;
/// A corner of the first simplex changes the residuals by this share of their length.
const CORNER: f64 = 0.1;

/// The cost function of the simplex, over the variables that can move.
struct SimplexCost<'p, P> {
    evaluator: RefCell<Evaluator<'p, P>>,
    start: Vec<f64>,
    bounds: Vec<Bounds>,
    /// Indices of the variables that can move.
    movable: Vec<usize>,
    tolerances: Vec<f64>,
    residuals: usize,
}

impl<P: BlockProblem> SimplexCost<'_, P> {
    /// The whole packed vector, within the bounds.
    fn unpack(&self, moved: &[f64]) -> Vec<f64> {
        let mut variables = self.start.clone();
        for (&index, &value) in self.movable.iter().zip(moved) {
            if value.is_finite() {
                variables[index] = self.bounds[index].clamp(value);
            }
        }
        variables
    }

    /// Largest violation in units of the tolerance; infinite where it cannot be evaluated.
    fn violation(&self, variables: &[f64]) -> f64 {
        self.crossings(variables).map_or(f64::INFINITY, |(_, largest)| largest)
    }

    /// Sum and maximum of the violations, in tolerances.
    fn crossings(&self, variables: &[f64]) -> Option<(f64, f64)> {
        let mut values = Vec::with_capacity(self.tolerances.len());
        self.evaluator.borrow_mut().limits(variables, &mut values).ok()?;
        let crossed = values
            .iter()
            .zip(&self.tolerances)
            .map(|(value, tolerance)| (-value / tolerance.max(f64::MIN_POSITIVE)).max(0.0));
        Some(crossed.fold((0.0, 0.0), |(sum, largest), v| (sum + v, v.max(largest))))
    }

    fn sum_of_squares(&self, variables: &[f64]) -> Option<f64> {
        let mut residuals = vec![0.0; self.residuals];
        self.evaluator.borrow_mut().residuals(variables, &mut residuals).ok()
    }

    fn fault_cost(&self, variables: &[f64]) -> f64 {
        let away: f64 = variables
            .iter()
            .zip(&self.start)
            .map(|(x, start)| ((x - start) / (1.0 + start.abs())).abs())
            .sum();
        FAULT * (1.0 + away.min(1e50))
    }
}

impl<P: BlockProblem> CostFunction for SimplexCost<'_, P> {
    type Param = Vec<f64>;
    type Output = f64;

    fn cost(&self, moved: &Vec<f64>) -> Result<f64, Error> {
        let variables = self.unpack(moved);
        let evaluated = self.crossings(&variables).zip(self.sum_of_squares(&variables));
        let Some(((crossed, largest), squares)) = evaluated else {
            return Ok(self.fault_cost(&variables));
        };
        let limits = if largest > 1.0 { CROSSED * (1.0 + crossed) } else { 0.0 };
        Ok((squares + limits).min(FAULT))
    }
}

/// argmin's solver, watched.
struct Watched<'a> {
    simplex: NelderMead<Vec<f64>, f64>,
    settings: &'a Settings,
    observer: &'a mut dyn Observer,
    stopped: Option<Stopped>,
}

impl<P: BlockProblem> Solver<SimplexCost<'_, P>, SolverState> for Watched<'_> {
    fn name(&self) -> &str {
        "Nelder-Mead"
    }

    fn init(
        &mut self,
        problem: &mut Problem<SimplexCost<'_, P>>,
        state: SolverState,
    ) -> Result<(SolverState, Option<KV>), Error> {
        self.simplex.init(problem, state)
    }

    fn next_iter(
        &mut self,
        problem: &mut Problem<SimplexCost<'_, P>>,
        state: SolverState,
    ) -> Result<(SolverState, Option<KV>), Error> {
        let iteration = state.get_iter() + 1;
        let before = state.get_best_cost();
        let (mut state, kv) = self.simplex.next_iter(problem, state)?;
        let cost = state.get_cost();
        let best = state.take_param().unwrap_or_default();
        let problem = evaluator(problem)?;
        let variables = problem.unpack(&best);
        // Below the price of a crossed limit the cost is the sum of squares itself.
        let squares = if cost < CROSSED { Some(cost) } else { problem.sum_of_squares(&variables) };
        let progress = Progress {
            iteration,
            sum_of_squares: squares.unwrap_or(f64::MAX),
            violation: problem.violation(&variables).min(f64::MAX),
            damping: None,
            step: 0.0,
            accepted: cost < before,
            variables: &variables,
        };
        if self.observer.observe(&progress).is_break() {
            self.stopped = Some(Stopped::Observer);
        }
        if cost <= self.settings.target() {
            self.stopped = Some(Stopped::TargetReached);
        }
        Ok((state.param(best), kv))
    }

    fn terminate(&mut self, state: &SolverState) -> TerminationStatus {
        if self.stopped.is_none() && self.observer.interrupted() {
            self.stopped = Some(Stopped::Interrupted);
        }
        if self.stopped.is_none() {
            let settled = <NelderMead<_, _> as Solver<NoProblem, SolverState>>::terminate(
                &mut self.simplex,
                state,
            );
            self.stopped = settled.terminated().then_some(Stopped::MeritSettled);
        }
        match self.stopped {
            Some(_) => TerminationStatus::Terminated(TerminationReason::SolverConverged),
            None => TerminationStatus::NotTerminated,
        }
    }
}

/// argmin's convergence test does not look at the problem, but its signature names one.
struct NoProblem;

impl CostFunction for NoProblem {
    type Param = Vec<f64>;
    type Output = f64;

    fn cost(&self, _: &Vec<f64>) -> Result<f64, Error> {
        Ok(0.0)
    }
}

/// Runs the simplex from a start within the bounds.
pub(crate) fn run<P: BlockProblem>(
    problem: &mut P,
    start: Vec<f64>,
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Outcome, SolveError> {
    let shape = problem.shape().clone();
    let bounds = problem.bounds().to_vec();
    let mut evaluator = Evaluator::new(problem);
    let mut linearisation = Linearisation::zeros(&shape);
    let squares = evaluator.linearise(&start, &mut linearisation)?;
    let lengths = column_lengths(&linearisation);
    let movable: Vec<usize> =
        (0..start.len()).filter(|&index| bounds[index].low < bounds[index].high).collect();
    if movable.is_empty() {
        return Ok(nothing_to_move(evaluator, &linearisation, start, squares));
    }
    let simplex = corners(&start, &bounds, &movable, &lengths, squares.sqrt());
    let cost = SimplexCost {
        evaluator: RefCell::new(evaluator),
        start,
        bounds,
        movable,
        tolerances: linearisation.limits.iter().map(|limit| limit.tolerance).collect(),
        residuals: shape.residuals(),
    };
    let simplex =
        NelderMead::new(simplex).with_sd_tolerance(settings.reduction()).map_err(unwrap_frame)?;
    let watched = Watched { simplex, settings, observer, stopped: None };
    let result = Executor::new(cost, watched)
        .configure(|state| state.max_iters(settings.max_iterations()))
        .ctrlc(false)
        .timer(false)
        .run()
        .map_err(unwrap_frame)?;
    let missing = || SolveError::Frame("the problem is missing".to_owned());
    let cost = result.problem.problem.ok_or_else(missing)?;
    let best = result.state.get_best_param().cloned().unwrap_or_default();
    let variables = cost.unpack(&best);
    let violation = cost.violation(&variables);
    let sum_of_squares = cost.sum_of_squares(&variables).ok_or(SolveError::NotFinite)?;
    let evaluator = cost.evaluator.into_inner();
    Ok(Outcome {
        variables,
        sum_of_squares,
        stopped: result.solver.stopped.unwrap_or(Stopped::IterationLimit),
        violation,
        iterations: result.state.get_iter(),
        evaluations: evaluator.evaluations,
        linearisations: evaluator.linearisations,
        time: Duration::ZERO,
    })
}

/// The start itself, when no variable has room.
fn nothing_to_move<P: BlockProblem>(
    evaluator: Evaluator<'_, P>,
    linearisation: &Linearisation,
    start: Vec<f64>,
    squares: f64,
) -> Outcome {
    let crossed = |limit: &LimitRow| -limit.value / limit.tolerance.max(f64::MIN_POSITIVE);
    Outcome {
        variables: start,
        sum_of_squares: squares,
        stopped: Stopped::GradientSmall,
        violation: linearisation.limits.iter().map(crossed).fold(0.0, f64::max),
        iterations: 0,
        evaluations: evaluator.evaluations,
        linearisations: evaluator.linearisations,
        time: Duration::ZERO,
    }
}

/// Lengths of the columns of the Jacobian.
fn column_lengths(linearisation: &Linearisation) -> Vec<f64> {
    let shared = linearisation.states.first().map_or(0, |block| block.by_shared.ncols());
    let mut squares = vec![0.0; shared];
    for block in &linearisation.states {
        for (square, column) in squares.iter_mut().zip(block.by_shared.column_iter()) {
            *square += column.norm_squared();
        }
        squares.extend(block.by_own.column_iter().map(|column| column.norm_squared()));
    }
    squares.iter().map(|square| square.sqrt()).collect()
}

/// The start, and one corner a movable variable: displaced so far that the residuals change by a
/// tenth, by a tenth of the variable at most, inwards where a bound is near.
fn corners(
    start: &[f64],
    bounds: &[Bounds],
    movable: &[usize],
    lengths: &[f64],
    residual: f64,
) -> Vec<Vec<f64>> {
    let origin: Vec<f64> = movable.iter().map(|&index| start[index]).collect();
    let mut corners = vec![origin.clone()];
    for (position, &index) in movable.iter().enumerate() {
        let largest = CORNER * start[index].abs().max(1e-2);
        let wanted = CORNER * residual / lengths[index];
        let displacement = if wanted > 0.0 { wanted.min(largest) } else { largest };
        let Bounds { low, high } = bounds[index];
        let mut corner = origin.clone();
        corner[position] = if start[index] + displacement <= high {
            start[index] + displacement
        } else {
            (start[index] - displacement).max(low)
        };
        corners.push(corner);
    }
    corners
}
