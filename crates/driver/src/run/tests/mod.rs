//! Runs of a work that takes no time, so that thousands of interruptions can be tried.

mod broken_off;
mod damage;
mod folders;
mod sameness;

use std::path::Path;
use std::sync::atomic::{AtomicU64, Ordering};

use serde::{Deserialize, Serialize};
use serde_json::json;

use super::*;

/// What a unit of [`Digits`] yields: numbers that depend on its own alone.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub(super) struct Yield {
    value: f64,
    words: String,
}

/// Work whose units are cheap and differ; the lower the value the better.
#[derive(Default)]
pub(super) struct Digits {
    performed: AtomicU64,
}

fn yield_of(number: u64) -> Yield {
    let hash = blake3::hash(&number.to_le_bytes());
    let bits = u64::from_le_bytes(hash.as_bytes()[..8].try_into().unwrap());
    Yield { value: bits as f64 / u64::MAX as f64, words: hash.to_hex()[..9].to_owned() }
}

impl Work for Digits {
    type Done = Yield;

    fn perform(&self, number: u64, interrupt: &Interrupt) -> Result<Yield, Interrupted> {
        self.performed.fetch_add(1, Ordering::Relaxed);
        if interrupt.is_raised() { Err(Interrupted) } else { Ok(yield_of(number)) }
    }

    fn merit(&self, done: &Yield) -> Option<f64> {
        Some(done.value)
    }
}

/// Keeps everything; interrupts after so many new units.
#[derive(Default)]
pub(super) struct Keeper {
    units: Vec<Finished<Yield>>,
    earlier: Option<Earlier>,
    stop_after: Option<usize>,
    savings: usize,
}

impl Watcher<Yield> for Keeper {
    fn earlier(&mut self, earlier: &Earlier) {
        self.earlier = Some(*earlier);
    }
    fn found(&mut self, finished: Finished<Yield>) {
        self.units.push(finished);
    }
    fn tick(&mut self, _: &Tally) {}
    fn saving(&mut self, _: Saving<'_>) {
        self.savings += 1;
    }
    fn interrupted(&self) -> bool {
        let before = self.earlier.map_or(0, |earlier| earlier.finished as usize);
        self.stop_after.is_some_and(|after| self.units.len() - before >= after)
    }
}

impl Keeper {
    /// What counts, in order, as bytes.
    fn result(&self, end: &RunEnd) -> String {
        let mut counted: Vec<(u64, String)> = self
            .units
            .iter()
            .filter(|unit| end.counted_below.is_none_or(|below| unit.number < below))
            .map(|unit| (unit.number, serde_json::to_string(&unit.done).unwrap()))
            .collect();
        counted.sort();
        format!("{counted:?}")
    }
}

fn ask(share: Share) -> Ask {
    let settings = json!({ "depth": 3 });
    let text = b"{ \"what\": \"digits\" }\n".to_vec();
    Ask { kind: "digits", name: "digits.json".into(), text, seed: 7, settings, share }
}

fn units(count: u64) -> Budget {
    Budget { units: Some(count), ..Budget::default() }
}

/// One session on a folder.
fn session(
    path: &Path,
    share: Share,
    work: &Digits,
    budget: &Budget,
    threads: usize,
    stop_after: Option<usize>,
) -> Result<(RunEnd, Keeper), RunError> {
    let folder = RunFolder::open(path, &ask(share))?;
    let mut keeper = Keeper { stop_after, ..Keeper::default() };
    let end = perform(&folder, work, budget, threads, &mut keeper)?;
    Ok((end, keeper))
}

/// A folder on a file system in memory, where there is one: nothing here is about power failures.
fn in_memory() -> tempfile::TempDir {
    tempfile::tempdir_in("/dev/shm").or_else(|_| tempfile::tempdir()).unwrap()
}

/// A finished run of so many units.
fn finished_run(path: &Path, count: u64) -> String {
    let (end, keeper) =
        session(path, Share::WHOLE, &Digits::default(), &units(count), 2, None).unwrap();
    assert_eq!(end.stop, Stop::Complete);
    keeper.result(&end)
}
