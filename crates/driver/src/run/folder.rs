//! A run folder, opened for work: made if it is new, recognised if it is not, locked.

use std::fs::{DirBuilder, File};
use std::io::{self, ErrorKind, Read};
use std::path::{Path, PathBuf};

use surface_model::document::LARGEST_BYTES;

use super::ask::{Ask, RUN_FORMAT, RunDocument, hash};
use super::error::RunError;
use super::lock::Lock;
use super::share::Share;
use crate::write_whole::{
    Existing, TEMPORARY_PREFIX, WriteError, check_writable, sync_folder_of, write_whole,
};

/// Names of a run folder.
pub(super) const ASKED: &str = "asked.json";
pub(super) const RUN: &str = "run.json";
pub(super) const LOCK: &str = "lock";
pub(super) const JOURNAL: &str = "journal.jsonl";
pub(super) const PARTS: &str = "parts";
pub(super) const BEST: &str = "best";

/// A run folder that this process may work in until it is dropped.
#[derive(Debug)]
pub struct RunFolder {
    /// Where this part's files are: the folder itself, or `parts/…` in it.
    place: PathBuf,
    run: RunDocument,
    share: Share,
    _lock: Lock,
}

impl RunFolder {
    /// Opens the folder at `path` for this ask, and makes it if it is not there; the folder it
    /// lies in must exist. Finds out whether results can be written.
    ///
    /// # Errors
    /// It is in use, holds something else, is damaged, or the system refuses. Only in the last
    /// case may something have been made.
    pub fn open(path: &Path, ask: &Ask) -> Result<Self, RunError> {
        let asked = RunDocument::of(ask);
        let known = recognise(path, &asked)?;
        make(path)?;
        let place = place_of(path, ask.share);
        if !ask.share.is_whole() {
            make(&path.join(PARTS))?;
            make(&place)?;
        }
        let lock = Lock::take(&place.join(LOCK), &place)?;
        remove_leftovers(&place);
        if !known {
            begin(path, &ask.text, &asked)?;
        }
        check_results(&place)?;
        Ok(Self { place, run: asked, share: ask.share, _lock: lock })
    }

    /// The part that is worked on.
    #[must_use]
    pub(crate) fn share(&self) -> Share {
        self.share
    }

    /// Where this part's journal and results are.
    #[must_use]
    pub fn place(&self) -> &Path {
        &self.place
    }

    pub(super) fn journal(&self) -> PathBuf {
        self.place.join(JOURNAL)
    }

    pub(super) fn identity(&self) -> String {
        self.run.identity()
    }
}

/// Where the files of a part are.
pub(super) fn place_of(path: &Path, share: Share) -> PathBuf {
    if share.is_whole() { path.to_owned() } else { path.join(PARTS).join(name_of(share)) }
}

/// The name of a part's folder.
pub(super) fn name_of(share: Share) -> String {
    let width = share.of().to_string().len().max(2);
    format!("{:0width$}-of-{}", share.index(), share.of())
}

/// Whether the folder holds the run that is asked for already; if not, it must be empty.
pub(super) fn recognise(path: &Path, asked: &RunDocument) -> Result<bool, RunError> {
    match path.metadata() {
        Err(error) if error.kind() == ErrorKind::NotFound => return Ok(false),
        Err(error) => return Err(RunError::system(path)(error)),
        Ok(metadata) if !metadata.is_dir() => {
            let error = std::io::Error::from(ErrorKind::NotADirectory);
            return Err(RunError::system(path)(error));
        }
        Ok(_) => {}
    }
    let Some(there) = read_run(path)? else {
        refuse_strangers(path)?;
        return Ok(false);
    };
    match there.difference(asked) {
        Some(difference) => Err(RunError::AnotherRun { path: path.into(), difference }),
        None => Ok(true),
    }
}

/// A folder without `run.json` may hold what a beginning that was cut short left, nothing else.
fn refuse_strangers(path: &Path) -> Result<(), RunError> {
    match first_stranger(path, &[LOCK, ASKED, PARTS])? {
        None => Ok(()),
        Some(name) => {
            let reason = format!("it has no {RUN} and holds other things, such as {name:?}");
            Err(RunError::NotARun { path: path.into(), reason })
        }
    }
}

/// Something in a folder that is none of these.
fn first_stranger(path: &Path, known: &[&str]) -> Result<Option<String>, RunError> {
    let refused = RunError::system(path);
    for entry in std::fs::read_dir(path).map_err(&refused)? {
        let name = entry.map_err(&refused)?.file_name().to_string_lossy().into_owned();
        if !known.contains(&name.as_str()) && !name.starts_with(TEMPORARY_PREFIX) {
            return Ok(Some(name));
        }
    }
    Ok(None)
}

/// Reads `run.json` and holds the copy of the ask against it; `None` if there is none.
pub(super) fn read_run(path: &Path) -> Result<Option<RunDocument>, RunError> {
    let file = path.join(RUN);
    let text = match bounded(&file) {
        Ok(text) => text,
        Err(error) if error.kind() == ErrorKind::NotFound => return Ok(None),
        Err(error) => return Err(RunError::system(&file)(error)),
    };
    let damaged = |error: serde_json::Error| RunError::damaged(&file, error.to_string());
    let value: serde_json::Value = serde_json::from_slice(&text).map_err(damaged)?;
    if let Some(found) = value["format"].as_str().filter(|&found| found != RUN_FORMAT) {
        return Err(match found.strip_prefix("drawtube-run/") {
            Some(_) => RunError::Newer { path: file, found: found.into(), known: RUN_FORMAT },
            None => RunError::damaged(&file, format!("its format is {found:?}")),
        });
    }
    let run: RunDocument = serde_json::from_value(value).map_err(damaged)?;
    Share::new(1, run.parts).map_err(|error| RunError::damaged(&file, error.to_string()))?;
    let asked = read_asked(path)?;
    if hash(&asked) != run.asked.blake3 {
        let reason = format!("it is not the file that {RUN} speaks of");
        return Err(RunError::damaged(&path.join(ASKED), reason));
    }
    Ok(Some(run))
}

/// The copy of what was asked.
pub(super) fn read_asked(path: &Path) -> Result<Vec<u8>, RunError> {
    let file = path.join(ASKED);
    bounded(&file).map_err(|error| match error.kind() {
        ErrorKind::NotFound => RunError::damaged(&file, "it is missing"),
        _ => RunError::system(&file)(error),
    })
}

/// A whole file, no larger than what a run says of the largest document it could be asked about.
fn bounded(path: &Path) -> io::Result<Vec<u8>> {
    const MOST: usize = 8 * LARGEST_BYTES;
    let mut bytes = Vec::new();
    File::open(path)?.take(MOST as u64 + 1).read_to_end(&mut bytes)?;
    if bytes.len() > MOST { Err(ErrorKind::FileTooLarge.into()) } else { Ok(bytes) }
}

pub(super) fn make(path: &Path) -> Result<(), RunError> {
    match DirBuilder::new().create(path).and_then(|()| sync_folder_of(path)) {
        Err(error) if error.kind() != ErrorKind::AlreadyExists => {
            Err(RunError::system(path)(error))
        }
        _ => Ok(()),
    }
}

/// Writes what was asked, `run.json` last. Of several parts that begin at once one comes first;
/// the others find that it has written what they would have.
pub(super) fn begin(path: &Path, text: &[u8], asked: &RunDocument) -> Result<(), RunError> {
    let file = path.join(ASKED);
    match write_whole(&file, text, Existing::Keep) {
        Err(WriteError::Exists(_)) if read_asked(path)? != text => {
            let reason = format!("it has no {RUN} and an {ASKED} of another run");
            return Err(RunError::NotARun { path: path.into(), reason });
        }
        Ok(()) | Err(WriteError::Exists(_)) => {}
        Err(error) => return Err(error.into()),
    }
    let mut run = serde_json::to_vec_pretty(asked)
        .map_err(|error| RunError::damaged(&path.join(RUN), error.to_string()))?;
    run.push(b'\n');
    match write_whole(&path.join(RUN), &run, Existing::Keep) {
        Err(WriteError::Exists(_)) => recognise(path, asked).map(|_| ()),
        written => Ok(written?),
    }
}

/// Temporary files of a process that was killed while it wrote. Under the lock no other writes here.
pub(super) fn remove_leftovers(place: &Path) {
    for folder in [place.to_owned(), place.join(BEST)] {
        for entry in std::fs::read_dir(folder).into_iter().flatten().flatten() {
            if entry.file_name().to_string_lossy().starts_with(TEMPORARY_PREFIX) {
                let _ = std::fs::remove_file(entry.path());
            }
        }
    }
}

/// Finds out before any computing whether results can be written.
pub(super) fn check_results(place: &Path) -> Result<(), RunError> {
    let best = place.join(BEST);
    make(&best)?;
    check_writable(&best.join("01.json"), Existing::Replace)?;
    Ok(())
}
