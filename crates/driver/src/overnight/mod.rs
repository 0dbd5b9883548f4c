//! The overnight search: the starts of a [`SearchProblem`] as the units of a run, and the ranked
//! list they add up to.
//!
//! The list is a function of the finished starts: [`Finds`] takes them in any order, from one run
//! or from the parts of one ([`Gathering`]), and [`RankedList`] is what comes of them, bit for bit.

mod finds;
mod gathering;
mod ranked;

use serde_json::json;

use crate::run::{Ask, Interrupt, Interrupted, Share, Work};
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

    fn called(&self, number: u64) -> String {
        format!("start {number}")
    }

    fn merit(&self, done: &StartResult) -> Option<f64> {
        merit_with_limits_kept(done)
    }
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
