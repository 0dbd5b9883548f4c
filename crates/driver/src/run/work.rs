//! What the machinery asks of the work and tells its watcher.

use std::io;
use std::time::Duration;

use serde::Serialize;
use serde::de::DeserializeOwned;

use super::interrupt::{Interrupt, Interrupted};

/// Work in numbered units.
pub trait Work: Sync {
    /// What a unit yields. It must come back from JSON as it went: no NaN, no infinity. A unit
    /// that fails yields what became of it.
    type Done: Serialize + DeserializeOwned + Send;

    /// Does one unit. What it yields depends on the ask and the number alone.
    ///
    /// # Errors
    /// The interrupt was raised before it was done.
    fn perform(&self, number: u64, interrupt: &Interrupt) -> Result<Self::Done, Interrupted>;

    /// What people call a unit, for messages about it.
    fn called(&self, unit: u64) -> String {
        format!("unit {unit}")
    }

    /// Whether a result that stands in a journal can be that of a unit.
    fn can_be(&self, unit: u64, done: &Self::Done) -> bool {
        let _ = (unit, done);
        true
    }

    /// How good a result is, the smaller the better, where that can be said: a budget may have a
    /// target for it.
    fn merit(&self, done: &Self::Done) -> Option<f64> {
        let _ = done;
        None
    }
}

/// A finished unit.
#[derive(Debug, Clone, PartialEq)]
pub struct Finished<D> {
    /// Its number.
    pub number: u64,
    /// When: seconds of the run, all sessions together.
    pub seconds: f64,
    /// What it yielded.
    pub done: D,
}

/// What earlier sessions have left in the folder.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Earlier {
    /// Units finished before.
    pub finished: u64,
    /// Sessions before this one.
    pub sessions: u64,
    /// Seconds of the run so far.
    pub seconds: f64,
    /// Bytes of a torn last line that were dropped.
    pub dropped_bytes: u64,
}

/// How far the run is.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tally {
    /// Units of this part that are finished.
    pub finished: u64,
    /// Of those, the ones of this session.
    pub in_session: u64,
    /// Units wanted of this part, if that is known.
    pub wanted: Option<u64>,
    /// Seconds of the run, all sessions together.
    pub run_seconds: f64,
    /// Time of this session.
    pub session: Duration,
}

/// Something about saving.
#[derive(Debug)]
pub enum Saving<'a> {
    /// The journal cannot be written; it is tried again, and the work goes on.
    Failed(&'a io::Error),
    /// It can be written again, and nothing is missing.
    Recovered,
}

/// Watches a run.
pub trait Watcher<D> {
    /// The folder has been read.
    fn earlier(&mut self, earlier: &Earlier);
    /// A unit is finished, in an earlier session or now, in no particular order.
    fn found(&mut self, finished: Finished<D>);
    /// Called several times a second.
    fn tick(&mut self, tally: &Tally);
    /// Saving fails, or does so no more.
    fn saving(&mut self, saving: Saving<'_>);
    /// Whether the user wants to stop.
    fn interrupted(&self) -> bool;
}

/// Why a session is over.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Stop {
    /// All units are finished.
    Complete,
    /// A unit was good enough, and all before it are finished.
    Sufficed,
    /// The time of the run is used up.
    RunTime,
    /// The time of the session is used up.
    SessionTime,
    /// The user wants to stop.
    Interrupted,
}

/// How a session ended.
#[derive(Debug)]
pub struct RunEnd {
    /// Why.
    pub stop: Stop,
    /// How far the run is.
    pub tally: Tally,
    /// The journal could not be written to the end: why.
    pub unsaved: Option<io::Error>,
    /// Units from this number on do not count: they ran ahead while an earlier one was good enough,
    /// or lie beyond the units wanted.
    pub counted_below: Option<u64>,
}
