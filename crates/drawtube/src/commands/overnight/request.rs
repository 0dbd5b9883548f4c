//! What `overnight` is asked for, with everything decided.

use std::path::PathBuf;
use std::time::Duration;

use driver::overnight::{Overnight, ask};
use driver::run::{Ask, Budget};
use driver::search::{SearchSettings, Strategy};

use crate::arguments::{OvernightArguments, ProgressArgument, StrategyArgument};
use crate::console::Console;
use crate::failure::Failure;
use crate::input::{self, STANDARD_STREAM};
use crate::part;
use crate::progress::Manner;

/// What is printed at the end.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Told {
    Text,
    Json,
    Nothing,
}

/// What is asked for.
pub(super) struct Request {
    pub(super) run: PathBuf,
    pub(super) ask: Ask,
    pub(super) work: Overnight,
    pub(super) budget: Budget,
    pub(super) threads: usize,
    pub(super) keep: u16,
    pub(super) told: Told,
    pub(super) progress: Manner,
}

impl Request {
    pub(super) fn of(arguments: OvernightArguments, console: &Console) -> Result<Self, Failure> {
        let every = duration("--progress-every", arguments.progress_every, 1.0, ZERO_OR_MORE)?;
        let budget = budget(&arguments)?;
        let share = part::share(arguments.part.as_deref(), &|name| std::env::var(name).ok())?;
        let settings = SearchSettings {
            strategy: match arguments.strategy {
                StrategyArgument::Multistart => Strategy::Multistart,
                StrategyArgument::BasinHopping => Strategy::BasinHopping,
                StrategyArgument::DifferentialEvolution => Strategy::DifferentialEvolution,
            },
        };
        let quiet = arguments.quiet;
        let asked = arguments.asked.unwrap_or_else(|| STANDARD_STREAM.into());
        let document = input::document(&asked)?;
        let ask = ask(document.label(), document.text(), settings, arguments.seed, share);
        let work = super::work(document, settings, arguments.seed)?;
        let machine = std::thread::available_parallelism().map_or(1, usize::from);
        Ok(Self {
            run: arguments.run,
            ask,
            work,
            budget,
            threads: arguments.threads.map_or(machine, usize::from),
            keep: arguments.keep,
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
        })
    }
}

const ZERO_OR_MORE: &str = "a number, zero or positive";

fn budget(arguments: &OvernightArguments) -> Result<Budget, Failure> {
    let run_time = arguments
        .hours
        .map(|hours| duration("--hours", hours, 3600.0, ZERO_OR_MORE))
        .transpose()?;
    let session_time = arguments
        .time_limit
        .map(|minutes| duration("--time-limit", minutes, 60.0, ZERO_OR_MORE))
        .transpose()?;
    let target_merit = arguments.target_merit;
    if let Some(target) = target_merit.filter(|target| !target.is_finite() || *target < 0.0) {
        return Err(Failure::Argument {
            option: "--target-merit",
            found: target.to_string(),
            constraint: ZERO_OR_MORE,
        });
    }
    Ok(Budget { units: arguments.starts, run_time, session_time, target_merit })
}

fn duration(
    option: &'static str,
    value: f64,
    seconds: f64,
    constraint: &'static str,
) -> Result<Duration, Failure> {
    Duration::try_from_secs_f64(value * seconds).map_err(|_| Failure::Argument {
        option,
        found: value.to_string(),
        constraint,
    })
}
