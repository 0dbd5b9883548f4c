//! Where a result goes: a design, a table.

use std::path::PathBuf;

use driver::write_whole::{Existing, check_writable, write_whole};

use crate::console::Console;
use crate::failure::Failure;
use crate::input::STANDARD_STREAM;

/// Where a result is kept.
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

    /// Finds out, before any computing, whether the result can be kept there.
    pub(crate) fn check(&self) -> Result<(), Failure> {
        match self {
            Self::File { path, existing } => Ok(check_writable(path, *existing)?),
            Self::Nowhere | Self::StandardOutput => Ok(()),
        }
    }

    /// Keeps a result, called `what`. One that cannot be written to its file goes to standard
    /// output as the last resort.
    pub(crate) fn save(
        &self,
        what: &str,
        contents: &[u8],
        console: &Console,
    ) -> Result<(), Failure> {
        match self {
            Self::Nowhere => Ok(()),
            Self::StandardOutput => console.print_bytes(contents),
            Self::File { path, existing } => {
                write_whole(path, contents, *existing).or_else(|error| {
                    console.say(&format!(
                        "drawtube: the {what} goes to standard output as the last resort"
                    ));
                    console.print_bytes(contents)?;
                    Err(Failure::Write(error))
                })
            }
        }
    }

    /// What became of the result called `what`, as a sentence.
    pub(crate) fn told(&self, what: &str) -> String {
        match self {
            Self::Nowhere => format!("The {what} was not kept: give -o OUT to write it."),
            Self::StandardOutput => format!("The {what} was written to standard output."),
            Self::File { path, .. } => format!("The {what} was written to {}.", path.display()),
        }
    }
}
