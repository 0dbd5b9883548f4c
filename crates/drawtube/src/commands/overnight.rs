//! `overnight`: a search of hours in a run folder.

pub(super) mod picture;
mod request;
mod state;
mod watcher;

use std::path::Path;

use driver::brief::BriefFile;
use driver::design_file::DesignFile;
use driver::overnight::{Finds, Overnight, RankedList, fetch};
use driver::run::{RunEnd, RunFolder, Stop, Survey, perform};
use driver::search::{SearchError, SearchProblem, SearchSettings};
use surface_model::document::Document;

use crate::arguments::OvernightArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::run_progress::RunTeller;
use crate::signals::StopSignal;

use crate::told::Told;
use request::Request;
use watcher::NightWatch;

pub(crate) fn run(arguments: OvernightArguments, console: &Console) -> Result<ExitStatus, Failure> {
    if arguments.show {
        return state::show(arguments, console);
    }
    let request = Request::of(arguments, console)?;
    let signals = StopSignal::listen().map_err(Failure::Signals)?;
    let folder = RunFolder::open(&request.run, &request.ask)?;
    let (end, list, finds) = search(&request, &folder, &signals, console)?;
    let kept = keep(&request, &folder, &end, &list, console);
    let place = folder.place().to_owned();
    // Whoever looks from now on, this program included, sees that no one is at work.
    drop(folder);
    tell(&request, &place, &end, &list, kept.is_ok(), console)?;
    kept?;
    if let Some(output) = &request.picture {
        picture::draw(&list, &finds, output, console)?;
    }
    Ok(status(&request, &signals, &end, &list))
}

/// Runs the starts, and makes the list of what they found.
fn search(
    request: &Request,
    folder: &RunFolder,
    signals: &StopSignal,
    console: &Console,
) -> Result<(RunEnd, RankedList, Finds), Failure> {
    let teller =
        RunTeller::new(request.run_as.progress, console, "starts", request.budget.run_time)
            .map_err(Failure::Signals)?;
    let mut watch = NightWatch::new(teller, signals.flag(), request);
    let end = perform(folder, &request.work, &request.budget, request.run_as.threads, &mut watch);
    let (mut finds, teller) = watch.over();
    teller.finish();
    let end = end?;
    if !finds.missing(end.counted_below).is_empty() {
        fetch(&mut finds, end.counted_below, &[Survey::of(&request.run)?])?;
    }
    let list = finds.list(end.counted_below, end.tally.finished);
    Ok((end, list, finds))
}

/// Writes the results. Where that fails, the best design goes to standard output as the last
/// resort.
fn keep(
    request: &Request,
    folder: &RunFolder,
    end: &RunEnd,
    list: &RankedList,
    console: &Console,
) -> Result<(), Failure> {
    let files = list.files().map_err(Failure::Document)?;
    let written = folder.write_results(&files).map_err(Failure::from);
    let unsaved = end.unsaved.as_ref().map(|source| Failure::Unsaved {
        path: request.run.clone(),
        source: std::io::Error::new(source.kind(), source.to_string()),
    });
    let failure = match (written, unsaved) {
        (Ok(()), None) => return Ok(()),
        (Err(failure), _) | (Ok(()), Some(failure)) => failure,
    };
    if let Some(best) = list.best.first() {
        console.say("drawtube: the best design goes to standard output as the last resort");
        console.print_exactly(&best.text())?;
    }
    Err(failure)
}

/// Prints the list: on standard output, unless a design had to go there.
fn tell(
    request: &Request,
    place: &Path,
    end: &RunEnd,
    list: &RankedList,
    kept: bool,
    console: &Console,
) -> Result<(), Failure> {
    match request.run_as.told {
        Told::Nothing => Ok(()),
        Told::Json if kept => {
            let state = state::State::of(&request.run, usize::from(request.keep))?;
            console.print_json(&state.document())
        }
        Told::Text if kept => console.print(&format!(
            "{}\n\n{}",
            report::text::overnight::ranking(list),
            closing(request, place, end, list)
        )),
        Told::Json | Told::Text => Ok(()),
    }
}

/// Why it ended, what is done and what to do next.
fn closing(request: &Request, place: &Path, end: &RunEnd, list: &RankedList) -> String {
    let share = request.ask.share;
    let of = end.tally.wanted.map_or_else(String::new, |wanted| format!(" of {wanted}"));
    let part = if share.is_whole() { String::new() } else { format!(" Part {share} of the run:") };
    let (why, then) = match end.stop {
        Stop::Complete => ("Complete", ""),
        Stop::Sufficed => ("The target is reached", ""),
        Stop::RunTime => ("The hours are used up", "; more --hours go on"),
        Stop::SessionTime => ("The time limit is reached", "; the same command line goes on"),
        Stop::Interrupted => ("Stopped by the user", "; the same command line goes on"),
    };
    let done = format!(
        "{why}.{part} {}{of} starts are done in {}{then}.",
        end.tally.finished,
        report::text::overnight::time(end.tally.run_seconds)
    );
    let place = place.display();
    let kept = match (list.best.len(), share.is_whole()) {
        (0, _) => String::new(),
        (_, true) => format!(" The designs are in {place}/best."),
        (_, false) => format!(
            " The part's designs are in {place}/best; gather {} puts the parts together.",
            request.run.display()
        ),
    };
    report::text::paragraph(&format!("{done}{kept}"), report::text::WIDTH, "")
}

fn status(request: &Request, signals: &StopSignal, end: &RunEnd, list: &RankedList) -> ExitStatus {
    match end.stop {
        Stop::SessionTime => ExitStatus::TimeLimit,
        Stop::Interrupted => signals.status().unwrap_or(ExitStatus::Failed),
        // A part of a run may find nothing where the others do.
        _ if list.best.is_empty() && request.ask.share.is_whole() => ExitStatus::Failed,
        _ => ExitStatus::Done,
    }
}

/// The work of a run about a design or a brief.
fn work(document: Document, settings: SearchSettings, seed: u64) -> Result<Overnight, Failure> {
    let problem = if is_brief(&document) {
        let brief = BriefFile::read(document)?;
        SearchProblem::of_brief(&brief, settings).map_err(|error| match error {
            SearchError::Optimise(error) => Failure::Optimise(error),
            SearchError::Start(error) => Failure::Input(error.in_brief(&brief)),
        })?
    } else {
        SearchProblem::of_design(&DesignFile::read(document)?, settings)?
    };
    Ok(Overnight { problem, seed })
}

/// Whether a document says of itself that it is a brief, of whatever version.
fn is_brief(document: &Document) -> bool {
    let format = document.value().get("format").and_then(|format| format.as_str());
    format.is_some_and(|format| format.starts_with("drawtube-brief/"))
}
