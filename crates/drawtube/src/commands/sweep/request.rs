//! What `sweep` is asked for, with everything decided.

use std::path::{Path, PathBuf};
use std::time::Duration;

use driver::run::{Ask, Budget};
use driver::sweep::{PlanFile, Sweep, ask};

use crate::arguments::{ProgressArgument, SweepArguments};
use crate::console::Console;
use crate::failure::Failure;
use crate::input::{self, STANDARD_STREAM};
use crate::output_file::OutputFile;
use crate::part;
use crate::progress::Manner;

/// What is printed at the end.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Told {
    Text,
    Json,
    Nothing,
}

/// Where and how points are run.
pub(super) struct Run {
    pub(super) path: PathBuf,
    pub(super) ask: Ask,
    pub(super) budget: Budget,
    pub(super) threads: usize,
}

/// What is asked for.
pub(super) struct Request {
    pub(super) sweep: Sweep,
    /// None if the points are only to be listed.
    pub(super) run: Option<Run>,
    pub(super) told: Told,
    pub(super) picture: Option<OutputFile>,
    pub(super) progress: Manner,
    pub(super) require: bool,
}

impl Request {
    pub(super) fn of(arguments: SweepArguments, console: &Console) -> Result<Self, Failure> {
        let every = duration("--progress-every", arguments.progress_every, 1.0)?;
        let session_time = arguments
            .time_limit
            .map(|minutes| duration("--time-limit", minutes, 60.0))
            .transpose()?;
        let share = part::share(arguments.part.as_deref(), &|name| std::env::var(name).ok())?;
        let plan_file = PlanFile::read(input::document(&arguments.plan)?)?;
        let design = input::design(&beside(&arguments.plan, plan_file.design()))?;
        let plan = plan_file.resolve(&design)?;
        let machine = std::thread::available_parallelism().map_or(1, usize::from);
        let units = Some(plan.points.len() as u64);
        let run = arguments.run.map(|path| Run {
            path,
            ask: ask(&plan_file, &design, share),
            budget: Budget { units, session_time, ..Budget::default() },
            threads: arguments.threads.map_or(machine, usize::from),
        });
        let quiet = arguments.quiet;
        Ok(Self {
            sweep: Sweep::new(plan, design),
            run,
            picture: arguments
                .picture
                .map(|path| OutputFile::picture(path, arguments.force))
                .transpose()?,
            told: match (quiet, arguments.json) {
                (true, _) => Told::Nothing,
                (false, true) => Told::Json,
                (false, false) => Told::Text,
            },
            progress: Manner::of(
                if quiet { ProgressArgument::None } else { arguments.progress },
                every,
                console,
            ),
            require: arguments.require,
        })
    }
}

/// A file that a plan names, seen from the plan's folder.
fn beside(plan: &Path, name: &str) -> PathBuf {
    match plan.parent() {
        Some(folder) if plan.as_os_str() != STANDARD_STREAM => folder.join(name),
        _ => PathBuf::from(name),
    }
}

fn duration(option: &'static str, value: f64, seconds: f64) -> Result<Duration, Failure> {
    Duration::try_from_secs_f64(value * seconds).map_err(|_| Failure::Argument {
        option,
        found: value.to_string(),
        constraint: "a number, zero or positive",
    })
}
