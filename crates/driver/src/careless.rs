//! Writing as this program must not. The tests run a program of their own that does, to prove that
//! they would notice; no argument and no variable of the real one leads here.

use std::fs::{File, OpenOptions};
use std::io::{self, Write};
use std::path::Path;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

static WANTED: AtomicBool = AtomicBool::new(false);

/// Bytes written at a time, and the pause after them, in which a process can be killed.
const PIECE: usize = 64;
const PAUSE: Duration = Duration::from_millis(1);

/// From now on this process writes in place and piece by piece, brings nothing to the disk, and
/// goes on after a torn line of a journal as if it were whole.
pub fn write_carelessly_from_now_on() {
    WANTED.store(true, Ordering::Relaxed);
}

pub(crate) fn is_wanted() -> bool {
    WANTED.load(Ordering::Relaxed)
}

/// Writes a file in place.
pub(crate) fn write(path: &Path, contents: &[u8]) -> io::Result<()> {
    let file = OpenOptions::new().write(true).create(true).truncate(true).open(path)?;
    append(&file, contents)
}

/// Writes piece by piece.
pub(crate) fn append(mut file: &File, contents: &[u8]) -> io::Result<()> {
    contents.chunks(PIECE).try_for_each(|piece| {
        std::thread::sleep(PAUSE);
        file.write_all(piece)
    })
}
