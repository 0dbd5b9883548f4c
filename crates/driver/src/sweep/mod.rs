//! A sweep: a grid or a sample over any addresses of a design or a brief, each point optimised.
//!
//! What a point comes to depends on the plan, the file it is about and its number alone: it starts
//! from the better of its fixed neighbours (`order.rs`), never from whichever happens to be done.
//! Where a neighbour is not there (in another part, before an interruption) it is computed again.
//! So a sweep ends in the same bytes on any number of threads, interrupted or not, whole or in
//! parts.
//!
//! A design is changed and optimised at every point (`of_design.rs`); a brief is changed, and a
//! design searched for that answers it (`of_brief.rs`).
//!
//! Start reading at [`Sweep::point`].

mod axis;
mod document;
mod gathering;
mod of_brief;
mod of_design;
mod order;
mod plan;
mod point;
mod results;
mod subject;

#[cfg(test)]
mod tests;

use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use serde_json::{Value, json};
use surface_model::document::Source;

use crate::change::Change;
use crate::run::{Ask, Interrupt, Interrupted, Share, Work};
use point::{Neighbour, Outcome};

pub use document::plan_schema;
pub use gathering::SweepGathering;
pub use plan::{Plan, PlanFile};
pub use point::{PointResult, Reached};
pub use results::{Figure, SweepResults};
pub use subject::Subject;

/// What a run folder calls this sort of work.
pub const KIND: &str = "sweep";

/// A sweep at work.
#[derive(Debug)]
pub struct Sweep {
    plan: Plan,
    subject: Subject,
    /// The point of every unit of the run.
    units: Vec<usize>,
    /// What is known of every point; whoever computes one holds its lock.
    known: Vec<Mutex<Option<Arc<PointResult>>>>,
}

/// What to ask a run folder for.
#[must_use]
pub fn ask(plan: &PlanFile, subject: &Subject, share: Share) -> Ask {
    Ask {
        kind: KIND,
        name: plan.document().label().to_owned(),
        text: plan.document().text().as_bytes().to_vec(),
        seed: 0,
        settings: json!({ subject.key(): subject.document().value() }),
        share,
    }
}

impl Sweep {
    /// A sweep of a plan over what it is about, as a run in so many parts.
    #[must_use]
    pub fn new(plan: Plan, subject: Subject, parts: u64) -> Self {
        let known = plan.points.iter().map(|_| Mutex::new(None)).collect();
        Self { units: plan.units(parts), plan, subject, known }
    }

    /// The plan.
    #[must_use]
    pub fn plan(&self) -> &Plan {
        &self.plan
    }

    /// Takes note of a point that is known already, so that it need not be computed again.
    pub fn note(&self, point: &PointResult) {
        let number = usize::try_from(point.number).ok();
        if let Some(known) = number.and_then(|number| self.known.get(number)) {
            let mut known = lock(known);
            if known.is_none() {
                *known = Some(Arc::new(point.clone()));
            }
        }
    }

    /// What a point comes to, its neighbours computed first where they are not known.
    ///
    /// # Errors
    /// The interrupt was raised before it was done.
    pub fn point(
        &self,
        number: usize,
        interrupt: &Interrupt,
    ) -> Result<Arc<PointResult>, Interrupted> {
        // Neighbours have smaller numbers, so locks are always taken downwards and none waits for
        // another in a circle.
        let mut known = lock(&self.known[number]);
        if let Some(point) = known.as_ref() {
            return Ok(Arc::clone(point));
        }
        let mut best: Option<Neighbour> = None;
        for &near in &self.plan.order.neighbours[number].0 {
            let near = Neighbour::of(self.point(near, interrupt)?.as_ref());
            best = match (near, best) {
                (Some(near), Some(best)) if near.merit >= best.merit => Some(best),
                (near, best) => near.or(best),
            };
        }
        let outcome = self.outcome(number, best.as_ref(), interrupt)?;
        let values = self.plan.points[number].clone();
        let point = Arc::new(PointResult::new(number as u64, values, outcome));
        *known = Some(Arc::clone(&point));
        Ok(point)
    }

    fn outcome(
        &self,
        number: usize,
        neighbour: Option<&Neighbour>,
        interrupt: &Interrupt,
    ) -> Result<Outcome, Interrupted> {
        match self.at(&self.plan.points[number]) {
            Err(fault) => Ok(Outcome::Fault(fault)),
            Ok(Subject::Design(file)) => {
                of_design::optimised(&self.plan, number, &file, neighbour, interrupt)
            }
            Ok(Subject::Brief(file)) => {
                of_brief::answered(&self.plan, number, &file, neighbour, interrupt)
            }
        }
    }

    /// The design or brief with the values of a point.
    fn at(&self, values: &[Value]) -> Result<Subject, String> {
        let changes: Vec<Change> = self
            .plan
            .axes
            .iter()
            .zip(values)
            .map(|(at, value)| {
                let source = Source { label: at.to_string(), position: None };
                Change::new(at.clone(), value.clone(), source)
            })
            .collect();
        self.subject.with(&changes).map_err(|complaints| {
            let found = complaints.iter().map(|complaint| complaint.found.clone());
            found.collect::<Vec<_>>().join("; ")
        })
    }
}

impl Work for Sweep {
    type Done = PointResult;

    fn perform(&self, unit: u64, interrupt: &Interrupt) -> Result<PointResult, Interrupted> {
        let unit = usize::try_from(unit).ok();
        let number = unit.and_then(|unit| self.units.get(unit)).ok_or(Interrupted)?;
        Ok(self.point(*number, interrupt)?.as_ref().clone())
    }

    fn can_be(&self, unit: u64, done: &PointResult) -> bool {
        let unit = usize::try_from(unit).ok();
        let number = unit.and_then(|unit| self.units.get(unit));
        number.is_some_and(|&number| self.plan.has(number, done))
    }

    fn called(&self, unit: u64) -> String {
        let unit = usize::try_from(unit).unwrap_or(usize::MAX);
        let Some(&number) = self.units.get(unit) else { return format!("unit {unit}") };
        let axes = self.plan.axes.iter().zip(&self.plan.points[number]);
        let values: Vec<String> = axes.map(|(at, value)| format!("{at}={value}")).collect();
        format!("point {number} ({})", values.join(", "))
    }
}

/// A lock, whatever became of the thread that held it last.
fn lock<T>(mutex: &Mutex<T>) -> MutexGuard<'_, T> {
    mutex.lock().unwrap_or_else(PoisonError::into_inner)
}
