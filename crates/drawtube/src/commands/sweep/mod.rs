//! `sweep`: every point of a plan, in a run folder.

pub(super) mod gathering;
mod request;
mod watcher;

use driver::run::{RunEnd, RunFolder, Stop, perform};
use driver::sweep::{PointResult, SweepResults};
use report::picture::sweep_picture;
use report::text;

use crate::arguments::SweepArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::output_file::OutputFile;
use crate::run_progress::RunTeller;
use crate::signals::StopSignal;

use crate::told::Told;
use request::{Request, Run};
use watcher::SweepWatch;

pub(crate) fn run(arguments: SweepArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(arguments, console)?;
    let Some(run) = &request.run else {
        return dry_run(&request, console);
    };
    let signals = StopSignal::listen().map_err(Failure::Signals)?;
    let folder = RunFolder::open(&run.path, &run.ask)?;
    let (end, points) = optimise(&request, run, &folder, &signals, console)?;
    let results = SweepResults::new(request.sweep.plan(), points);
    let files = results.files().map_err(Failure::Table)?;
    folder.write_results(&files)?;
    if let Some(source) = &end.unsaved {
        let source = std::io::Error::new(source.kind(), source.to_string());
        return Err(Failure::Unsaved { path: run.path.clone(), source });
    }
    if let Some(output) = &request.picture {
        draw(&results, output, console)?;
    }
    tell(&request, run, &folder, &end, &results, console)?;
    Ok(status(&request, &signals, &end, &results))
}

/// Draws the points, where there is anything to draw.
fn draw(results: &SweepResults, output: &OutputFile, console: &Console) -> Result<(), Failure> {
    match sweep_picture(results) {
        Some(picture) => output.write(&picture),
        None => {
            console.say("drawtube: no picture: it takes one axis, a grid over two, or a front");
            Ok(())
        }
    }
}

/// Lists the points.
fn dry_run(request: &Request, console: &Console) -> Result<ExitStatus, Failure> {
    let plan = request.sweep.plan();
    match request.run_as.told {
        Told::Json => {
            let points: Vec<serde_json::Value> = plan
                .points
                .iter()
                .enumerate()
                .map(|(number, values)| serde_json::json!({ "number": number, "values": values }))
                .collect();
            console.print_json(&serde_json::json!({
                "format": "drawtube-points/1",
                "title": plan.title,
                "axes": plan.axes,
                "points": points,
            }))?;
        }
        Told::Text | Told::Nothing => console.print(&text::sweep::points(plan))?,
    }
    Ok(ExitStatus::Done)
}

/// Runs the points that are missing; gives all that are finished, in order.
fn optimise(
    request: &Request,
    run: &Run,
    folder: &RunFolder,
    signals: &StopSignal,
    console: &Console,
) -> Result<(RunEnd, Vec<PointResult>), Failure> {
    let teller = RunTeller::new(request.run_as.progress, console, "points", None)
        .map_err(Failure::Signals)?;
    let mut watch = SweepWatch::new(teller, signals.flag(), request, &run.path);
    let end = perform(folder, &request.sweep, &run.budget, request.run_as.threads, &mut watch);
    Ok((end?, watch.over()))
}

fn tell(
    request: &Request,
    run: &Run,
    folder: &RunFolder,
    end: &RunEnd,
    results: &SweepResults,
    console: &Console,
) -> Result<(), Failure> {
    match request.run_as.told {
        Told::Nothing => Ok(()),
        Told::Json => console.print_json(results),
        Told::Text => {
            let closing = closing(run, folder, end, results);
            console.print(&format!("{}\n\n{closing}", text::sweep::results(results)))
        }
    }
}

/// Why it ended, and where the results are.
fn closing(run: &Run, folder: &RunFolder, end: &RunEnd, results: &SweepResults) -> String {
    let (why, then) = match end.stop {
        Stop::SessionTime => ("The time limit is reached", "; the same command line goes on"),
        Stop::Interrupted => ("Stopped by the user", "; the same command line goes on"),
        _ => ("Complete", ""),
    };
    let share = run.ask.share;
    let part = if share.is_whole() { String::new() } else { format!(" Part {share}:") };
    let told = format!(
        "{why}.{part} {} of {} points are done{then}. They are in {place}/points.csv and \
         points.json, the best designs in {place}/best.",
        results.points.len(),
        end.tally.wanted.unwrap_or_default(),
        place = folder.place().display()
    );
    text::paragraph(&told, text::WIDTH, "")
}

fn status(
    request: &Request,
    signals: &StopSignal,
    end: &RunEnd,
    results: &SweepResults,
) -> ExitStatus {
    match end.stop {
        Stop::SessionTime => ExitStatus::TimeLimit,
        Stop::Interrupted => signals.status().unwrap_or(ExitStatus::Failed),
        _ if results.failed > 0 || (request.require && !results.meet()) => ExitStatus::Missed,
        _ => ExitStatus::Done,
    }
}
