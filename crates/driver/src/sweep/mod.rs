//! A sweep: a grid or a sample over any addresses of a design, each point optimised.
//!
//! What a point comes to depends on the plan, the design and its number alone: it starts from the
//! better of its fixed neighbours (`lattice.rs`), never from whichever happens to be done. Where a
//! neighbour is not there (in another part, before an interruption) it is computed again. So a
//! sweep ends in the same bytes on any number of threads, interrupted or not, whole or in parts.
//!
//! Start reading at [`Sweep::point`].

mod document;
mod gathering;
mod lattice;
mod plan;
mod point;
mod results;

#[cfg(test)]
mod tests;

use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use rand::RngExt;
use serde_json::{Value, json};
use surface_model::design::Design;
use surface_model::document::Source;
use surface_model::place::Place;

use crate::change::{Change, apply};
use crate::design_file::DesignFile;
use crate::optimise::optimise;
use crate::run::{Ask, Interrupt, Interrupted, Share, Work};
use crate::sampling::stream;
use crate::solve::{Interruptible, Settings, Stopped, Unwatched};

pub use document::plan_schema;
pub use gathering::SweepGathering;
pub use plan::{MOST_POINTS, Plan, PlanFile};
pub use point::{PointResult, Reached};
pub use results::{NumberedPoint, Quantity, SweepResults, front};

/// What a run folder calls this sort of work.
pub const KIND: &str = "sweep";

/// By how much a start is shaken: each free number by up to this share of itself.
const SHAKE: f64 = 0.1;

/// A sweep at work.
#[derive(Debug)]
pub struct Sweep {
    plan: Plan,
    design: DesignFile,
    settings: Settings,
    /// What is known of every point; whoever computes one holds its lock.
    known: Vec<Mutex<Option<Arc<PointResult>>>>,
}

/// What to ask a run folder for.
#[must_use]
pub fn ask(plan: &PlanFile, design: &DesignFile, share: Share) -> Ask {
    Ask {
        kind: KIND,
        name: plan.document().label().to_owned(),
        text: plan.document().text().as_bytes().to_vec(),
        seed: 0,
        settings: json!({ "design": design.document().value() }),
        share,
    }
}

impl Sweep {
    /// A sweep of a plan over its design.
    #[must_use]
    pub fn new(plan: Plan, design: DesignFile) -> Self {
        let known = plan.points.iter().map(|_| Mutex::new(None)).collect();
        Self { plan, design, settings: Settings::default(), known }
    }

    /// The plan.
    #[must_use]
    pub fn plan(&self) -> &Plan {
        &self.plan
    }

    /// Takes note of a point that is known already, so that it need not be computed again.
    pub fn note(&self, number: u64, point: &PointResult) {
        if let Some(known) = usize::try_from(number).ok().and_then(|number| self.known.get(number))
        {
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
        let mut best: Option<(u64, Arc<PointResult>)> = None;
        for near in self.plan.neighbours.of(number) {
            let point = self.point(near, interrupt)?;
            let merit = |point: &PointResult| point.reached.as_ref().map(|reached| reached.merit);
            let better = merit(&point).is_some_and(|merit_here| {
                best.as_ref().and_then(|(_, best)| merit(best)).is_none_or(|best| merit_here < best)
            });
            if better {
                best = Some((near as u64, point));
            }
        }
        let point = Arc::new(self.compute(number, best, interrupt)?);
        *known = Some(Arc::clone(&point));
        Ok(point)
    }

    fn compute(
        &self,
        number: usize,
        neighbour: Option<(u64, Arc<PointResult>)>,
        interrupt: &Interrupt,
    ) -> Result<PointResult, Interrupted> {
        let values = self.plan.points[number].clone();
        let failed = |fault: String| PointResult {
            values: values.clone(),
            reached: None,
            fault: Some(fault),
        };
        let own = match self.at(&values) {
            Ok(file) => file,
            Err(fault) => return Ok(failed(fault)),
        };
        let starts = self.starts(number, &own, neighbour);
        let (mut best, mut fault, mut iterations): (Option<Reached>, Option<String>, u64) =
            (None, None, 0);
        for (from_point, start) in starts {
            if interrupt.is_raised() {
                return Err(Interrupted);
            }
            match self.improve(&start, from_point, interrupt)? {
                Ok(reached) => {
                    iterations += reached.iterations;
                    if best.as_ref().is_none_or(|best| reached.merit < best.merit) {
                        best = Some(reached);
                    }
                }
                Err(reason) => fault = fault.or(Some(reason)),
            }
        }
        let Some(mut reached) = best else {
            return Ok(failed(fault.unwrap_or_else(|| "no start could be optimised".to_owned())));
        };
        reached.iterations = iterations;
        Ok(PointResult { values, reached: Some(reached), fault: None })
    }

    /// The design with the values of a point.
    fn at(&self, values: &[Value]) -> Result<DesignFile, String> {
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
        apply(&self.design, &changes).map(|changed| changed.file).map_err(|complaints| {
            let found = complaints.iter().map(|complaint| complaint.found.clone());
            found.collect::<Vec<_>>().join("; ")
        })
    }

    /// The starts of a point, each with the point it was made of.
    fn starts(
        &self,
        number: usize,
        own: &DesignFile,
        neighbour: Option<(u64, Arc<PointResult>)>,
    ) -> Vec<(Option<u64>, DesignFile)> {
        let mut starts: Vec<(Option<u64>, DesignFile)> = Vec::new();
        if let Some((near, point)) = neighbour {
            let warm = point.reached.as_ref().and_then(|reached| warmed(own, &reached.design));
            starts.extend(warm.map(|file| (Some(near), file)));
        }
        let wanted = self.plan.starts as usize;
        if starts.is_empty() || wanted > 1 {
            starts.push((None, own.clone()));
        }
        let mut random = stream(self.plan.seed, number as u64);
        for _ in starts.len()..wanted {
            let (from, file) = &starts[0];
            let mut design = file.design.clone();
            for free in &file.free {
                let factor = 1.0 + SHAKE * random.random_range(-1.0..1.0);
                free.place.set(&mut design, free.place.value(&file.design) * factor);
            }
            if let Some(shaken) = fitted(file, design) {
                starts.push((*from, shaken));
            }
        }
        starts
    }

    /// Optimises one start; a reason where it cannot be.
    fn improve(
        &self,
        start: &DesignFile,
        from_point: Option<u64>,
        interrupt: &Interrupt,
    ) -> Result<Result<Reached, String>, Interrupted> {
        if start.free.is_empty() {
            let reached = Reached::of(start, from_point, 0);
            return Ok(reached.ok_or_else(|| "rays fail, and nothing is free to move".to_owned()));
        }
        let mut observer = Interruptible { stop: interrupt.flag(), observer: Unwatched };
        match optimise(start, &self.settings, &mut observer) {
            Ok(result) if result.stopped == Stopped::Interrupted => Err(Interrupted),
            Ok(result) => {
                let (end, iterations) = (&result.report.end, result.report.iterations);
                let reached = Reached::from_assessment(end, &result.file, from_point, iterations);
                Ok(reached.ok_or_else(|| "rays fail in the optimised design".to_owned()))
            }
            Err(error) => Ok(Err(error.to_string())),
        }
    }
}

impl Work for Sweep {
    type Done = PointResult;

    fn perform(&self, number: u64, interrupt: &Interrupt) -> Result<PointResult, Interrupted> {
        let number = usize::try_from(number).map_err(|_| Interrupted)?;
        Ok(self.point(number, interrupt)?.as_ref().clone())
    }
}

/// A lock, whatever became of the thread that held it last.
fn lock<T>(mutex: &Mutex<T>) -> MutexGuard<'_, T> {
    mutex.lock().unwrap_or_else(PoisonError::into_inner)
}

/// A point's own file with the free numbers of a neighbour's design; `None` where the two are not
/// built alike.
fn warmed(own: &DesignFile, neighbour: &Value) -> Option<DesignFile> {
    let document = surface_model::document::Document::from_value(own.label(), neighbour.clone());
    let near = DesignFile::read(document).ok()?.design;
    let mut design = own.design.clone();
    if Place::all(&near) != Place::all(&design) {
        return None;
    }
    for free in &own.free {
        free.place.set(&mut design, free.place.value(&near));
    }
    fitted(own, design)
}

/// The file with these numbers, its spacings fitted to the fixed groups.
fn fitted(file: &DesignFile, mut design: Design) -> Option<DesignFile> {
    let is_free =
        |state, after| file.free.iter().any(|free| free.place == Place::Spacing { state, after });
    design.fit_to_housing(|state, mut spacings| spacings.rfind(|&after| is_free(state, after)));
    file.with_numbers_of(&design).ok()
}
