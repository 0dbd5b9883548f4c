//! Putting together what the parts of a run have found.

use std::collections::BTreeMap;

use surface_model::document::quoted;

use super::finds::Finds;
use super::ranked::RankedList;
use super::{KIND, merit_with_limits_kept, read_starts};
use crate::run::{Budget, Finished, JournalFacts, PartSurvey, RunError, Share, Survey};
use crate::search::StartResult;

/// The parts of one run, from one folder or several, put together. The order of folders does not
/// matter, and a part that is there twice counts once.
#[derive(Debug)]
pub struct Gathering {
    finds: Finds,
    facts: BTreeMap<Share, JournalFacts>,
    finished: BTreeMap<Share, Vec<u64>>,
    /// Parts that a process works on at this moment, and which.
    running: Vec<(Share, String)>,
    of: u64,
    target_merit: Option<f64>,
    /// The first start that is good enough.
    reached: Option<u64>,
}

/// A part of which starts are missing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct MissingPart {
    /// Which.
    pub share: Share,
    /// How many; `None` if the run has no fixed number of starts.
    pub starts: Option<u64>,
    /// Whether nothing at all is there of it.
    pub whole: bool,
}

impl Gathering {
    /// Reads the parts in these folders; the best `keep` designs are wanted.
    ///
    /// # Errors
    /// They are not of the same overnight run, or one is damaged, or two disagree about a start.
    pub fn of(surveys: &[Survey], keep: usize) -> Result<Self, RunError> {
        let of = surveys.first().map_or(1, |survey| survey.run.parts);
        let mut gathering = Self {
            finds: Finds::new(keep),
            facts: BTreeMap::new(),
            finished: BTreeMap::new(),
            running: Vec::new(),
            of,
            target_merit: None,
            reached: None,
        };
        let mut parts: BTreeMap<Share, Vec<&PartSurvey>> = BTreeMap::new();
        for survey in surveys {
            refuse_others(&surveys[0], survey)?;
            for part in &survey.parts {
                parts.entry(part.share).or_default().push(part);
            }
        }
        for (share, places) in parts {
            gathering.read(share, &places)?;
        }
        gathering.fetch_missing(surveys)?;
        Ok(gathering)
    }

    /// Reads a part from every place where it is.
    fn read(&mut self, share: Share, places: &[&PartSurvey]) -> Result<(), RunError> {
        let mut known: BTreeMap<u64, StartResult> = BTreeMap::new();
        let mut facts = JournalFacts::default();
        for place in places {
            let mut disagree = None;
            let read = read_starts(place, &mut |unit| match known.get(&unit.number) {
                None => {
                    // Only what is there in several places needs comparing.
                    if places.len() > 1 {
                        known.insert(unit.number, unit.done.clone());
                    }
                    self.finished.entry(share).or_default().push(unit.number);
                    self.note(unit);
                }
                Some(there) if *there == unit.done => {}
                Some(_) => disagree = disagree.or(Some(unit.number)),
            })?;
            if let Some(start) = disagree {
                let reason = format!("it has another result of start {start} than another folder");
                return Err(RunError::Damaged { path: place.place.clone(), reason });
            }
            self.running.extend(place.holder.clone().map(|holder| (share, holder)));
            facts = joined(&facts, &read);
        }
        self.target_merit = self.target_merit.or(facts.target_merit);
        if facts.sessions > 0 {
            self.facts.insert(share, facts);
        }
        Ok(())
    }

    fn note(&mut self, unit: Finished<StartResult>) {
        self.finds.insert(unit);
    }

    /// Designs that rank and were let go are read once more; and with a target, the first start
    /// that reaches it is looked for, now that the target is known.
    fn fetch_missing(&mut self, surveys: &[Survey]) -> Result<(), RunError> {
        if let Some(target) = self.target_merit {
            let budget = Budget { target_merit: Some(target), ..Budget::default() };
            let mut reached: Option<u64> = None;
            each(surveys, &mut |unit| {
                if budget.is_reached_by(merit_with_limits_kept(&unit.done)) {
                    reached = Some(reached.map_or(unit.number, |first| first.min(unit.number)));
                }
            })?;
            self.reached = reached;
        }
        let below = self.counted_below();
        fetch(&mut self.finds, below, surveys)
    }

    /// Starts from this number on do not count.
    fn counted_below(&self) -> Option<u64> {
        let after = self.reached.map(|first| first + 1);
        [self.units(), after].into_iter().flatten().min()
    }

    /// Starts wanted of the whole run.
    #[must_use]
    pub fn units(&self) -> Option<u64> {
        self.facts.values().filter_map(|facts| facts.units).max()
    }

    /// The list that one machine would have found.
    #[must_use]
    pub fn list(&self) -> RankedList {
        let below = self.counted_below();
        let counted = self.finished.values().flatten();
        let starts = counted.filter(|&&number| below.is_none_or(|below| number < below)).count();
        self.finds.list(below, starts as u64)
    }

    /// What has been found, without regard to what counts.
    #[must_use]
    pub fn finds(&self) -> &Finds {
        &self.finds
    }

    /// What is known of each part that has begun.
    #[must_use]
    pub fn facts(&self) -> &BTreeMap<Share, JournalFacts> {
        &self.facts
    }

    /// Parts at work at this moment, with the process.
    #[must_use]
    pub fn running(&self) -> &[(Share, String)] {
        &self.running
    }

    /// Into how many parts the run is split.
    #[must_use]
    pub fn of_parts(&self) -> u64 {
        self.of
    }

    /// The parts of which starts are missing, to be submitted again.
    #[must_use]
    pub fn missing(&self) -> Vec<MissingPart> {
        Share::all(self.of).filter_map(|share| self.missing_of(share)).collect()
    }

    fn missing_of(&self, share: Share) -> Option<MissingPart> {
        let Some(facts) = self.facts.get(&share) else {
            let starts = self.counted_below().map(|below| share.count(below));
            return (starts != Some(0)).then_some(MissingPart { share, starts, whole: true });
        };
        let Some(below) = self.counted_below() else {
            let missing = MissingPart { share, starts: None, whole: false };
            return (!facts.complete).then_some(missing);
        };
        let finished = self
            .finished
            .get(&share)
            .map_or(0, |numbers| numbers.iter().filter(|&&number| number < below).count() as u64);
        let starts = share.count(below).saturating_sub(finished);
        (starts > 0).then_some(MissingPart { share, starts: Some(starts), whole: false })
    }
}

/// Reads once more, from the journals, the designs of starts below `below` that rank and are no
/// longer held.
///
/// # Errors
/// A journal is damaged or cannot be read.
pub fn fetch(finds: &mut Finds, below: Option<u64>, surveys: &[Survey]) -> Result<(), RunError> {
    let missing = finds.missing(below);
    if missing.is_empty() {
        return Ok(());
    }
    each(surveys, &mut |unit| {
        if let (true, Some(found)) = (missing.contains(&unit.number), unit.done.found) {
            finds.hold(unit.number, found);
        }
    })
}

fn each(surveys: &[Survey], found: &mut dyn FnMut(Finished<StartResult>)) -> Result<(), RunError> {
    for part in surveys.iter().flat_map(|survey| &survey.parts) {
        read_starts(part, found)?;
    }
    Ok(())
}

fn refuse_others(first: &Survey, survey: &Survey) -> Result<(), RunError> {
    let path = survey.path.clone();
    if survey.run.kind != KIND {
        let reason = format!("it holds a run of {}, not of {KIND}", quoted(&survey.run.kind));
        return Err(RunError::NotARun { path, reason });
    }
    match survey.run.difference(&first.run) {
        Some(difference) => Err(RunError::AnotherRun { path, difference }),
        None => Ok(()),
    }
}

/// What two journals of the same part tell together.
fn joined(one: &JournalFacts, other: &JournalFacts) -> JournalFacts {
    JournalFacts {
        finished: one.finished.max(other.finished),
        sessions: one.sessions + other.sessions,
        seconds: one.seconds + other.seconds,
        units: one.units.max(other.units),
        target_merit: other.target_merit.or(one.target_merit),
        complete: one.complete || other.complete,
        began_unix_seconds: [one.began_unix_seconds, other.began_unix_seconds]
            .into_iter()
            .flatten()
            .min(),
        torn_bytes: one.torn_bytes + other.torn_bytes,
    }
}
