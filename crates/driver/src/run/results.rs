//! Results: written when a session ends, each file whole, files of an earlier session that are no
//! longer among them removed.

use std::path::{Path, PathBuf};
use std::time::Duration;

use super::error::RunError;
use super::folder::{
    BEST, LOCK, RunFolder, begin, check_results, make, recognise, remove_leftovers,
};
use super::lock::Lock;
use super::survey::Survey;
use crate::write_whole::{Existing, WriteError, write_whole};

/// How often a file is tried, and with what pause.
const TRIES: u32 = 4;
const PAUSE: Duration = Duration::from_millis(50);

/// A file of the results.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ResultFile {
    /// Where, relative to the folder.
    name: PathBuf,
    contents: Vec<u8>,
}

impl ResultFile {
    /// The design of this rank, from one: `best/01.json`.
    #[must_use]
    pub fn best(rank: usize, contents: impl Into<Vec<u8>>) -> Self {
        Self { name: Path::new(BEST).join(format!("{rank:02}.json")), contents: contents.into() }
    }

    /// The points of a sweep as a table: `points.csv`.
    #[must_use]
    pub(crate) fn points_table(contents: impl Into<Vec<u8>>) -> Self {
        Self { name: "points.csv".into(), contents: contents.into() }
    }

    /// The points of a sweep with their designs: `points.json`.
    #[must_use]
    pub fn points(contents: impl Into<Vec<u8>>) -> Self {
        Self { name: "points.json".into(), contents: contents.into() }
    }

    /// The list itself: `ranking.json`.
    #[must_use]
    pub(crate) fn ranking(contents: impl Into<Vec<u8>>) -> Self {
        Self { name: "ranking.json".into(), contents: contents.into() }
    }
}

/// A folder for the results of a run whose parts are elsewhere, or in it.
#[derive(Debug)]
pub struct ResultsFolder {
    place: PathBuf,
    _lock: Lock,
}

impl ResultsFolder {
    /// Opens the folder at `path` for results of this run, and makes it if it is not there; the
    /// folder it lies in must exist. It says of which run its results are, as a run folder does.
    ///
    /// # Errors
    /// It is in use, holds another run or something else, or the system refuses.
    pub fn open(path: &Path, of: &Survey) -> Result<Self, RunError> {
        let known = recognise(path, &of.run)?;
        make(path)?;
        let lock = Lock::take(&path.join(LOCK), path)?;
        remove_leftovers(path);
        if !known {
            begin(path, &of.asked, &of.run)?;
        }
        check_results(path)?;
        Ok(Self { place: path.to_owned(), _lock: lock })
    }

    /// As [`RunFolder::write_results`].
    ///
    /// # Errors
    /// As there.
    pub fn write_results(&self, files: &[ResultFile]) -> Result<(), RunError> {
        write_results(&self.place, files)
    }
}

impl RunFolder {
    /// Writes the results, in this order, and removes designs of an earlier session that are not
    /// among them. Files that are right already are left alone.
    ///
    /// # Errors
    /// One cannot be written or removed, after several tries. Files before it are the new ones.
    pub fn write_results(&self, files: &[ResultFile]) -> Result<(), RunError> {
        write_results(self.place(), files)
    }
}

pub(super) fn write_results(place: &Path, files: &[ResultFile]) -> Result<(), RunError> {
    for ResultFile { name, contents } in files {
        let path = place.join(name);
        let as_long = path.metadata().is_ok_and(|there| there.len() == contents.len() as u64);
        if as_long && std::fs::read(&path).is_ok_and(|there| there == *contents) {
            continue;
        }
        write_patiently(&path, contents)?;
    }
    remove_stale(place, files)
}

fn write_patiently(path: &Path, contents: &[u8]) -> Result<(), WriteError> {
    let mut written = write_whole(path, contents, Existing::Replace);
    for _ in 1..TRIES {
        if written.is_ok() {
            break;
        }
        std::thread::sleep(PAUSE);
        written = write_whole(path, contents, Existing::Replace);
    }
    written
}

fn remove_stale(place: &Path, files: &[ResultFile]) -> Result<(), RunError> {
    for entry in std::fs::read_dir(place.join(BEST)).into_iter().flatten().flatten() {
        let name = Path::new(BEST).join(entry.file_name());
        if is_rank(&name) && !files.iter().any(|file| file.name == name) {
            std::fs::remove_file(entry.path()).map_err(RunError::system(&entry.path()))?;
        }
    }
    Ok(())
}

/// Whether a name is one that [`ResultFile::best`] gives.
fn is_rank(name: &Path) -> bool {
    let digits = name.file_stem().and_then(|stem| stem.to_str()).unwrap_or_default();
    name.extension().is_some_and(|extension| extension == "json")
        && digits.len() >= 2
        && digits.bytes().all(|byte| byte.is_ascii_digit())
}
