//! The one function of the program that writes files: whole, or not at all.
//!
//! A temporary file beside the target, written, flushed to the disk, renamed, and the folder
//! flushed too: at every moment the target is either what it was or what it is to be.

use std::fs::File;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use surface_model::document::system_words;
use tempfile::NamedTempFile;

use crate::careless;

/// How the names of temporary files begin.
pub(crate) const TEMPORARY_PREFIX: &str = ".drawtube-";

/// What to do with a file that is there already.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Existing {
    /// Leave it, and fail.
    Keep,
    /// Put the new one in its place.
    Replace,
}

/// Why a file could not be written.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum WriteError {
    /// There is one already.
    #[error("{} exists already; nothing was written", .0.display())]
    Exists(PathBuf),
    /// A folder stands where the file should be.
    #[error("{} is a folder; nothing was written", .0.display())]
    Folder(PathBuf),
    /// There is no folder it could be in.
    #[error("{} cannot be written: there is no folder {}", .path.display(), .folder.display())]
    NoFolder {
        /// The file.
        path: PathBuf,
        /// The folder it would be in.
        folder: PathBuf,
    },
    /// The system refuses.
    #[error("{} cannot be written: {}", .path.display(), system_words(.source))]
    System {
        /// The file.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
}

/// Finds out, before any computing, whether a file can be written here.
///
/// # Errors
/// It exists and is to be kept, or the folder takes no files.
pub fn check_writable(path: &Path, existing: Existing) -> Result<(), WriteError> {
    check_target(path, existing)?;
    NamedTempFile::new_in(folder_of(path)).map_err(|source| system(path, source))?;
    Ok(())
}

/// Writes a file whole, or leaves everything as it was.
///
/// # Errors
/// It exists and is to be kept, or the system refuses.
pub fn write_whole(path: &Path, contents: &[u8], existing: Existing) -> Result<(), WriteError> {
    check_target(path, existing)?;
    let folder = folder_of(path);
    let refused = |source| system(path, source);
    if careless::is_wanted() {
        return careless::write(path, contents).map_err(refused);
    }
    let mut file =
        tempfile::Builder::new().prefix(TEMPORARY_PREFIX).tempfile_in(folder).map_err(refused)?;
    let permissions = permissions_for(path);
    file.write_all(contents).map_err(refused)?;
    if let Some(permissions) = permissions {
        file.as_file().set_permissions(permissions).map_err(refused)?;
    }
    file.as_file().sync_all().map_err(refused)?;
    let kept = match existing {
        Existing::Replace => file.persist(path),
        Existing::Keep => file.persist_noclobber(path),
    };
    kept.map_err(|error| match error.error.kind() {
        io::ErrorKind::AlreadyExists => WriteError::Exists(path.into()),
        _ => system(path, error.error),
    })?;
    sync_folder_of(path).map_err(refused)
}

/// Brings to the disk that a file is there.
pub(crate) fn sync_folder_of(path: &Path) -> io::Result<()> {
    File::open(folder_of(path)).and_then(|folder| folder.sync_all())
}

fn check_target(path: &Path, existing: Existing) -> Result<(), WriteError> {
    if path.is_dir() {
        return Err(WriteError::Folder(path.into()));
    }
    if existing == Existing::Keep && path.symlink_metadata().is_ok() {
        return Err(WriteError::Exists(path.into()));
    }
    Ok(())
}

fn system(path: &Path, source: io::Error) -> WriteError {
    let folder = folder_of(path);
    if source.kind() == io::ErrorKind::NotFound && !folder.exists() {
        return WriteError::NoFolder { path: path.into(), folder: folder.into() };
    }
    WriteError::System { path: path.into(), source }
}

fn folder_of(path: &Path) -> &Path {
    path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."))
}

/// A temporary file is the user's alone; the finished one is like any other the user makes, or
/// like the one it replaces.
#[cfg(unix)]
fn permissions_for(path: &Path) -> Option<std::fs::Permissions> {
    use std::os::unix::fs::PermissionsExt;
    let existing = path.metadata().ok().map(|metadata| metadata.permissions());
    existing.or_else(|| Some(std::fs::Permissions::from_mode(0o644)))
}

#[cfg(not(unix))]
fn permissions_for(_: &Path) -> Option<std::fs::Permissions> {
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_file_is_written_once_and_replaced_only_when_asked() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("design.json");
        write_whole(&path, b"one", Existing::Keep).unwrap();
        let refused = write_whole(&path, b"two", Existing::Keep);
        assert!(matches!(refused, Err(WriteError::Exists(_))));
        assert_eq!(std::fs::read(&path).unwrap(), b"one");
        write_whole(&path, b"three", Existing::Replace).unwrap();
        assert_eq!(std::fs::read(&path).unwrap(), b"three");
        let left: Vec<_> = std::fs::read_dir(folder.path()).unwrap().collect();
        assert_eq!(left.len(), 1, "no temporary file is left behind");
    }

    #[test]
    fn a_place_that_takes_no_file_is_told_beforehand() {
        let folder = tempfile::tempdir().unwrap();
        let missing = folder.path().join("nowhere/design.json");
        let refused = check_writable(&missing, Existing::Keep).unwrap_err();
        assert!(matches!(refused, WriteError::NoFolder { .. }));
        assert!(refused.to_string().ends_with("nowhere"), "no temporary name: {refused}");
        assert!(matches!(
            check_writable(folder.path(), Existing::Replace),
            Err(WriteError::Folder(_))
        ));
    }
}
