//! `gather`: the parts of a run put together.

use std::path::PathBuf;

use driver::overnight::{Gathering, MissingPart, RankedList};
use driver::run::{ResultsFolder, RunError, Survey};
use driver::sweep;
use report::text;
use serde_json::json;

use crate::arguments::GatherArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::output_file::OutputFile;

pub(crate) fn run(arguments: &GatherArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let output = output(arguments)?;
    let picture = arguments.picture.clone().map(|path| OutputFile::picture(path, arguments.force));
    let picture = picture.transpose()?;
    let surveys: Vec<Survey> =
        arguments.folders.iter().map(|path| Survey::of(path)).collect::<Result<_, RunError>>()?;
    if surveys.first().is_some_and(|survey| survey.run.kind == sweep::KIND) {
        return super::sweep::gathering::gather(
            &surveys,
            &output,
            arguments.json,
            picture.as_ref(),
            console,
        );
    }
    let gathering = Gathering::of(&surveys, usize::from(arguments.keep))?;
    let list = gathering.list();
    let missing = gathering.missing();
    if list.starts == 0 {
        tell(&list, &missing, &gathering, arguments, console)?;
        return Ok(ExitStatus::NothingToDo);
    }
    let Some(first) = surveys.first() else { return Ok(ExitStatus::NothingToDo) };
    let folder = ResultsFolder::open(&output, first)?;
    folder.write_results(&list.files().map_err(Failure::Document)?)?;
    if let Some(picture) = picture {
        super::overnight::picture::draw(&list, gathering.finds(), &picture, console)?;
    }
    tell(&list, &missing, &gathering, arguments, console)?;
    if !arguments.json {
        let told = format!("\nThe designs are in {}/best.", output.display());
        console.print(&told)?;
    }
    Ok(if missing.is_empty() { ExitStatus::Done } else { ExitStatus::Missed })
}

/// Where the list goes.
fn output(arguments: &GatherArguments) -> Result<PathBuf, Failure> {
    match (&arguments.output, arguments.folders.as_slice()) {
        (Some(output), _) => Ok(output.clone()),
        (None, [only]) => Ok(only.clone()),
        (None, several) => Err(Failure::Argument {
            option: "-o",
            found: format!("nothing, with {} folders to gather", several.len()),
            constraint: "given, so that it is clear where the list goes",
        }),
    }
}

fn tell(
    list: &RankedList,
    missing: &[MissingPart],
    gathering: &Gathering,
    arguments: &GatherArguments,
    console: &Console,
) -> Result<(), Failure> {
    if arguments.json {
        let missing = missing.iter().map(|part| {
            let MissingPart { share, starts, whole } = part;
            json!({ "part": share.to_string(), "starts": starts, "whole": whole })
        });
        return console.print_json(&json!({
            "format": "drawtube-gathering/1",
            "parts": gathering.of_parts(),
            "missing": missing.collect::<serde_json::Value>(),
            "ranking": list,
        }));
    }
    console.print(&text::overnight::ranking(list))?;
    match text::overnight::missing(missing, gathering.of_parts()) {
        told if told.is_empty() => Ok(()),
        told => console.print(&format!("\n{told}")),
    }
}
