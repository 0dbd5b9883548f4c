//! `optimise`: from a design to a better one nearby.

mod account;
mod request;

use driver::cam::{CamSettings, movement_curve};
use driver::optimise::{Optimisation, optimise};
use driver::solve::Stopped;

use report::picture::optimisation_picture;

use crate::arguments::OptimiseArguments;
use crate::console::Console;
use crate::destination::Destination;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::progress::{MeritHistory, Teller};
use crate::signals::StopSignal;

use crate::told::Told;
use account::Account;
use request::Request;

pub(crate) fn run(arguments: OptimiseArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(arguments, console)?;
    request.destination.check()?;
    let signals = StopSignal::listen().map_err(Failure::Signals)?;
    let (stages, history) = solve(&request, &signals, console)?;
    let account = Account::new(&request.file, stages, history)?;
    let saved = request.destination.save("design", account.result().text().as_bytes(), console);
    tell(&request, &account, saved.is_ok(), console)?;
    saved?;
    draw(&request, &account)?;
    Ok(signals.status().unwrap_or(if request.require && !account.meets() {
        ExitStatus::Missed
    } else {
        ExitStatus::Done
    }))
}

/// Runs the methods one after the other, each from where the one before stopped.
fn solve(
    request: &Request,
    signals: &StopSignal,
    console: &Console,
) -> Result<(Vec<Optimisation>, Vec<MeritHistory>), Failure> {
    let mut stages: Vec<Optimisation> = Vec::new();
    let mut teller = Teller::new(request.progress, console, signals.flag());
    for settings in &request.stages {
        let from = stages.last().map_or(&request.file, |stage| &stage.file);
        teller.begin();
        let result = optimise(from, settings, &mut teller);
        if result.is_err() {
            teller.finish();
        }
        let stage = result?;
        let over = matches!(stage.stopped, Stopped::TargetReached | Stopped::Interrupted);
        stages.push(stage);
        if over {
            break;
        }
    }
    teller.finish();
    Ok((stages, teller.into_history()))
}

/// Writes the picture that was asked for.
fn draw(request: &Request, account: &Account<'_>) -> Result<(), Failure> {
    let Some(output) = &request.picture else { return Ok(()) };
    let file = account.result();
    let curve = movement_curve(&file.design, &file.wishes, &CamSettings::default());
    output.write(&optimisation_picture(file, curve.as_ref().ok(), &account.merit_runs()))
}

/// Prints the summary: on standard output, unless a design is or has to be there.
fn tell(
    request: &Request,
    account: &Account<'_>,
    saved: bool,
    console: &Console,
) -> Result<(), Failure> {
    let text = match request.told {
        Told::Nothing => return Ok(()),
        Told::Json => account.document()?,
        Told::Text => account.text(&request.destination, saved),
    };
    if saved && request.destination != Destination::StandardOutput {
        console.print(&text)
    } else {
        console.say(&text);
        Ok(())
    }
}
