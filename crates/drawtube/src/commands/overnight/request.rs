//! What `overnight` is asked for, with everything decided.

use std::path::PathBuf;

use driver::overnight::{Overnight, ask};
use driver::run::{Ask, Budget};
use driver::search::{SearchSettings, Strategy};

use crate::arguments::{OvernightArguments, StrategyArgument};
use crate::console::Console;
use crate::failure::Failure;
use crate::input::{self, STANDARD_STREAM};
use crate::output_file::OutputFile;
use crate::progress::{ZERO_OR_MORE, duration};
use crate::run_request::RunRequest;

/// What is asked for.
pub(super) struct Request {
    pub(super) run: PathBuf,
    pub(super) ask: Ask,
    pub(super) work: Overnight,
    pub(super) budget: Budget,
    /// How it is run and told.
    pub(super) run_as: RunRequest,
    pub(super) keep: u16,
    pub(super) picture: Option<OutputFile>,
}

impl Request {
    pub(super) fn of(arguments: OvernightArguments, console: &Console) -> Result<Self, Failure> {
        let run_as = RunRequest::of(&arguments.run_as, arguments.json, console)?;
        let budget = Budget { session_time: run_as.session_time, ..budget(&arguments)? };
        let picture = arguments.picture.map(|path| OutputFile::picture(path, arguments.force));
        let settings = SearchSettings {
            strategy: match arguments.strategy {
                StrategyArgument::Multistart => Strategy::Multistart,
                StrategyArgument::BasinHopping => Strategy::BasinHopping,
                StrategyArgument::DifferentialEvolution => Strategy::DifferentialEvolution,
            },
        };
        let asked = arguments.asked.unwrap_or_else(|| STANDARD_STREAM.into());
        let document = input::document(&asked)?;
        let ask = ask(document.label(), document.text(), settings, arguments.seed, run_as.share);
        let work = super::work(document, settings, arguments.seed)?;
        Ok(Self {
            run: arguments.run,
            ask,
            work,
            budget,
            run_as,
            keep: arguments.keep,
            picture: picture.transpose()?,
        })
    }
}

/// All but the time of the session.
fn budget(arguments: &OvernightArguments) -> Result<Budget, Failure> {
    let run_time = arguments.hours.map(|hours| duration("--hours", hours, 3600.0)).transpose()?;
    let target_merit = arguments.target_merit;
    if let Some(target) = target_merit.filter(|target| !target.is_finite() || *target < 0.0) {
        return Err(Failure::Argument {
            option: "--target-merit",
            found: target.to_string(),
            constraint: ZERO_OR_MORE,
        });
    }
    Ok(Budget { units: arguments.starts, run_time, target_merit, ..Budget::default() })
}
