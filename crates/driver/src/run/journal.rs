//! The journal: appended to, never rewritten. What cannot be written is kept and tried again.

use std::fs::{File, OpenOptions};
use std::io::{self, Write};
use std::path::Path;
use std::time::{Duration, Instant};

use serde::Serialize;

use super::entry::{Entry, encode};
use super::error::RunError;
use crate::careless;
use crate::write_whole::sync_folder_of;

/// How long entries may lie in the system's memory, where a loss of power takes them but the end
/// of the process does not.
const SYNC_EVERY: Duration = Duration::from_secs(5);
/// How long to wait before writing is tried again.
const RETRY_AFTER: Duration = Duration::from_secs(1);
/// How often it is tried at the end of a session, and with what pause.
const LAST_TRIES: u32 = 4;
const LAST_PAUSE: Duration = Duration::from_millis(50);

/// A journal that is open for appending; the caller holds the lock.
#[derive(Debug)]
pub(super) struct Journal {
    file: File,
    /// Bytes that are safe on the disk.
    safe: u64,
    /// Bytes after those, written or not.
    unsafe_bytes: Vec<u8>,
    synced: Instant,
    failed: Option<Instant>,
}

/// What became of writing.
#[derive(Debug)]
pub(super) enum Kept {
    /// Nothing to tell.
    Well,
    /// It fails, for the first time or still.
    Failed(io::Error),
    /// It works again.
    Again,
}

impl Journal {
    /// Opens or makes the journal and cuts off what stands after its valid lines.
    pub(super) fn open(path: &Path, valid_bytes: u64) -> Result<Self, RunError> {
        let refused = RunError::system(path);
        let file =
            OpenOptions::new().read(true).append(true).create(true).open(path).map_err(&refused)?;
        let mut safe = file.metadata().map_err(&refused)?.len();
        if safe != valid_bytes && !careless::is_wanted() {
            file.set_len(valid_bytes).map_err(&refused)?;
            safe = valid_bytes;
        }
        file.sync_all().and_then(|()| sync_folder_of(path)).map_err(refused)?;
        let synced = Instant::now();
        Ok(Self { file, safe, unsafe_bytes: Vec::new(), synced, failed: None })
    }

    /// Appends an entry.
    pub(super) fn append<D: Serialize>(&mut self, entry: &Entry<D>) -> Kept {
        let line = match encode(entry) {
            Ok(line) => line,
            Err(error) => return Kept::Failed(error.into()),
        };
        self.unsafe_bytes.extend_from_slice(&line);
        if self.failed.is_some() {
            return Kept::Well;
        }
        let written = if careless::is_wanted() {
            careless::append(&self.file, &line)
        } else {
            self.file.write_all(&line)
        };
        match written {
            Ok(()) => Kept::Well,
            Err(error) => self.fail(error),
        }
    }

    /// Called often: brings to the disk what is due, and tries again what failed.
    pub(super) fn tend(&mut self) -> Kept {
        match self.failed {
            Some(when) if when.elapsed() >= RETRY_AFTER => self.write_again(),
            None if self.synced.elapsed() >= SYNC_EVERY => self.sync(),
            _ => Kept::Well,
        }
    }

    /// Brings everything to the disk.
    pub(super) fn finish(&mut self) -> io::Result<()> {
        let mut kept = if self.failed.is_some() { self.write_again() } else { self.sync() };
        for _ in 1..LAST_TRIES {
            if !matches!(kept, Kept::Failed(_)) {
                break;
            }
            std::thread::sleep(LAST_PAUSE);
            kept = self.write_again();
        }
        match kept {
            Kept::Failed(error) => Err(error),
            Kept::Well | Kept::Again => Ok(()),
        }
    }

    fn sync(&mut self) -> Kept {
        self.synced = Instant::now();
        if self.unsafe_bytes.is_empty() {
            return Kept::Well;
        }
        match self.file.sync_data() {
            Ok(()) => {
                self.settle();
                Kept::Well
            }
            // After a failed sync the system may have dropped what it held: write it again.
            Err(error) => self.fail(error),
        }
    }

    /// Writes everything after the last safe byte once more: an attempt that failed may have left
    /// half a line.
    fn write_again(&mut self) -> Kept {
        let written = self
            .file
            .set_len(self.safe)
            .and_then(|()| self.file.write_all(&self.unsafe_bytes))
            .and_then(|()| self.file.sync_data());
        match written {
            Ok(()) => {
                self.settle();
                self.failed = None;
                Kept::Again
            }
            Err(error) => self.fail(error),
        }
    }

    fn settle(&mut self) {
        self.safe += self.unsafe_bytes.len() as u64;
        self.unsafe_bytes.clear();
        self.synced = Instant::now();
    }

    fn fail(&mut self, error: io::Error) -> Kept {
        self.failed = Some(Instant::now());
        Kept::Failed(error)
    }
}
