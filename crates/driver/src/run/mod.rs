//! Long work in a run folder: nothing is lost, and the result does not depend on interruptions,
//! threads or machines.
//!
//! # The idea
//!
//! The work is a row of numbered units, and what a unit yields depends on the ask, the seed, the
//! version and its number alone. A run is then nothing but the set of units that are finished, and
//! everything told about it is a function of that set. A run that was killed ten times, one on
//! eight threads and one split over sixteen machines end in the same bytes.
//!
//! # The folder
//!
//! ```text
//! asked.json        a verbatim copy of what was asked
//! run.json          format, kind, version, seed, settings, parts, hash of the ask
//! lock              held by the system for the process at work; names it for others
//! journal.jsonl     append-only, one finished unit a line, a checksum in every line
//! best/01.json …    results, written last and whole; the list of them in ranking.json
//! parts/03-of-16/   of a run split into parts: each part's own lock, journal and results
//! ```
//!
//! The journal alone is the truth. There is no saved state beside it that could disagree with it,
//! be torn, or need a second generation: state is what the journal's units add up to, and reading
//! them takes a moment even where finding them took a night. A unit that was not finished when the
//! process ended is simply done again.
//!
//! # How to stand on it
//!
//! Implement [`Work`] for what one unit computes, describe the ask ([`Ask`]), open the
//! [`RunFolder`], and call [`perform`] with a [`Watcher`] that takes the results as they come, those
//! of earlier sessions first. Then write what they add up to with [`RunFolder::write_results`].
//! [`Survey`] reads a folder, or its parts, without disturbing whoever works on it. For a grid,
//! unit `n` is the n-th point in an order that follows from the plan, so that the plan's bytes as
//! the ask identify every point; the plan's resolved inputs belong into the settings of the [`Ask`].
//!
//! Start reading at `perform.rs`, whose loop is the run; `journal.rs` keeps, `reading.rs` reads.

mod ask;
mod budget;
mod dispenser;
mod entry;
mod error;
mod finished;
mod folder;
mod interrupt;
mod journal;
mod lock;
mod perform;
mod reading;
mod results;
mod share;
mod survey;
mod work;

#[cfg(test)]
mod tests;

pub use ask::{Ask, RunDocument};
pub use budget::Budget;
pub use error::RunError;
pub use folder::RunFolder;
pub use interrupt::{Interrupt, Interrupted};
pub use perform::perform;
pub use reading::JournalFacts;
pub use results::{ResultFile, ResultsFolder};
pub use share::{Share, ShareError};
pub use survey::{PartSurvey, Survey};
pub use work::{Earlier, Finished, RunEnd, Saving, Stop, Tally, Watcher, Work};
