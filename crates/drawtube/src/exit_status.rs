//! How the program says to the shell how it went.

use std::process::ExitCode;

/// Exit statuses of the program. They are part of its interface: a number never changes meaning.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[repr(u8)]
pub enum ExitStatus {
    /// Done.
    Done = 0,
    /// The work failed: a ray does not get through, nothing was found.
    Failed = 1,
    /// The input or the command line is wrong.
    WrongInput = 2,
    /// Done, but a goal, a limit or some points are missed, and it was asked to say so.
    Missed = 3,
    /// There was nothing to do.
    NothingToDo = 4,
    /// The run folder is in use by another process.
    InUse = 5,
    /// The run folder is damaged, or of another brief or version.
    Damaged = 6,
    /// The results cannot be written: the disk is full or read-only, or a file is there already.
    CannotWrite = 7,
    /// Stopped by the time limit; run again, it goes on.
    TimeLimit = 75,
    /// Stopped by SIGINT (Ctrl-C), the best so far saved where it was to go.
    Interrupted = 130,
    /// Stopped by SIGTERM, the best so far saved where it was to go.
    Terminated = 143,
}

impl From<ExitStatus> for ExitCode {
    fn from(status: ExitStatus) -> Self {
        Self::from(status as u8)
    }
}

#[cfg(test)]
mod tests {
    use super::ExitStatus::*;

    #[test]
    fn the_numbers_stay_what_they_are() {
        let all = [
            Done,
            Failed,
            WrongInput,
            Missed,
            NothingToDo,
            InUse,
            Damaged,
            CannotWrite,
            TimeLimit,
            Interrupted,
            Terminated,
        ];
        assert_eq!(all.map(|status| status as u8), [0, 1, 2, 3, 4, 5, 6, 7, 75, 130, 143]);
    }
}
