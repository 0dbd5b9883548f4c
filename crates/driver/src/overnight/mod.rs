//! The overnight search: the starts of a [`SearchProblem`] as the units of a run, and the ranked
//! list they add up to.
//!
//! The list is a function of the finished starts: [`Finds`] takes them in any order, from one run
//! or from the parts of one ([`Gathering`]), and [`RankedList`] is what comes of them, bit for bit.

mod finds;
mod gathering;
mod ranked;

use serde_json::json;

use crate::run::{
    Ask, Finished, Interrupt, Interrupted, JournalFacts, PartSurvey, RunError, Share, Work,
};
use crate::search::{SearchProblem, SearchSettings, StartResult};

pub use finds::{Fall, Finds, StartEnd};
pub use gathering::{Gathering, MissingPart, fetch};
pub use ranked::{Ranked, RankedList};

/// What `run.json` calls this kind of run.
pub const KIND: &str = "overnight";

/// The starts of a search as the units of a run.
#[derive(Debug)]
pub struct Overnight {
    /// What is searched.
    pub problem: SearchProblem,
    /// Seed of all starts.
    pub seed: u64,
}

impl Work for Overnight {
    type Done = StartResult;

    fn perform(&self, number: u64, interrupt: &Interrupt) -> Result<StartResult, Interrupted> {
        self.problem.start(self.seed, number, interrupt.flag()).ok_or(Interrupted)
    }

    fn can_be(&self, number: u64, done: &StartResult) -> bool {
        is_of(number, done)
    }

    fn called(&self, number: u64) -> String {
        called(number)
    }

    fn merit(&self, done: &StartResult) -> Option<f64> {
        merit_with_limits_kept(done)
    }
}

/// Whether a result that is recorded for a start says the same of itself.
fn is_of(start: u64, result: &StartResult) -> bool {
    result.number == start
}

/// Reads the starts that a part's journal has, as far as it is written.
///
/// # Errors
/// It is damaged or cannot be read, or has the result of another start than it says.
pub(crate) fn read_starts(
    part: &PartSurvey,
    found: &mut dyn FnMut(Finished<StartResult>),
) -> Result<JournalFacts, RunError> {
    let mut strange = None;
    let facts = part.read::<StartResult>(&mut |unit| {
        if is_of(unit.number, &unit.done) {
            found(unit);
        } else {
            strange = strange.or(Some(unit.number));
        }
    })?;
    match strange {
        Some(start) => Err(RunError::another_result(&part.place, &called(start))),
        None => Ok(facts),
    }
}

/// What people call a start.
fn called(number: u64) -> String {
    format!("start {number}")
}

/// The merit of a start that counts towards a target: one that crosses a limit does not.
pub(crate) fn merit_with_limits_kept(result: &StartResult) -> Option<f64> {
    result.found.as_ref().filter(|found| found.limits_kept).map(|found| found.merit)
}

/// The identity of an overnight run about a file: its name in messages, and its bytes.
#[must_use]
pub fn ask(name: &str, text: &str, settings: SearchSettings, seed: u64, share: Share) -> Ask {
    Ask {
        kind: KIND,
        name: name.to_owned(),
        text: text.as_bytes().to_vec(),
        seed,
        settings: json!(settings),
        share,
    }
}
