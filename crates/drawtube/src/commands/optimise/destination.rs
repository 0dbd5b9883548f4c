//! Where an optimised design goes.

use std::path::PathBuf;

use driver::design_file::DesignFile;
use driver::write_whole::{Existing, check_writable, write_whole};

use crate::console::Console;
use crate::failure::Failure;
use crate::input::STANDARD_STREAM;

/// Where a design is kept.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) enum Destination {
    /// Nowhere.
    Nowhere,
    /// On standard output.
    StandardOutput,
    /// In a file.
    File { path: PathBuf, existing: Existing },
}

impl Destination {
    pub(crate) fn of(output: Option<PathBuf>, force: bool) -> Self {
        match output {
            None => Self::Nowhere,
            Some(path) if path.as_os_str() == STANDARD_STREAM => Self::StandardOutput,
            Some(path) => {
                let existing = if force { Existing::Replace } else { Existing::Keep };
                Self::File { path, existing }
            }
        }
    }

    /// Finds out, before any computing, whether the design can be kept there.
    pub(crate) fn check(&self) -> Result<(), Failure> {
        match self {
            Self::File { path, existing } => Ok(check_writable(path, *existing)?),
            Self::Nowhere | Self::StandardOutput => Ok(()),
        }
    }

    /// Keeps a design. One that cannot be written to its file goes to standard output as the last
    /// resort.
    pub(crate) fn save(&self, design: &DesignFile, console: &Console) -> Result<(), Failure> {
        match self {
            Self::Nowhere => Ok(()),
            Self::StandardOutput => console.print_exactly(&design.text()),
            Self::File { path, existing } => write_whole(path, design.text().as_bytes(), *existing)
                .or_else(|error| {
                    console.say("drawtube: the design goes to standard output as the last resort");
                    console.print_exactly(&design.text())?;
                    Err(Failure::Write(error))
                }),
        }
    }

    /// What became of the design, as a sentence.
    pub(crate) fn told(&self) -> String {
        match self {
            Self::Nowhere => "The design was not kept: give -o OUT to write it.".to_owned(),
            Self::StandardOutput => "The design was written to standard output.".to_owned(),
            Self::File { path, .. } => format!("The design was written to {}.", path.display()),
        }
    }
}
