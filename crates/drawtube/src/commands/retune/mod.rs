//! `retune`: after a change, move only what can still move.

mod account;
mod request;

use driver::design_file::DesignFile;
use driver::retune::batch::{Totals, TunedUnit, spacing_table, tune, units};
use driver::retune::equivalents::{Replacement, replacements};
use driver::retune::tool_radii::{ToolRadii, move_to_tools};
use driver::retune::{Retuning, prepare, retune};
use driver::solve::{Settings, Unwatched};
use report::text;

use crate::arguments::RetuneArguments;
use crate::console::Console;
use crate::destination::Destination;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

use request::{Request, Task};

pub(crate) fn run(arguments: RetuneArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(arguments)?;
    request.destination.check()?;
    let settings = Settings::default();
    match &request.task {
        Task::Stages => {
            let retuning = stages(&request, &request.file, &settings)?;
            finish(&request, Outcome { retuning: Some(retuning), ..Outcome::default() }, console)
        }
        Task::Equivalents { glass, most } => {
            let (changed, made) = prepare(&request.file, &request.changes, &request.made)?;
            let found = replacements(&changed.file, &made, glass, *most, &settings)?;
            finish(&request, Outcome { replacements: Some(found), ..Outcome::default() }, console)
        }
        Task::ToolRadii(tools) => {
            let retuning = stages(&request, &request.file, &settings)?;
            let from = retuning.last().map_or(&request.file, |stage| &stage.file);
            let tool_radii = move_to_tools(from, tools, &settings)?;
            let outcome = Outcome {
                retuning: Some(retuning),
                tool_radii: Some(tool_radii),
                ..Outcome::default()
            };
            finish(&request, outcome, console)
        }
        Task::Batch(table) => {
            let (changed, _) = prepare(&request.file, &request.changes, &[])?;
            let units = tune(&units(&changed.file, table)?, &settings);
            batch(&request, &units, console)
        }
    }
}

fn stages(request: &Request, file: &DesignFile, settings: &Settings) -> Result<Retuning, Failure> {
    Ok(retune(file, &request.changes, &request.made, settings, &mut Unwatched)?)
}

/// What came out.
#[derive(Default)]
struct Outcome {
    retuning: Option<Retuning>,
    replacements: Option<Vec<Replacement>>,
    tool_radii: Option<ToolRadii>,
}

impl Outcome {
    /// The design to go on with.
    fn design(&self) -> Option<&DesignFile> {
        let best = self.replacements.as_ref().and_then(|found| found.first());
        let tools = self.tool_radii.as_ref().map(|done| &done.file);
        let last = || self.retuning.as_ref()?.last().map(|stage| &stage.file);
        best.map(|best| &best.file).or(tools).or_else(last)
    }
}

/// Keeps the design, prints the account, and says how it went.
fn finish(request: &Request, outcome: Outcome, console: &Console) -> Result<ExitStatus, Failure> {
    let Some(design) = outcome.design() else {
        return Err(Failure::NothingFound("no other maker has a glass known at these wavelengths"));
    };
    let meets = merit_function::assessment::assess(&design.design, &design.wishes).meets;
    let saved = request.destination.save("design", design.text().as_bytes(), console);
    let mut text = if request.json {
        account::document(request, &outcome)?
    } else {
        account::text(request, &outcome)
    };
    if saved.is_ok() && !request.json {
        text = format!("{text}\n{}", request.destination.told("design"));
    }
    tell(request, &text, saved.is_ok(), console)?;
    saved?;
    Ok(status(request, meets))
}

fn batch(request: &Request, units: &[TunedUnit], console: &Console) -> Result<ExitStatus, Failure> {
    let table = spacing_table(&request.file, units).map_err(Failure::Table)?;
    let saved = request.destination.save("table", &table, console);
    let mut text = if request.json {
        account::batch_document(request, units)?
    } else {
        text::retune_lists::batch(&request.file, units)
    };
    if saved.is_ok() && !request.json {
        text = format!("{text}\n{}", request.destination.told("table"));
    }
    tell(request, &text, saved.is_ok(), console)?;
    saved?;
    let totals = Totals::of(units);
    Ok(status(request, totals.meet == totals.units))
}

/// On standard output, unless what was asked for is or has to be there.
fn tell(request: &Request, text: &str, saved: bool, console: &Console) -> Result<(), Failure> {
    if saved && request.destination != Destination::StandardOutput {
        console.print(text)
    } else {
        console.say(text);
        Ok(())
    }
}

fn status(request: &Request, meets: bool) -> ExitStatus {
    if request.require && !meets { ExitStatus::Missed } else { ExitStatus::Done }
}
