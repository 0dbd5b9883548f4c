//! Reading a run folder without disturbing whoever works on it.

use std::collections::BTreeMap;
use std::io::ErrorKind;
use std::path::{Path, PathBuf};

use serde::de::DeserializeOwned;

use super::ask::RunDocument;
use super::error::RunError;
use super::folder::{JOURNAL, LOCK, PARTS, RUN, name_of, place_of, read_asked, read_run};
use super::lock::holder_of;
use super::reading::{JournalFacts, read};
use super::share::Share;
use super::work::Finished;

/// A run folder as it is at this moment.
#[derive(Debug)]
pub struct Survey {
    /// Where it is.
    pub path: PathBuf,
    /// What the run is about.
    pub run: RunDocument,
    /// The copy of what was asked.
    pub asked: Vec<u8>,
    /// The parts that have begun, in order; of a run that is not split, the whole.
    pub parts: Vec<PartSurvey>,
}

/// One part of a run.
#[derive(Debug)]
pub struct PartSurvey {
    /// Which.
    pub share: Share,
    /// Where its files are.
    pub place: PathBuf,
    /// The process that works on it at this moment.
    pub(crate) holder: Option<String>,
    identity: String,
}

impl Survey {
    /// Looks into the folder at `path`.
    ///
    /// # Errors
    /// There is no run in it, or it is damaged.
    pub fn of(path: &Path) -> Result<Self, RunError> {
        let not = |reason: &str| RunError::NotARun { path: path.into(), reason: reason.into() };
        match path.metadata() {
            Err(error) if error.kind() == ErrorKind::NotFound => {
                return Err(not("there is nothing of this name"));
            }
            Err(error) => return Err(RunError::system(path)(error)),
            Ok(metadata) if !metadata.is_dir() => return Err(not("it is a file")),
            Ok(_) => {}
        }
        let run = read_run(path)?.ok_or_else(|| not(&format!("it has no {RUN}")))?;
        let asked = read_asked(path)?;
        let identity = run.identity();
        let parts = shares(path, run.parts)?.into_iter().map(|share| {
            let place = place_of(path, share);
            let holder = holder_of(&place.join(LOCK));
            PartSurvey { share, place, holder, identity: identity.clone() }
        });
        let parts = parts.collect();
        Ok(Self { path: path.to_owned(), run, asked, parts })
    }
}

impl PartSurvey {
    /// Reads the part's journal as far as it is written.
    ///
    /// # Errors
    /// It is damaged or cannot be read.
    pub fn read<D: DeserializeOwned>(
        &self,
        found: &mut dyn FnMut(Finished<D>),
    ) -> Result<JournalFacts, RunError> {
        let journal = self.place.join(JOURNAL);
        Ok(read(&journal, &self.identity, self.share, found)?.facts)
    }
}

/// The parts that have a folder.
fn shares(path: &Path, of: u64) -> Result<Vec<Share>, RunError> {
    if of <= 1 {
        return Ok(vec![Share::WHOLE]);
    }
    let names: BTreeMap<String, Share> =
        Share::all(of).map(|share| (name_of(share), share)).collect();
    let folder = path.join(PARTS);
    let refused = RunError::system(&folder);
    let entries = match std::fs::read_dir(&folder) {
        Ok(entries) => entries,
        Err(error) if error.kind() == ErrorKind::NotFound => return Ok(Vec::new()),
        Err(error) => return Err(refused(error)),
    };
    let mut found = Vec::new();
    for entry in entries {
        let name = entry.map_err(&refused)?.file_name();
        found.extend(names.get(&*name.to_string_lossy()));
    }
    found.sort_unstable();
    Ok(found)
}
