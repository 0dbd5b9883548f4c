//! One step of damped least squares, in the order in which it is made: linearise, eliminate the
//! states, solve for the shared variables under bounds and limits, accelerate, bend back to
//! curved limits, try.

mod accelerate;
mod limits;

use merit_function::block::{BlockProblem, BlockShape, Bounds, Linearisation};

use super::boldness::Boldness;
use super::cholesky::{NotPositiveDefinite, dot};
use super::convergence::{Reduction, is_stationary};
use super::evaluation::{Evaluator, Unusable};
use super::normal::NormalEquations;
use super::penalty::Penalties;
use super::quadratic::{self, Constraint, Inconsistent, Program, limit_along};
use super::scaling::Scaling;
use super::working_set::WorkingSet;

/// A point with what is known of it.
#[derive(Debug, Clone, Default)]
pub(crate) struct Point {
    pub(crate) variables: Vec<f64>,
    pub(crate) sum_of_squares: f64,
    /// Values of the limits.
    pub(crate) limits: Vec<f64>,
}

/// A tried step that could be evaluated.
#[derive(Debug, Clone)]
pub(crate) struct Trial {
    point: Point,
    /// What it promised and brought.
    pub(crate) reduction: Reduction,
    /// `|D p|`.
    pub(crate) length: f64,
}

/// Why a step was not even evaluated, or could not be.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Rejected {
    /// There is nothing to gain: the point satisfies the first-order conditions.
    Stationary,
    /// No step satisfies the linearised limits, not even the one that only stops their decline.
    Inconsistent,
    /// The trial point cannot be evaluated.
    Unusable,
}

impl From<Unusable> for Rejected {
    fn from(_: Unusable) -> Self {
        Self::Unusable
    }
}

/// Makes steps, in buffers that live as long as the run.
#[derive(Debug, Clone)]
pub(crate) struct Stepper {
    shape: BlockShape,
    bounds: Vec<Bounds>,
    point: Point,
    /// The point of least merit that has been linearised, and the scaling there.
    best: Point,
    scaling_at_best: Scaling,
    boldness: Boldness,
    /// The last step taken.
    taken: Vec<f64>,
    /// Where the last accepted step came from, until the new point is linearised.
    left: Option<Point>,
    here: Linearisation,
    ahead: Linearisation,
    normal: NormalEquations,
    scaling: Scaling,
    penalties: Penalties,
    working: WorkingSet,
    /// Share `τ` of a crossed limit's violation that the next step is to make good.
    restoration: f64,
    lambda: f64,
    subproblem: Subproblem,
    predicted: f64,
    /// The step: damped, then accelerated, then corrected.
    step: Vec<f64>,
    trial: Point,
    residuals: Vec<f64>,
    along: Vec<f64>,
    bent: Vec<f64>,
}

/// The data of the step's quadratic program that change from solve to solve.
#[derive(Debug, Clone, Default)]
struct Subproblem {
    gradient: Vec<f64>,
    free: Vec<f64>,
    low: Vec<f64>,
    high: Vec<f64>,
    required: Vec<f64>,
}

impl Stepper {
    /// Stands at `start`, which lies within the bounds; nothing is evaluated yet.
    pub(crate) fn new(shape: &BlockShape, bounds: &[Bounds], start: Vec<f64>) -> Self {
        let variables = shape.variables();
        let fixed = bounds.iter().map(|range| range.low == range.high).collect();
        Self {
            shape: shape.clone(),
            bounds: bounds.to_vec(),
            point: Point { variables: start, ..Point::default() },
            best: Point { sum_of_squares: f64::INFINITY, ..Point::default() },
            scaling_at_best: Scaling::new(variables),
            boldness: Boldness::default(),
            taken: vec![0.0; variables],
            left: None,
            here: Linearisation::zeros(shape),
            ahead: Linearisation::zeros(shape),
            normal: NormalEquations::new(shape, fixed),
            scaling: Scaling::new(variables),
            penalties: Penalties::default(),
            working: WorkingSet::default(),
            restoration: 1.0,
            lambda: 0.0,
            subproblem: Subproblem::default(),
            predicted: 0.0,
            step: vec![0.0; variables],
            trial: Point::default(),
            residuals: vec![0.0; shape.residuals()],
            along: vec![0.0; shape.residuals()],
            bent: vec![0.0; variables],
        }
    }

    /// The best point so far: where it stands, or what it has left for a step uphill.
    pub(crate) fn best(&self) -> &Point {
        if self.stands_at_best() { &self.point } else { &self.best }
    }

    /// Whether no point so far was better than where it stands.
    pub(crate) fn stands_at_best(&self) -> bool {
        self.merit(&self.point) <= self.merit(&self.best)
    }

    /// Largest violation of a limit at the best point, in units of its tolerance.
    pub(crate) fn violation(&self) -> f64 {
        self.largest_violation(&self.best().limits)
    }

    /// `|D x|`.
    pub(crate) fn scaled_length_of_point(&self) -> f64 {
        self.scaling.length_squared(&self.point.variables).sqrt()
    }

    /// Linearises at the start.
    pub(crate) fn start<P: BlockProblem>(
        &mut self,
        evaluator: &mut Evaluator<'_, P>,
    ) -> Result<(), Unusable> {
        self.point.sum_of_squares = evaluator.linearise(&self.point.variables, &mut self.ahead)?;
        self.take_linearisation();
        Ok(())
    }

    /// Linearises where the last accepted step led. Should the Jacobian not exist there, steps
    /// back to where it came from.
    pub(crate) fn linearise<P: BlockProblem>(
        &mut self,
        evaluator: &mut Evaluator<'_, P>,
    ) -> Result<(), Unusable> {
        let Some(left) = self.left.take() else { return Ok(()) };
        match evaluator.linearise(&self.point.variables, &mut self.ahead) {
            Ok(_) => {
                self.take_linearisation();
                Ok(())
            }
            Err(unusable) => {
                self.point = left;
                Err(unusable)
            }
        }
    }

    fn take_linearisation(&mut self) {
        std::mem::swap(&mut self.here, &mut self.ahead);
        self.normal.form(&self.here);
        self.scaling.update(self.normal.column_squares());
        self.point.limits.clear();
        self.point.limits.extend(self.here.limits.iter().map(|limit| limit.value));
        if self.stands_at_best() {
            self.best.clone_from(&self.point);
            self.scaling_at_best.clone_from(&self.scaling);
        }
    }

    /// Eliminates the states for a damping and factorises what is left for the shared variables.
    pub(crate) fn eliminate_states(&mut self, lambda: f64) -> Result<(), NotPositiveDefinite> {
        self.lambda = lambda;
        self.working.forget_columns();
        self.normal.eliminate(lambda, self.scaling.squares())
    }

    /// Solves for the damped step under bounds and limits.
    ///
    /// Restoring every crossed limit at once may be impossible; the share asked for is then cut
    /// until it is possible, at the latest at zero, which the step of length zero satisfies.
    pub(crate) fn solve_shared(&mut self, gradient_share: f64) -> Result<(), Rejected> {
        self.pose();
        loop {
            match self.solve_program() {
                Ok(()) => break,
                Err(Inconsistent) if self.restoration > 0.0 => self.demand_less(),
                Err(Inconsistent) => return Err(Rejected::Inconsistent),
            }
            self.require_restoration();
        }
        let limits = self.working.multipliers().filter_map(|(constraint, u)| match constraint {
            Constraint::Limit(limit) => Some((limit, u)),
            _ => None,
        });
        self.penalties.cover(self.here.limits.len(), limits);
        self.predicted = self.predict();
        if self.is_stationary(gradient_share) { Err(Rejected::Stationary) } else { Ok(()) }
    }

    /// Sets up the quadratic program at this point.
    fn pose(&mut self) {
        let Self { subproblem, normal, bounds, point, .. } = self;
        subproblem.gradient.clear();
        subproblem.gradient.extend_from_slice(normal.gradient());
        subproblem.low.clear();
        subproblem.high.clear();
        for (range, x) in bounds.iter().zip(&point.variables) {
            subproblem.low.push(range.low - x);
            subproblem.high.push(range.high - x);
        }
        self.require_restoration();
        self.solve_free();
    }

    fn solve_free(&mut self) {
        let Subproblem { gradient, free, .. } = &mut self.subproblem;
        free.clear();
        free.extend(gradient.iter().map(|g| -g));
        self.normal.solve(free);
    }

    /// Solves the program as it is posed, from the last working set.
    fn solve_program(&mut self) -> Result<(), Inconsistent> {
        let program = Program {
            normal: &self.normal,
            scale_squares: self.scaling.squares(),
            free: &self.subproblem.free,
            low: &self.subproblem.low,
            high: &self.subproblem.high,
            limits: &self.here.limits,
            required: &self.subproblem.required,
        };
        quadratic::solve(&program, &mut self.working, &mut self.step)
    }

    /// What the linear model promises, `φ(x) − φ_linear(x + p)`.
    ///
    /// With `H p + g = N u` the sum of squares falls by `½ (λ|D p|² − gᵀp − uᵀb)`, in which
    /// nothing cancels.
    fn predict(&self) -> f64 {
        let gain = -dot(&self.subproblem.gradient, &self.step);
        let resting: f64 =
            self.working.multipliers().map(|(constraint, u)| u * self.along_step(constraint)).sum();
        let damped = self.lambda * self.scaling.length_squared(&self.step);
        let limits = self.here.limits.iter();
        let after = limits.map(|limit| limit.value + limit_along(limit, &self.normal, &self.step));
        let penalty_falls =
            self.penalties.of(self.point.limits.iter().copied()) - self.penalties.of(after);
        0.5 * (damped + gain - resting) + penalty_falls
    }

    fn along_step(&self, constraint: Constraint) -> f64 {
        match constraint {
            Constraint::Low(j) => self.step[j],
            Constraint::High(j) => -self.step[j],
            Constraint::Limit(i) => limit_along(&self.here.limits[i], &self.normal, &self.step),
        }
    }

    /// First-order conditions: the gradient left over by the multipliers vanishes beside the
    /// columns, no limit is crossed, and every constraint with a multiplier is met already.
    fn is_stationary(&mut self, share: f64) -> bool {
        self.bent.copy_from_slice(self.normal.gradient());
        let mut gap = 0.0;
        for (constraint, u) in self.working.multipliers() {
            gap += u * self.along_step(constraint).abs();
            match constraint {
                Constraint::Low(j) => self.bent[j] -= u,
                Constraint::High(j) => self.bent[j] += u,
                Constraint::Limit(i) => {
                    let limit = &self.here.limits[i];
                    let own = limit.state.map(|state| self.normal.own_range(state));
                    for (j, a) in limit.by_shared.iter().enumerate() {
                        self.bent[j] -= if self.normal.is_fixed(j) { 0.0 } else { u * a };
                    }
                    for (j, a) in own.into_iter().flatten().zip(limit.by_own.iter()) {
                        self.bent[j] -= if self.normal.is_fixed(j) { 0.0 } else { u * a };
                    }
                }
            }
        }
        let squares = self.point.sum_of_squares;
        gap <= share * squares
            && self.largest_violation(&self.point.limits) <= 1.0
            && is_stationary(&self.bent, self.normal.column_squares(), squares, share)
    }

    /// Puts the trial point a share of the step away, within the bounds to the last bit.
    ///
    /// A step that ends on a bound up to rounding ends on the bound.
    fn place_trial(&mut self, share: f64) {
        let near = |end: f64, bound: f64, p: f64| (end - bound).abs() <= 1e-10 * p.abs();
        self.trial.variables.clear();
        for ((range, x), p) in self.bounds.iter().zip(&self.point.variables).zip(&self.step) {
            let end = range.clamp(x + share * p);
            self.trial.variables.push(if near(end, range.low, *p) {
                range.low
            } else if near(end, range.high, *p) {
                range.high
            } else {
                end
            });
        }
    }

    /// Evaluates the trial point.
    pub(crate) fn try_step<P: BlockProblem>(
        &mut self,
        evaluator: &mut Evaluator<'_, P>,
    ) -> Result<Trial, Rejected> {
        self.trial.sum_of_squares =
            evaluator.residuals(&self.trial.variables, &mut self.residuals)?;
        let merit = self.merit(&self.point);
        let reduction =
            Reduction { merit, predicted: self.predicted, actual: merit - self.merit(&self.trial) };
        let length = self.scaling.length_squared(&self.step).sqrt();
        Ok(Trial { point: self.trial.clone(), reduction, length })
    }

    /// `φ`.
    fn merit(&self, point: &Point) -> f64 {
        0.5 * point.sum_of_squares + self.penalties.of(point.limits.iter().copied())
    }

    /// Moves to the trial point.
    pub(crate) fn accept(&mut self, trial: Trial) {
        self.boldness.took_step(self.merit(&trial.point) < self.merit(self.best()));
        self.taken.copy_from_slice(&self.step);
        self.left = Some(std::mem::replace(&mut self.point, trial.point));
        self.demand_more();
    }

    /// Whether a step that does not bring what it promised is to be taken all the same.
    pub(crate) fn is_worth_going_up(&self, trial: &Trial) -> bool {
        let squares = [&self.step, &self.taken].map(|step| self.scaling.length_squared(step));
        let cosine =
            self.scaling.product(&self.step, &self.taken) / (squares[0] * squares[1]).sqrt();
        self.boldness.allows(cosine, trial.reduction, self.merit(self.best()))
    }

    /// Goes back to the best point, where it does not stand, if it has been away for too long or has
    /// come to an `end`; whether it does.
    pub(crate) fn goes_back(&mut self, end: bool) -> bool {
        let goes = end || self.boldness.is_spent();
        if goes {
            self.point.clone_from(&self.best);
            self.scaling.clone_from(&self.scaling_at_best);
            self.left = Some(self.best.clone());
            self.boldness.went_back();
        }
        goes
    }

    /// Stays; crossed limits are to be restored more gently.
    pub(crate) fn reject(&mut self) {
        if self.largest_violation(&self.point.limits) > 0.1 {
            self.demand_less();
        }
    }
}
