//! Reading what a command is given.

use std::fs::File;
use std::io::{self, Read};
use std::path::Path;

use driver::brief::BriefFile;
use driver::design_file::DesignFile;
use driver::retune::table::Table;
use surface_model::document::{Document, LARGEST_BYTES};

use crate::failure::Failure;

/// The path that means a standard stream.
pub(crate) const STANDARD_STREAM: &str = "-";

/// Reads a table from a file, or from standard input.
pub(crate) fn table(path: &Path) -> Result<Table, Failure> {
    let (label, bytes) = if path.as_os_str() == STANDARD_STREAM {
        ("standard input".to_owned(), read_all(io::stdin().lock()))
    } else {
        let label = path.display().to_string();
        let opened = File::open(path);
        let file = opened.map_err(|source| Failure::Open { label: label.clone(), source })?;
        (label, read_all(file))
    };
    let bytes = bytes.map_err(|source| Failure::Open { label: label.clone(), source })?;
    Ok(Table::read(label, &bytes)?)
}

/// Everything, as long as it is no larger than the largest document.
fn read_all(source: impl Read) -> io::Result<Vec<u8>> {
    let mut bytes = Vec::new();
    source.take(LARGEST_BYTES as u64 + 1).read_to_end(&mut bytes)?;
    if bytes.len() > LARGEST_BYTES {
        return Err(io::Error::new(io::ErrorKind::FileTooLarge, "it is larger than 16 MiB"));
    }
    Ok(bytes)
}

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
