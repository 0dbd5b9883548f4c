//! Reading a journal: every line held against its checksum, a torn last line set apart.
//!
//! A line can be torn only where the process or the machine stopped in the middle of writing it,
//! that is at the end. Its unit is done again, so nothing is lost by dropping it. A bad line with
//! a line after it is damage that something else has done, and is never passed over.

use std::fs::File;
use std::io::{BufRead, BufReader, ErrorKind, Read as _};
use std::path::Path;

use serde::de::DeserializeOwned;

use super::entry::{Begin, Entry, LineError, Unit, decode};
use super::error::RunError;
use super::finished::FinishedUnits;
use super::share::Share;
use super::work::Finished;

/// Longest line: a design four times as large as any that can be asked about.
const LONGEST_LINE: u64 = 1 << 26;

/// What a journal tells besides its units.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct JournalFacts {
    /// Units finished.
    pub finished: u64,
    /// Sessions begun.
    pub sessions: u64,
    /// Seconds of the run, all sessions together.
    pub seconds: f64,
    /// Units wanted of the whole run by the last session.
    pub units: Option<u64>,
    /// The merit that was good enough for the last session.
    pub target_merit: Option<f64>,
    /// Whether the last session ended with nothing left to do.
    pub complete: bool,
    /// When the first session began, in seconds since 1970.
    pub(crate) began_unix_seconds: Option<u64>,
    /// Bytes of a torn last line.
    pub(crate) torn_bytes: u64,
}

/// A journal that has been read.
pub(super) struct Read {
    pub(super) facts: JournalFacts,
    pub(super) finished: FinishedUnits,
    /// Bytes up to the end of the last valid line.
    pub(super) valid_bytes: u64,
}

/// Reads the journal of a part; one that does not exist is empty. Each unit is told once.
pub(super) fn read<D: DeserializeOwned>(
    path: &Path,
    run: &str,
    share: Share,
    found: &mut dyn FnMut(Finished<D>),
) -> Result<Read, RunError> {
    let refused = RunError::system(path);
    let mut reader = Reader::new(path, run, share);
    let file = match File::open(path) {
        Ok(file) => file,
        Err(error) if error.kind() == ErrorKind::NotFound => return Ok(reader.end()),
        Err(error) => return Err(refused(error)),
    };
    let mut file = BufReader::with_capacity(1 << 16, file);
    let mut line = Vec::new();
    loop {
        line.clear();
        let read = file.by_ref().take(LONGEST_LINE).read_until(b'\n', &mut line);
        match read.map_err(&refused)? as u64 {
            0 => return Ok(reader.end()),
            LONGEST_LINE if line.last() != Some(&b'\n') => return Err(reader.endless()),
            _ => reader.line(&line, found)?,
        }
    }
}

struct Reader<'a> {
    path: &'a Path,
    run: &'a str,
    share: Share,
    read: Read,
    lines: u64,
    /// A line that is no entry: the last one, as far as is known yet.
    bad: Option<(u64, LineError)>,
}

impl<'a> Reader<'a> {
    fn new(path: &'a Path, run: &'a str, share: Share) -> Self {
        let read = Read {
            facts: JournalFacts::default(),
            finished: FinishedUnits::new(share),
            valid_bytes: 0,
        };
        Self { path, run, share, read, lines: 0, bad: None }
    }

    fn end(self) -> Read {
        self.read
    }

    fn line<D: DeserializeOwned>(
        &mut self,
        line: &[u8],
        found: &mut dyn FnMut(Finished<D>),
    ) -> Result<(), RunError> {
        self.lines += 1;
        if let Some((number, error)) = self.bad.take() {
            return Err(self.damaged(number, &error.to_string()));
        }
        let entry = match line.strip_suffix(b"\n") {
            None => Err(LineError::Form),
            Some(line) => decode(line),
        };
        match entry {
            Ok(entry) => {
                self.entry(entry, found)?;
                self.read.valid_bytes += line.len() as u64;
            }
            // What is whole but unknown was not torn.
            Err(error @ LineError::Meaning(_)) => {
                return Err(self.damaged(self.lines, &error.to_string()));
            }
            Err(error) => {
                self.bad = Some((self.lines, error));
                self.read.facts.torn_bytes = line.len() as u64;
            }
        }
        Ok(())
    }

    fn entry<D>(
        &mut self,
        entry: Entry<D>,
        found: &mut dyn FnMut(Finished<D>),
    ) -> Result<(), RunError> {
        match entry {
            Entry::Begin(begin) => self.begin(&begin)?,
            Entry::Unit(unit) => self.unit(unit, found)?,
            Entry::End(end) => {
                self.read.facts.complete = end.complete;
                self.passed(end.seconds);
            }
        }
        Ok(())
    }

    fn begin(&mut self, begin: &Begin) -> Result<(), RunError> {
        if begin.run != self.run || begin.part != self.share {
            return Err(self.damaged(self.lines, "it belongs to another run or part"));
        }
        let facts = &mut self.read.facts;
        facts.sessions += 1;
        facts.complete = false;
        facts.units = begin.units;
        facts.target_merit = begin.target_merit;
        facts.began_unix_seconds.get_or_insert(begin.unix_seconds);
        Ok(())
    }

    fn unit<D>(
        &mut self,
        unit: Unit<D>,
        found: &mut dyn FnMut(Finished<D>),
    ) -> Result<(), RunError> {
        let Unit { number, seconds, done } = unit;
        if self.read.facts.sessions == 0 || !self.share.holds(number) {
            return Err(self.damaged(self.lines, "its unit does not belong here"));
        }
        self.passed(seconds);
        if self.read.finished.insert(number) {
            self.read.facts.finished += 1;
            found(Finished { number, seconds, done });
        }
        Ok(())
    }

    fn passed(&mut self, seconds: f64) {
        let facts = &mut self.read.facts;
        facts.seconds = facts.seconds.max(seconds);
    }

    fn endless(&self) -> RunError {
        self.damaged(self.lines + 1, "it is longer than a journal's lines are")
    }

    fn damaged(&self, line: u64, reason: &str) -> RunError {
        RunError::damaged(self.path, format!("line {line} is damaged: {reason}"))
    }
}
