//! One local optimisation: from a design file to a better one.
//!
//! The solver does the work; what stands here is what surrounds it: the merit function of the
//! file, bringing in a start whose outer rays fail, and telling what became of it.

use merit_function::assessment::{Assessment, assess};
use merit_function::block::BlockProblem;
use merit_function::fault::EvaluationFault;
use merit_function::problem::{MeritFunction, RAYS};
use merit_function::variables::{Variables, VariablesError};
use merit_function::wishes::Wishes;
use serde::Serialize;
use surface_model::document::Complaints;
use surface_model::glass::GlassError;
use surface_model::temperature::TemperatureError;

use crate::design_file::DesignFile;
use crate::solve::{self, Observer, Outcome, Settings, SolveError, Stopped};
use retry::{Ended, Retry};

mod retry;

/// Smallest part of the beam that is tried when the rays of a start fail.
const NARROWEST: f64 = 0.02;
/// By how much the traced part of the beam is narrowed or widened at a time.
const WIDENING: f64 = 1.25;
/// Steps spent at each width on the way to the whole beam.
const STEPS_A_WIDTH: u64 = 25;
/// How often that is tried where there is no way between the states.
const MOST_WAYS: u64 = 8;

/// What became of an optimisation.
#[derive(Debug, Clone)]
pub struct Optimisation {
    /// The file with its free numbers changed.
    pub file: DesignFile,
    /// Before and after.
    pub report: OptimisationReport,
    /// Why the solver stopped.
    pub stopped: Stopped,
}

/// What `optimise --json` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct OptimisationReport {
    /// Always `drawtube-optimisation/1`.
    pub format: &'static str,
    /// The solver's name.
    pub method: &'static str,
    /// Why it stopped, as a sentence.
    pub stopped: String,
    /// Steps accepted and rejected.
    pub iterations: u64,
    /// Evaluations of all residuals.
    pub evaluations: u64,
    /// Wall time of the solver alone, s.
    pub solve_seconds: f64,
    /// Addresses of the free numbers that ended on a bound.
    pub on_bounds: Vec<String>,
    /// Number of variables.
    pub variables: usize,
    /// The design as it was.
    pub start: Assessment,
    /// The design as it is now.
    pub end: Assessment,
}

/// Why an optimisation could not begin.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum OptimiseError {
    /// No state has a goal.
    #[error("the file has no goals, so there is nothing to optimise towards")]
    NoGoals,
    /// Everything is held.
    #[error("nothing in the file is free to change")]
    NothingFree,
    /// The free numbers contradict limits or housing.
    #[error(transparent)]
    Variables(#[from] VariablesError),
    /// A glass is not known at a wavelength.
    #[error(transparent)]
    Glass(#[from] GlassError),
    /// Not even the innermost rays get through.
    #[error("the start cannot be traced: {0}")]
    Start(EvaluationFault),
    /// Something does not say how it changes with temperature.
    #[error(transparent)]
    Temperature(#[from] TemperatureError),
    /// The solver refuses.
    #[error(transparent)]
    Solve(#[from] SolveError),
    /// The numbers found do not make a design file.
    #[error("the numbers found do not make a design:\n{0}")]
    Result(Complaints),
}

/// Optimises the free numbers of a design file.
///
/// # Errors
/// See [`OptimiseError`]. Whatever happens, the file that was given is not touched.
pub fn optimise(
    file: &DesignFile,
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Optimisation, OptimiseError> {
    let start = assess(&file.design, &file.wishes);
    let mut merit = merit_of(file)?;
    let from = merit.variables().start().to_vec();
    let mut widened = bring_in(&mut merit, from, settings, observer)?;
    find_a_way(&mut merit, &mut widened, settings, observer)?;
    let start_of_all = widened.variables.clone();
    let outcome = match widened.stopped_early.take() {
        Some(outcome) => outcome,
        None => solve::run(&mut merit, &widened.variables, settings, observer)?,
    };
    let ended = Ended::of(file, &merit, outcome)?;
    let mut retry = Retry { file, merit: &mut merit, settings, observer, spent: &mut widened };
    let ended = retry.past_the_ghosts(ended, &start_of_all)?;
    let Ended { outcome, file: optimised, assessment: end } = retry.clear_of_a_focus(ended)?;
    let report = OptimisationReport {
        format: "drawtube-optimisation/1",
        method: settings.method().name(),
        stopped: outcome.stopped.to_string(),
        iterations: outcome.iterations + widened.iterations,
        evaluations: outcome.evaluations + widened.evaluations,
        solve_seconds: outcome.time.as_secs_f64() + widened.seconds,
        on_bounds: on_bounds(file, &merit, &outcome.variables),
        variables: outcome.variables.len(),
        start,
        end,
    };
    Ok(Optimisation { file: optimised, report, stopped: outcome.stopped })
}

/// The merit function of a design file over its free numbers.
///
/// # Errors
/// There is no goal or nothing free, or ranges contradict each other.
pub fn merit_of(file: &DesignFile) -> Result<MeritFunction, OptimiseError> {
    require_goal(&file.wishes)?;
    if file.free.is_empty() {
        return Err(OptimiseError::NothingFree);
    }
    let variables = Variables::new(&file.design, &file.wishes.limits, &file.free)?;
    let merit = MeritFunction::new(&file.design, &file.wishes, variables, RAYS)?;
    Ok(merit.with_temperatures(&file.design, &file.wishes)?)
}

/// There has to be a goal that counts.
pub(crate) fn require_goal(wishes: &Wishes) -> Result<(), OptimiseError> {
    let any_goal = wishes.states.iter().any(|goals| goals.any() && goals.weight > 0.0);
    if any_goal { Ok(()) } else { Err(OptimiseError::NoGoals) }
}

/// Free numbers that stand on a bound, by their addresses in the file.
fn on_bounds(file: &DesignFile, merit: &MeritFunction, variables: &[f64]) -> Vec<String> {
    let document = file.document().value();
    let bounds = merit.bounds().iter().zip(variables).enumerate();
    bounds
        .filter(|(_, (bounds, value))| **value <= bounds.low || **value >= bounds.high)
        .filter_map(|(variable, _)| merit.variables().address(variable))
        .map(|address| address.with_names(document).to_string())
        .collect()
}

/// A start through which the whole beam passes.
struct Widened {
    variables: Vec<f64>,
    /// The outcome, if the user stopped on the way.
    stopped_early: Option<Outcome>,
    iterations: u64,
    evaluations: u64,
    seconds: f64,
}

impl Widened {
    /// Goes on from where the solver ended.
    fn take(&mut self, outcome: Outcome) {
        self.iterations += outcome.iterations;
        self.evaluations += outcome.evaluations;
        self.seconds += outcome.time.as_secs_f64();
        self.variables.clone_from(&outcome.variables);
        let asked = matches!(outcome.stopped, Stopped::Interrupted | Stopped::Observer);
        self.stopped_early = asked.then_some(outcome);
    }
}

/// Where outer rays fail at the start, traces only as much of the beam as gets through, optimises
/// a little, and widens step by step until the whole beam does.
fn bring_in(
    merit: &mut MeritFunction,
    from: Vec<f64>,
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Widened, OptimiseError> {
    let mut widened = Widened {
        variables: from.iter().zip(merit.bounds()).map(|(&x, bounds)| bounds.clamp(x)).collect(),
        stopped_early: None,
        iterations: 0,
        evaluations: 0,
        seconds: 0.0,
    };
    let few = Settings::new(settings.method())
        .with_max_iterations(STEPS_A_WIDTH)
        .unwrap_or_else(|_| settings.clone());
    let mut residuals = vec![0.0; merit.shape().residuals()];
    let mut aperture = 1.0;
    loop {
        merit.set_aperture(aperture);
        match merit.residuals(&widened.variables, &mut residuals) {
            Ok(()) if aperture >= 1.0 => return Ok(widened),
            Ok(()) => {
                let outcome = solve::run(merit, &widened.variables, &few, observer)?;
                widened.take(outcome);
                if widened.stopped_early.is_some() {
                    merit.set_aperture(1.0);
                    return Ok(widened);
                }
                aperture = widest(merit, &widened.variables, aperture, &mut residuals)?;
            }
            Err(fault) if aperture <= NARROWEST => return Err(OptimiseError::Start(fault)),
            Err(_) => aperture = (aperture / WIDENING).max(NARROWEST),
        }
    }
}

/// Where no movement leads over the states of a start, optimises without what is asked of the way
/// between them, a few steps at a time, until one does.
fn find_a_way(
    merit: &mut MeritFunction,
    widened: &mut Widened,
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<(), OptimiseError> {
    let few = Settings::new(settings.method()).with_max_iterations(STEPS_A_WIDTH);
    let few = few.unwrap_or_else(|_| settings.clone());
    for tried in 0..=MOST_WAYS {
        let fault = match merit.limits(&widened.variables, &mut Vec::new()) {
            Err(fault @ EvaluationFault::Way(_)) if widened.stopped_early.is_none() => fault,
            _ => return Ok(()),
        };
        if tried == MOST_WAYS {
            return Err(OptimiseError::Start(fault));
        }
        merit.look_at_the_way(false);
        let outcome = solve::run(merit, &widened.variables, &few, observer);
        merit.look_at_the_way(true);
        widened.take(outcome?);
    }
    Ok(())
}

/// The widest part of the beam, up to [`WIDENING`] times the last, that gets through; a start that
/// widens no further is given up with the fault that stops it.
fn widest(
    merit: &mut MeritFunction,
    variables: &[f64],
    last: f64,
    residuals: &mut [f64],
) -> Result<f64, OptimiseError> {
    let mut factor = WIDENING;
    loop {
        let aperture = (last * factor).min(1.0);
        merit.set_aperture(aperture);
        match merit.residuals(variables, residuals) {
            Ok(()) => return Ok(aperture),
            Err(fault) if factor < 1.001 => return Err(OptimiseError::Start(fault)),
            Err(_) => factor = 1.0 + (factor - 1.0) / 2.0,
        }
    }
}
