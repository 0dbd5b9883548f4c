//! `start`: from a brief to ranked first-order layouts.

use driver::brief::BriefFile;
use driver::start::{LOOKED_AT, Ranking, StartError, Starts};
use report::start::{StartDocument, impossible};
use report::text;

use crate::arguments::StartArguments;
use crate::console::Console;
use crate::destination::Destination;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input;

/// What is asked for.
struct Request {
    brief: BriefFile,
    destination: Destination,
    /// Which layout is written, counted from 0.
    place: usize,
    most: usize,
    seed: u64,
    json: bool,
}

impl Request {
    fn of(arguments: StartArguments) -> Result<Self, Failure> {
        Ok(Self {
            brief: input::brief(&arguments.brief)?,
            destination: Destination::of(arguments.output, arguments.force),
            place: arguments.rank - 1,
            // The one that is written is told as well.
            most: arguments.most.max(arguments.rank),
            seed: arguments.seed,
            json: arguments.json,
        })
    }
}

pub(crate) fn run(arguments: StartArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(arguments)?;
    request.destination.check()?;
    let refused = |error: StartError| Failure::Input(error.in_brief(&request.brief));
    let starts = Starts::of(&request.brief).map_err(refused)?;
    let ranking = starts.ranked(LOOKED_AT, request.seed, request.most);
    if ranking.best.is_empty() {
        let relaxed = starts.relaxations(LOOKED_AT, request.seed);
        return Err(Failure::Impossible(impossible(&starts, &ranking, &relaxed)));
    }
    if ranking.best.len() <= request.place {
        let (asked, found) = (request.place + 1, ranking.best.len());
        return Err(Failure::NoSuchRank { asked, found });
    }
    let saved = save(&request, &starts, &ranking, console);
    tell(&request, &starts, &ranking, saved.is_ok(), console)?;
    saved?;
    Ok(ExitStatus::Done)
}

/// Writes the layout that is asked for, where it is asked for.
fn save(
    request: &Request,
    starts: &Starts,
    ranking: &Ranking,
    console: &Console,
) -> Result<(), Failure> {
    let Some(layout) = ranking.best.get(request.place) else { return Ok(()) };
    let note = text::start::note(layout, request.place + 1, request.seed);
    let file = starts.design_file(&layout.layout, &layout.layout.design, &note)?;
    request.destination.save("design", file.text().as_bytes(), console)
}

/// Prints the table: on standard output, unless a design is or has to be there.
fn tell(
    request: &Request,
    starts: &Starts,
    ranking: &Ranking,
    saved: bool,
    console: &Console,
) -> Result<(), Failure> {
    let aside = !saved || request.destination == Destination::StandardOutput;
    if request.json {
        let document = StartDocument::of(starts, ranking, request.seed);
        if !aside {
            return console.print_json(&document);
        }
        let text = serde_json::to_string_pretty(&document).map_err(Failure::Document)?;
        console.say(&text);
        return Ok(());
    }
    let mut told = text::start::layouts(starts, ranking);
    if saved {
        let rank = request.place + 1;
        told.push_str(&match &request.destination {
            Destination::Nowhere if rank > 1 => {
                format!("\nLayout {rank} was not kept: give -o OUT to write it.")
            }
            Destination::Nowhere => {
                "\nNone was kept: give -o OUT to write the first, --rank N for another.".to_owned()
            }
            Destination::StandardOutput => {
                format!("\nLayout {rank} was written to standard output.")
            }
            Destination::File { path, .. } => {
                format!("\nLayout {rank} was written to {}.", path.display())
            }
        });
    }
    if aside {
        console.say(&told);
        Ok(())
    } else {
        console.print(&told)
    }
}
