//! Why a run folder cannot be used.

use std::io;
use std::path::{Path, PathBuf};

use crate::write_whole::WriteError;

/// Why a run folder cannot be used. Nothing in it has been changed, except where the system
/// refused halfway.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum RunError {
    /// Another process works on it.
    #[error("{} is in use by {holder}", .path.display())]
    InUse {
        /// The folder.
        path: PathBuf,
        /// Which process on which host.
        holder: String,
    },
    /// There is no run in it.
    #[error("{} is not a run folder: {reason}", .path.display())]
    NotARun {
        /// The folder.
        path: PathBuf,
        /// What is there instead.
        reason: String,
    },
    /// It is of another ask, seed, version.
    #[error("{} holds another run: {difference}", .path.display())]
    AnotherRun {
        /// The folder.
        path: PathBuf,
        /// What differs.
        difference: String,
    },
    /// It was written by a newer program.
    #[error(
        "{} has the format {found:?}; this program knows {known:?}: it was written for a newer \
         drawtube",
        .path.display()
    )]
    Newer {
        /// The file.
        path: PathBuf,
        /// Its format.
        found: String,
        /// The newest format that is known.
        known: &'static str,
    },
    /// A file in it is not what it was.
    #[error("{}: {reason}", .path.display())]
    Damaged {
        /// The file.
        path: PathBuf,
        /// What is wrong, with the line.
        reason: String,
    },
    /// The system refuses.
    #[error("{}: {source}", .path.display())]
    System {
        /// The file or folder.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
    /// A file cannot be written.
    #[error(transparent)]
    Write(#[from] WriteError),
    /// A unit ended in a panic. Everything that was finished is in the journal.
    #[error("{unit} of {} broke off by a fault of the program: {told}", .path.display())]
    BrokenOff {
        /// The folder.
        path: PathBuf,
        /// Which unit.
        unit: String,
        /// What the panic said.
        told: String,
    },
    /// The units cannot be worked on by several threads.
    #[error("threads cannot be started: {0}")]
    Threads(String),
}

impl RunError {
    pub(super) fn system(path: &Path) -> impl Fn(io::Error) -> Self {
        let path = path.to_owned();
        move |source| Self::System { path: path.clone(), source }
    }

    pub(super) fn damaged(path: &Path, reason: impl Into<String>) -> Self {
        Self::Damaged { path: path.to_owned(), reason: reason.into() }
    }

    /// A journal whose checksums hold, and that has a result of something else.
    pub(crate) fn another_result(path: &Path, unit: &str) -> Self {
        Self::damaged(path, format!("what it has of {unit} is the result of something else"))
    }
}
