//! After a change: move only what can still move.
//!
//! Four stages stand side by side: the design as it was; after the change with nothing moved; with
//! the spacings re-adjusted, which is what a mechanic can do on the bench; and with everything else
//! that is not made yet. Each tells how much of what the change cost it wins back, and [`blame`]
//! which change cost most.
//!
//! - [`fn@retune`]: the stages; [`made`]: what exists already;
//! - [`equivalents`]: other makers' glasses in place of one, ranked;
//! - [`tool_radii`]: the free radii moved to radii the shop has tools for;
//! - [`batch`]: one table of measured lenses, each with its own spacings; [`table`] reads it.

pub mod batch;
pub mod blame;
pub mod equivalents;
pub mod made;
pub mod table;
pub mod tool_radii;

#[cfg(test)]
mod tests;

use merit_function::assessment::{Assessment, assess};
use serde::Serialize;
use surface_model::document::{Address, Complaints};
use surface_model::housing::TakenUp;
use surface_model::place::Place;

use crate::change::{Change, Changed, apply};
use crate::design_file::DesignFile;
use crate::optimise::{Optimisation, OptimisationReport, OptimiseError, optimise};
use crate::solve::{Observer, Settings};
use blame::Blame;

/// Why a design could not be retuned.
#[derive(Debug, thiserror::Error)]
pub enum RetuneError {
    /// A change, a part or a table is not right.
    #[error("{0}")]
    Input(#[from] Complaints),
    /// A stage could not begin.
    #[error(transparent)]
    Optimise(#[from] OptimiseError),
}

/// What a stage may move.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Moving {
    /// Nothing: the design as it was.
    AsDesigned,
    /// Nothing: the design after the change.
    Nothing,
    /// The spacings.
    Spacings,
    /// Everything free that is not made yet.
    Unmade,
}

/// One stage.
#[derive(Debug, Clone)]
pub struct Stage {
    /// What it moved.
    pub moving: Moving,
    /// The design as the stage leaves it.
    pub file: DesignFile,
    /// Its numbers.
    pub assessment: Assessment,
    /// How the solver fared, where it ran.
    pub solver: Option<Solver>,
}

/// How the solver fared in a stage.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Solver {
    /// Why it stopped, as a sentence.
    pub stopped: String,
    /// Whether it ended where it meant to.
    pub was_successful: bool,
    /// Steps tried.
    pub iterations: u64,
    /// Evaluations of all residuals.
    pub evaluations: u64,
    /// Its wall time, s.
    pub solve_seconds: f64,
    /// Addresses of the variables that ended on a bound.
    pub on_bounds: Vec<String>,
    /// All variables.
    pub variables: usize,
}

/// A design retuned.
#[derive(Debug, Clone)]
pub struct Retuning {
    /// The parts that are made, with indices for entries of lists.
    pub made: Vec<Address>,
    /// Spacings that took up what fixed groups left no room for.
    pub taken_up: Vec<TakenUp>,
    /// As designed, with nothing moved, and what was moved then; at least the first two.
    pub stages: Vec<Stage>,
    /// What each change costs by itself, in the order of the command line.
    pub blame: Vec<Blame>,
}

impl Retuning {
    /// The first stage of its kind.
    #[must_use]
    pub fn stage(&self, moving: Moving) -> Option<&Stage> {
        self.stages.iter().find(|stage| stage.moving == moving)
    }

    /// The last stage: the design to go on with.
    #[must_use]
    pub fn last(&self) -> Option<&Stage> {
        self.stages.last()
    }

    /// How much of the merit that the change cost a stage wins back, per cent; above 100 where it
    /// ends better than designed. `None` where the change cost nothing, or rays fail.
    #[must_use]
    pub fn recovered_percent(&self, stage: &Stage) -> Option<f64> {
        let merit = |moving| self.stage(moving)?.assessment.merit.total;
        let (designed, changed) = (merit(Moving::AsDesigned)?, merit(Moving::Nothing)?);
        let loss = changed - designed;
        let won = changed - stage.assessment.merit.total?;
        (loss > 0.0 && stage.solver.is_some()).then(|| won / loss * 100.0)
    }
}

/// Makes changes in a design, holds what is made, and re-optimises in stages.
///
/// # Errors
/// The changes or the parts are not right, or a stage cannot begin.
pub fn retune(
    file: &DesignFile,
    changes: &[Change],
    made: &[String],
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Retuning, RetuneError> {
    let (changed, made) = prepare(file, changes, made)?;
    let mut stages = vec![stage(Moving::AsDesigned, file), stage(Moving::Nothing, &changed.file)];
    let mut last = changed.file.clone();
    if let Some(result) = respace(&last, settings, observer)? {
        stages.push(optimised(Moving::Spacings, result));
        last = stages[stages.len() - 1].file.clone();
    }
    if last.free.iter().any(|free| !is_spacing(free.place)) {
        stages.push(optimised(Moving::Unmade, optimise(&last, settings, observer)?));
    }
    let blame = blame::blame(file, changes);
    Ok(Retuning { made, taken_up: changed.taken_up, stages, blame })
}

/// The changed design in which what is made is held.
///
/// # Errors
/// The changes or the parts are not right.
pub fn prepare(
    file: &DesignFile,
    changes: &[Change],
    made: &[String],
) -> Result<(Changed, Vec<Address>), Complaints> {
    let mut changed = apply(file, changes)?;
    let made = made::parts(&changed.file, made)?;
    if !made.is_empty() {
        changed.file = changed.file.holding(&made)?;
    }
    Ok((changed, made))
}

/// Re-adjusts the free spacings alone; `None` where the file frees none.
///
/// # Errors
/// The optimisation cannot begin.
pub(crate) fn respace(
    file: &DesignFile,
    settings: &Settings,
    observer: &mut dyn Observer,
) -> Result<Option<Optimisation>, OptimiseError> {
    let mut bench = file.clone();
    bench.free.retain(|free| is_spacing(free.place));
    if bench.free.is_empty() {
        return Ok(None);
    }
    optimise(&bench, settings, observer).map(Some)
}

fn is_spacing(place: Place) -> bool {
    matches!(place, Place::Spacing { .. })
}

fn stage(moving: Moving, file: &DesignFile) -> Stage {
    let assessment = assess(&file.design, &file.wishes);
    Stage { moving, file: file.clone(), assessment, solver: None }
}

fn optimised(moving: Moving, result: Optimisation) -> Stage {
    let Optimisation { file, report, stopped } = result;
    let OptimisationReport {
        end,
        iterations,
        evaluations,
        solve_seconds,
        on_bounds,
        variables,
        ..
    } = report;
    let solver = Solver {
        stopped: report.stopped,
        was_successful: stopped.was_successful(),
        iterations,
        evaluations,
        solve_seconds,
        on_bounds,
        variables,
    };
    Stage { moving, file, assessment: end, solver: Some(solver) }
}
