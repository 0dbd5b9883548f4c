//! A file that a command writes beside what it prints: found to be writable before any computing.

use std::path::{Path, PathBuf};

use driver::write_whole::{Existing, check_writable, write_whole};

use crate::failure::Failure;

/// Where something is written.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct OutputFile {
    path: PathBuf,
    existing: Existing,
}

/// Endings of pictures and papers that are not written here.
const OTHER_FORMS: [&str; 11] =
    ["png", "jpg", "jpeg", "gif", "webp", "bmp", "tif", "tiff", "eps", "ps", "pdf"];

impl OutputFile {
    /// Finds out whether the file can be written.
    pub(crate) fn checked(path: PathBuf, force: bool) -> Result<Self, Failure> {
        let existing = if force { Existing::Replace } else { Existing::Keep };
        check_writable(&path, existing)?;
        Ok(Self { path, existing })
    }

    /// The same for `--picture`, which is SVG whatever the file is called.
    pub(crate) fn picture(path: PathBuf, force: bool) -> Result<Self, Failure> {
        let constraint =
            "an SVG file: name it .svg; a browser or a drawing program makes the other of it";
        refuse_other_forms(&path, &[], "--picture", constraint)?;
        Self::checked(path, force)
    }

    /// The same for a page, which is HTML whatever the file is called.
    pub(crate) fn page(path: PathBuf, force: bool) -> Result<Self, Failure> {
        let constraint = "a page in HTML: name it .html; a browser prints it as PDF";
        refuse_other_forms(&path, &["svg", "doc", "docx"], "-o", constraint)?;
        Self::checked(path, force)
    }

    /// Writes it whole.
    pub(crate) fn write(&self, text: &str) -> Result<(), Failure> {
        Ok(write_whole(&self.path, text.as_bytes(), self.existing)?)
    }
}

/// Refuses a name that promises another form.
fn refuse_other_forms(
    path: &Path,
    more: &[&str],
    option: &'static str,
    constraint: &'static str,
) -> Result<(), Failure> {
    let ending = path.extension().and_then(|ending| ending.to_str()).map(str::to_lowercase);
    match ending.as_deref() {
        Some(ending) if OTHER_FORMS.contains(&ending) || more.contains(&ending) => {
            let found = path.display().to_string();
            Err(Failure::Argument { option, found, constraint })
        }
        _ => Ok(()),
    }
}
