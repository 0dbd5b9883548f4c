//! What a solver ends with.

use std::error::Error;
use std::fmt;
use std::time::Duration;

/// Why a solver stopped.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Stopped {
    /// Several steps in a row neither changed the merit noticeably nor promised to.
    MeritSettled,
    /// Several steps in a row hardly moved the variables.
    StepSmall,
    /// No direction the bounds and limits leave open leads downhill.
    GradientSmall,
    /// The merit wanted is reached.
    TargetReached,
    /// The iterations allowed are used up.
    IterationLimit,
    /// The best that could be done locally still crosses a limit.
    LimitsContradict,
    /// No step was acceptable, however short.
    NoProgress,
    /// The observer asked for a stop.
    Observer,
    /// The user asked for a stop.
    Interrupted,
}

impl Stopped {
    /// Whether the solver ended where it meant to: at a minimum, or at the target.
    #[must_use]
    pub fn was_successful(self) -> bool {
        matches!(
            self,
            Self::MeritSettled | Self::StepSmall | Self::GradientSmall | Self::TargetReached
        )
    }
}

impl fmt::Display for Stopped {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::MeritSettled => "the merit has settled: further steps no longer change it",
            Self::StepSmall => "the steps have become too small to matter",
            Self::GradientSmall => "no direction left open by bounds and limits improves the merit",
            Self::TargetReached => "the target merit is reached",
            Self::IterationLimit => "the allowed number of iterations is used up",
            Self::LimitsContradict => "no point nearby satisfies every limit",
            Self::NoProgress => "no step improves the merit, however short",
            Self::Observer => "the observer asked for a stop",
            Self::Interrupted => "stopped by the user",
        })
    }
}

/// Where a solver ended and what it took.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    /// The best point found; within the bounds exactly.
    pub variables: Vec<f64>,
    /// Sum of squares of the residuals there; always finite.
    pub sum_of_squares: f64,
    /// Why it stopped.
    pub stopped: Stopped,
    /// Largest violation of a limit, in units of its tolerance; at most 1 when all are kept.
    pub violation: f64,
    /// Iterations: steps tried, accepted or not.
    pub iterations: u64,
    /// Evaluations of the residuals alone.
    pub evaluations: u64,
    /// Evaluations of the residuals with their Jacobian.
    pub linearisations: u64,
    /// Time spent, evaluations included.
    pub time: Duration,
}

impl Outcome {
    /// Whether every limit is kept to its tolerance.
    #[must_use]
    pub fn limits_kept(&self) -> bool {
        self.violation <= 1.0
    }
}

/// Why a solver could not start.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum SolveError {
    /// The starting point has the wrong number of variables.
    #[error("the start has {given} variables where the problem has {expected}")]
    WrongLength {
        /// Variables of the problem.
        expected: usize,
        /// Variables given.
        given: usize,
    },
    /// The starting point has a variable that is not a finite number.
    #[error("variable {variable} of the start is {value}, not a finite number")]
    StartNotFinite {
        /// Index of the variable.
        variable: usize,
        /// Its value.
        value: f64,
    },
    /// The bounds of a variable are not a range.
    #[error("variable {variable} is to lie between {low} and {high}, which is no range")]
    NoRange {
        /// Index of the variable.
        variable: usize,
        /// Its lower bound.
        low: f64,
        /// Its upper bound.
        high: f64,
    },
    /// There is nothing to vary.
    #[error("the problem has no variables")]
    NoVariables,
    /// The starting point cannot be evaluated.
    #[error("the start cannot be evaluated")]
    Fault(#[source] Box<dyn Error + Send + Sync>),
    /// The residuals, the Jacobian or the limits at the start are not finite numbers.
    #[error("the start evaluates to numbers that are not finite")]
    NotFinite,
    /// The frame the solvers run in failed.
    #[error("the solver's frame failed: {0}")]
    Frame(String),
}
