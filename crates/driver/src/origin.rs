//! Where a design comes from: the unit of a run folder that found it, and how the merit fell.
//!
//! A design file does not say how it was found; the run folder does, for as long as it is kept.

use std::path::Path;

use serde_json::Value;

use crate::overnight;
use crate::run::{RunDocument, RunError, Survey};
use crate::sweep::{self, PointResult};

/// Where a design comes from.
#[derive(Debug, Clone, PartialEq)]
pub struct Origin {
    /// What the run is about: seed, settings, version, the file asked about.
    pub run: RunDocument,
    /// The unit that found the design.
    pub unit: u64,
    /// What the run calls a unit.
    pub called: &'static str,
    /// Units finished, all parts together.
    pub finished: u64,
    /// Sessions, all parts together.
    pub sessions: u64,
    /// Seconds of the run, all parts and sessions together.
    pub seconds: f64,
    /// The best merit with every limit kept, after so many starts by their number, wherever it
    /// fell. Empty for a sweep, whose points do not follow one another.
    pub merit: Vec<(u64, f64)>,
}

impl Origin {
    /// Looks a design up in the run folder at `path`; `None` if no unit of it found this design.
    /// Nothing in the folder is touched.
    ///
    /// # Errors
    /// There is no run in it, it is damaged, or of a kind that finds no designs.
    pub fn of(path: &Path, design: &Value) -> Result<Option<Self>, RunError> {
        let survey = Survey::of(path)?;
        match survey.run.kind.as_str() {
            overnight::KIND => Look::new(design).at_starts(survey),
            sweep::KIND => Look::new(design).at_points(survey),
            other => {
                let reason = format!("it holds work of another kind, {other:?}");
                Err(RunError::NotARun { path: path.into(), reason })
            }
        }
    }
}

/// What is taken note of while journals are read.
struct Look<'a> {
    design: &'a Value,
    unit: Option<u64>,
    merits: Vec<(u64, f64)>,
    finished: u64,
    sessions: u64,
    seconds: f64,
}

impl<'a> Look<'a> {
    fn new(design: &'a Value) -> Self {
        Self { design, unit: None, merits: Vec::new(), finished: 0, sessions: 0, seconds: 0.0 }
    }

    fn at_starts(mut self, survey: Survey) -> Result<Option<Origin>, RunError> {
        for part in &survey.parts {
            let facts = overnight::read_starts(part, &mut |unit| {
                let merit = overnight::merit_with_limits_kept(&unit.done);
                self.merits.extend(merit.map(|merit| (unit.number, merit)));
                if unit.done.found.is_some_and(|found| found.design == *self.design) {
                    self.found_by(unit.number);
                }
            })?;
            self.add(facts.finished, facts.sessions, facts.seconds);
        }
        Ok(self.origin(survey.run, "start"))
    }

    fn at_points(mut self, survey: Survey) -> Result<Option<Origin>, RunError> {
        for part in &survey.parts {
            let facts = part.read::<PointResult>(&mut |unit| {
                if unit.done.reached.is_some_and(|reached| reached.design == *self.design) {
                    self.found_by(unit.number);
                }
            })?;
            self.add(facts.finished, facts.sessions, facts.seconds);
        }
        Ok(self.origin(survey.run, "point"))
    }

    /// Of several units that found the same design the first by number counts.
    fn found_by(&mut self, number: u64) {
        self.unit = Some(self.unit.map_or(number, |unit| unit.min(number)));
    }

    fn add(&mut self, finished: u64, sessions: u64, seconds: f64) {
        self.finished += finished;
        self.sessions += sessions;
        self.seconds += seconds;
    }

    fn origin(self, run: RunDocument, called: &'static str) -> Option<Origin> {
        let Self { unit, merits, finished, sessions, seconds, .. } = self;
        let merit = falls(merits);
        unit.map(|unit| Origin { run, unit, called, finished, sessions, seconds, merit })
    }
}

/// Where the best so far falls, starts taken in the order of their numbers and counted from one.
fn falls(mut merits: Vec<(u64, f64)>) -> Vec<(u64, f64)> {
    merits.sort_by_key(|&(number, _)| number);
    let last = merits.last().map(|&(number, _)| number + 1);
    let mut falls: Vec<(u64, f64)> = Vec::new();
    for (number, merit) in merits {
        if falls.last().is_none_or(|&(_, best)| merit < best) {
            falls.push((number + 1, merit));
        }
    }
    if let (Some(last), Some(&(at, best))) = (last, falls.last())
        && last > at
    {
        falls.push((last, best));
    }
    falls
}

#[cfg(test)]
mod tests {
    use super::falls;

    #[test]
    fn the_best_so_far_falls_in_the_order_of_the_starts() {
        // Finished in another order than numbered: start 2 came first.
        let told = falls(vec![(2, 0.5), (0, 3.0), (1, 4.0), (5, 0.2), (7, 0.9)]);
        assert_eq!(told, [(1, 3.0), (3, 0.5), (6, 0.2), (8, 0.2)]);
        assert_eq!(falls(Vec::new()), []);
    }
}
