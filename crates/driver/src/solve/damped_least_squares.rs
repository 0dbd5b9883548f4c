//! Damped least squares (Levenberg, Q. Appl. Math. 2, 164 (1944); Marquardt 1963) under bounds
//! and limits, as an argmin solver. [`DampedLeastSquares::next_iter`] is the method; every step
//! it names is a module of its own beside this one.

use argmin::core::{
    Error, IterState, KV, Problem, Solver, State, TerminationReason, TerminationStatus,
};
use merit_function::block::BlockProblem;

use super::convergence::{Convergence, Reduction};
use super::damping::Damping;
use super::evaluation::Evaluator;
use super::events::{Observer, Progress};
use super::outcome::{SolveError, Stopped};
use super::settings::Settings;
use super::step::{Rejected, Stepper, Trial};

/// argmin's state for these solvers: a point and its cost, nothing else.
pub(crate) type SolverState = IterState<Vec<f64>, (), (), (), (), f64>;

/// Damping `λ` of the first step, as a share of the squared column lengths; Marquardt's 1e-2 is for
/// poorer starts.
const INITIAL_DAMPING: f64 = 1e-3;

/// The solver.
pub(crate) struct DampedLeastSquares<'a> {
    settings: &'a Settings,
    observer: &'a mut dyn Observer,
    damping: Damping,
    /// What the damping was when it last stood at the best point.
    damping_at_best: Damping,
    convergence: Convergence,
    stepper: Stepper,
    stopped: Option<Stopped>,
}

impl<'a> DampedLeastSquares<'a> {
    /// A solver for the problem the stepper was made for.
    pub(crate) fn new(
        settings: &'a Settings,
        observer: &'a mut dyn Observer,
        stepper: Stepper,
    ) -> Self {
        Self {
            settings,
            observer,
            damping: Damping::new(INITIAL_DAMPING),
            damping_at_best: Damping::new(INITIAL_DAMPING),
            convergence: Convergence::default(),
            stepper,
            stopped: None,
        }
    }

    /// Why it stopped; `None` while argmin's own iteration limit is what stopped it.
    pub(crate) fn stopped(&self) -> Option<Stopped> {
        self.stopped
    }

    /// Where it stands.
    pub(crate) fn into_stepper(self) -> Stepper {
        self.stepper
    }

    /// Accepts the trial and adapts the damping to it, or stays and raises it.
    fn judge(&mut self, trial: Result<Trial, Rejected>) -> bool {
        let accepted = match trial {
            Ok(trial) => {
                let reduction = trial.reduction;
                self.note(reduction, trial.length);
                if reduction.is_acceptable() {
                    self.stepper.accept(trial);
                    self.damping.adapt(reduction.gain());
                    true
                } else if self.stepper.is_worth_going_up(&trial) {
                    self.stepper.accept(trial);
                    true
                } else {
                    self.reject();
                    false
                }
            }
            Err(rejected) => {
                if rejected == Rejected::Stationary {
                    self.stopped = Some(Stopped::GradientSmall);
                }
                self.reject();
                false
            }
        };
        if self.stepper.stands_at_best() {
            self.damping_at_best.clone_from(&self.damping);
        } else if self.stepper.goes_back(self.damping.has_overflowed() || self.stopped.is_some()) {
            self.stopped = None;
            self.convergence = Convergence::default();
            self.damping.clone_from(&self.damping_at_best);
            self.damping.raise();
        }
        accepted
    }

    fn reject(&mut self) {
        self.stepper.reject();
        self.damping.raise();
    }

    fn note(&mut self, reduction: Reduction, length: f64) {
        let point = self.stepper.scaled_length_of_point();
        self.stopped = self.convergence.note(self.settings, reduction, length, point);
    }

    /// Reports the iteration and decides whether it was the last.
    fn report(&mut self, iteration: u64, damping: f64, step: f64, accepted: bool) {
        let point = self.stepper.best();
        let violation = self.stepper.violation();
        let progress = Progress {
            iteration,
            sum_of_squares: point.sum_of_squares,
            violation,
            damping: Some(damping),
            step,
            accepted,
            variables: &point.variables,
        };
        let asked_to_stop = self.observer.observe(&progress).is_break();
        let kept = violation <= 1.0;
        self.stopped = match self.stopped {
            _ if kept && point.sum_of_squares <= self.settings.target() => {
                Some(Stopped::TargetReached)
            }
            Some(_) if !kept => Some(Stopped::LimitsContradict),
            None if self.damping.has_overflowed() => Some(Stopped::NoProgress),
            None if asked_to_stop => Some(Stopped::Observer),
            stopped => stopped,
        };
    }
}

impl<P: BlockProblem> Solver<Evaluator<'_, P>, SolverState> for DampedLeastSquares<'_> {
    fn name(&self) -> &str {
        "damped least squares"
    }

    fn init(
        &mut self,
        problem: &mut Problem<Evaluator<'_, P>>,
        state: SolverState,
    ) -> Result<(SolverState, Option<KV>), Error> {
        self.stepper.start(evaluator(problem)?).map_err(SolveError::from)?;
        if self.stepper.violation() <= 1.0
            && self.stepper.best().sum_of_squares <= self.settings.target()
        {
            self.stopped = Some(Stopped::TargetReached);
        }
        Ok((self.write(state), None))
    }

    fn next_iter(
        &mut self,
        problem: &mut Problem<Evaluator<'_, P>>,
        state: SolverState,
    ) -> Result<(SolverState, Option<KV>), Error> {
        let evaluator = evaluator(problem)?;
        if self.stepper.linearise(evaluator).is_err() {
            self.damping.retract();
        }
        while self.stepper.eliminate_states(self.damping.lambda()).is_err()
            && !self.damping.has_overflowed()
        {
            self.damping.raise();
        }
        let lambda = self.damping.lambda();
        let trial = self
            .stepper
            .solve_shared(self.settings.gradient())
            .map(|()| self.stepper.accelerate(evaluator, self.settings.acceleration()))
            .and_then(|()| self.stepper.keep_limits(evaluator))
            .and_then(|()| self.stepper.try_step(evaluator));
        let length = trial.as_ref().map_or(0.0, |trial| trial.length);
        let accepted = self.judge(trial);
        self.report(state.get_iter() + 1, lambda, length, accepted);
        Ok((self.write(state), None))
    }

    fn terminate(&mut self, _: &SolverState) -> TerminationStatus {
        if self.stopped.is_none() && self.observer.interrupted() {
            self.stopped = Some(Stopped::Interrupted);
        }
        match self.stopped {
            Some(_) => TerminationStatus::Terminated(TerminationReason::SolverConverged),
            None => TerminationStatus::NotTerminated,
        }
    }
}

impl DampedLeastSquares<'_> {
    fn write(&self, state: SolverState) -> SolverState {
        let point = self.stepper.best();
        state.param(point.variables.clone()).cost(point.sum_of_squares)
    }
}

/// The problem as argmin hands it out.
pub(crate) fn evaluator<O>(problem: &mut Problem<O>) -> Result<&mut O, SolveError> {
    problem.problem.as_mut().ok_or_else(|| SolveError::Frame("the problem is missing".to_owned()))
}
