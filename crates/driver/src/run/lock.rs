//! The lock on a run, held by the system: it ends with its process, however that ends.

use std::fs::{File, OpenOptions, TryLockError};
use std::io::{Read, Write};
use std::path::Path;
use std::time::Duration;

use super::error::RunError;

/// How often, and with what pause, a lock is tried: whoever only looks whether a run is at work
/// holds it for a moment.
const TRIES: u32 = 20;
const PAUSE: Duration = Duration::from_millis(15);

/// A lock that is held until it is dropped.
#[derive(Debug)]
pub(super) struct Lock {
    _file: File,
}

impl Lock {
    /// Takes the lock kept in the file at `path`; `folder` is what messages call it.
    pub(super) fn take(path: &Path, folder: &Path) -> Result<Self, RunError> {
        let refused = RunError::system(path);
        let mut file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .open(path)
            .map_err(&refused)?;
        for tried in 1.. {
            match file.try_lock() {
                Ok(()) => break,
                Err(TryLockError::WouldBlock) if tried < TRIES => std::thread::sleep(PAUSE),
                Err(TryLockError::WouldBlock) => {
                    return Err(RunError::InUse { path: folder.into(), holder: holder(&file) });
                }
                Err(TryLockError::Error(source)) => return Err(refused(source)),
            }
        }
        // The name is for people; the lock holds without it.
        let host = gethostname::gethostname();
        let name = format!("process {} on {}\n", std::process::id(), host.display());
        let _ = file.set_len(0).and_then(|()| file.write_all(name.as_bytes()));
        Ok(Self { _file: file })
    }
}

/// Who holds the lock, if anyone does. It is looked at for a moment, and nothing is written.
pub(super) fn holder_of(path: &Path) -> Option<String> {
    let file = File::open(path).ok()?;
    match file.try_lock_shared() {
        Err(TryLockError::WouldBlock) => Some(holder(&file)),
        Ok(()) | Err(TryLockError::Error(_)) => None,
    }
}

fn holder(file: &File) -> String {
    let mut name = String::new();
    let read = file.take(1000).read_to_string(&mut name);
    match read {
        // What the file holds is another's word.
        Ok(_) if !name.trim().is_empty() => {
            name.trim().chars().filter(|c| !c.is_control()).collect()
        }
        _ => "another process".to_owned(),
    }
}
