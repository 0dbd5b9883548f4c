//! Reading what a command is given.

use std::fs::File;
use std::io;
use std::path::Path;

use driver::brief::BriefFile;
use driver::design_file::DesignFile;
use surface_model::document::Document;

use crate::failure::Failure;

/// The path that means a standard stream.
pub(crate) const STANDARD_STREAM: &str = "-";

/// Reads a design from a file, or from standard input.
pub(crate) fn design(path: &Path) -> Result<DesignFile, Failure> {
    Ok(DesignFile::read(document(path)?)?)
}

/// Reads a brief from a file, or from standard input.
pub(crate) fn brief(path: &Path) -> Result<BriefFile, Failure> {
    Ok(BriefFile::read(document(path)?)?)
}

/// Reads a document of any kind from a file, or from standard input.
pub(crate) fn document(path: &Path) -> Result<Document, Failure> {
    Ok(if path.as_os_str() == STANDARD_STREAM {
        Document::from_reader("standard input", io::stdin().lock())?
    } else {
        let label = path.display().to_string();
        let file =
            File::open(path).map_err(|source| Failure::Open { label: label.clone(), source })?;
        Document::from_reader(label, file)?
    })
}
