//! A file that a command writes beside what it prints: found to be writable before any computing.

use std::path::PathBuf;

use driver::write_whole::{Existing, check_writable, write_whole};

use crate::failure::Failure;

/// Where something is written.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct OutputFile {
    path: PathBuf,
    existing: Existing,
}

impl OutputFile {
    /// Finds out whether the file can be written.
    pub(crate) fn checked(path: PathBuf, force: bool) -> Result<Self, Failure> {
        let existing = if force { Existing::Replace } else { Existing::Keep };
        check_writable(&path, existing)?;
        Ok(Self { path, existing })
    }

    /// Writes it whole.
    pub(crate) fn write(&self, text: &str) -> Result<(), Failure> {
        Ok(write_whole(&self.path, text.as_bytes(), self.existing)?)
    }
}
