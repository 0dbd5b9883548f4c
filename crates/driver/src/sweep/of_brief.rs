//! A point of a sweep over a brief: the brief with the point's values, answered by the best design
//! that starts of the search find for it, or that the lenses of a neighbour become.

use serde_json::Value;
use surface_model::document::Document;

use super::plan::Plan;
use super::point::{Neighbour, Outcome, Reached};
use crate::brief::BriefFile;
use crate::design_file::DesignFile;
use crate::run::{Interrupt, Interrupted};
use crate::search::{Attempt, Found, SearchError, SearchProblem, SearchSettings};
use crate::start::Refusals;

/// The best design so far: one that keeps its limits before one that does not, then by merit.
struct Best {
    meets: bool,
    limits_kept: bool,
    merit: f64,
    from_point: Option<u64>,
    design: Value,
}

impl Best {
    fn is_better_than(&self, other: &Self) -> bool {
        let crossed = |best: &Self| !best.limits_kept;
        crossed(self).cmp(&crossed(other)).then(self.merit.total_cmp(&other.merit)).is_lt()
    }
}

/// What the best design of a point comes to. Its starts are those of the search that the plan's
/// seed begins, with numbers that no other point has.
pub(super) fn answered(
    plan: &Plan,
    number: usize,
    brief: &BriefFile,
    neighbour: Option<&Neighbour>,
    interrupt: &Interrupt,
) -> Result<Outcome, Interrupted> {
    let problem = match SearchProblem::of_brief(brief, SearchSettings::default()) {
        Ok(problem) => problem,
        Err(SearchError::Start(error)) => return Ok(Outcome::NoLayout(error.to_string())),
        Err(error) => return Ok(Outcome::Fault(error.to_string())),
    };
    let mut best: Option<Best> = None;
    let (mut iterations, mut layouts, mut refusals) = (0, 0, Refusals::default());
    let mut take = |attempt: Attempt, from_point| {
        iterations += attempt.iterations;
        layouts += attempt.layouts;
        if refusals.reasons.is_empty() {
            refusals = attempt.refusals;
        }
        let Some(Found { meets, limits_kept, merit, design, .. }) = attempt.found else { return };
        let new = Best { meets, limits_kept, merit, from_point, design };
        if best.as_ref().is_none_or(|best| new.is_better_than(best)) {
            best = Some(new);
        }
    };
    if let Some(neighbour) = neighbour
        && let Some(design) = read(brief, &neighbour.design)
    {
        let note = format!("Begun with the lenses of point {} of a sweep.", neighbour.number);
        let attempt = problem.improve(&design, &note, interrupt.flag()).ok_or(Interrupted)?;
        take(attempt, Some(neighbour.number));
    }
    let starts = u64::from(plan.starts);
    let first = number as u64 * starts;
    for start in first..first + starts {
        take(problem.attempt(plan.seed, start, interrupt.flag()).ok_or(Interrupted)?, None);
    }
    // Where there is no layout the lenses of a neighbour always become something, but only what
    // meets everything is an answer.
    let best = best.filter(|best| best.meets || layouts > 0);
    let reached = best.and_then(|Best { from_point, design, .. }| {
        Reached::of(&read(brief, &design)?, from_point, iterations)
    });
    Ok(match (reached, refusals.reasons.first()) {
        (Some(reached), _) => Outcome::Reached(Box::new(reached)),
        (None, Some((commonest, _))) if layouts == 0 => Outcome::NoLayout(commonest.to_string()),
        (None, _) => Outcome::Fault("no layout could be optimised".to_owned()),
    })
}

fn read(brief: &BriefFile, design: &Value) -> Option<DesignFile> {
    DesignFile::read(Document::from_value(brief.label(), design.clone())).ok()
}
