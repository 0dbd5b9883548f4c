//! How a run is worked on and told, with everything decided.

use std::time::Duration;

use driver::run::Share;

use crate::arguments::{ProgressArgument, RunArguments};
use crate::console::Console;
use crate::failure::Failure;
use crate::part;
use crate::progress::{Manner, duration};
use crate::told::Told;

/// How a run is worked on and told.
pub(crate) struct RunRequest {
    pub(crate) share: Share,
    /// Time this session may take.
    pub(crate) session_time: Option<Duration>,
    pub(crate) threads: usize,
    pub(crate) told: Told,
    pub(crate) progress: Manner,
}

impl RunRequest {
    /// `json` as the command's own `--json` says.
    pub(crate) fn of(
        arguments: &RunArguments,
        json: bool,
        console: &Console,
    ) -> Result<Self, Failure> {
        let RunArguments { time_limit, threads, part, quiet, progress, progress_every } = arguments;
        let every = duration("--progress-every", *progress_every, 1.0)?;
        let limit = time_limit.map(|minutes| duration("--time-limit", minutes, 60.0));
        let machine = std::thread::available_parallelism().map_or(1, usize::from);
        let progress = if *quiet { ProgressArgument::None } else { *progress };
        Ok(Self {
            share: part::share(part.as_deref(), &|name| std::env::var(name).ok())?,
            session_time: limit.transpose()?,
            threads: threads.map_or(machine, usize::from),
            told: Told::of(*quiet, json),
            progress: Manner::of(progress, every, console),
        })
    }
}
