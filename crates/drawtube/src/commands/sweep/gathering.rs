//! The parts of a sweep put together.

use std::path::Path;

use driver::run::{ResultsFolder, Survey};
use driver::sweep::{PlanFile, SweepGathering, SweepResults};
use report::text;
use serde_json::json;
use surface_model::document::Document;

use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::output_file::OutputFile;

/// Puts together what the surveys hold, writes it into the folder at `output`, and prints it.
pub(crate) fn gather(
    surveys: &[Survey],
    output: &Path,
    as_json: bool,
    picture: Option<&OutputFile>,
    console: &Console,
) -> Result<ExitStatus, Failure> {
    let Some(first) = surveys.first() else { return Ok(ExitStatus::NothingToDo) };
    let plan_file = PlanFile::read(Document::parse(first.run.asked.name.as_str(), &first.asked)?)?;
    let about = first.run.settings.get(plan_file.subject_key()).cloned().unwrap_or_default();
    let subject = plan_file.read_subject(Document::from_value(plan_file.subject_name(), about))?;
    let plan = plan_file.resolve(&subject)?;
    let gathering = SweepGathering::of(surveys, &plan)?;
    let (of, missing) = (gathering.of_parts(), gathering.missing());
    let results = SweepResults::new(&plan, gathering.into_points());
    if results.points.is_empty() {
        console.say("drawtube: no point is finished yet");
        return Ok(ExitStatus::NothingToDo);
    }
    let folder = ResultsFolder::open(output, first)?;
    folder.write_results(&results.files().map_err(Failure::Table)?)?;
    if let Some(output) = picture {
        super::draw(&results, output, console)?;
    }
    if as_json {
        let parts = missing
            .iter()
            .map(|(share, points)| json!({ "part": share.to_string(), "points": points }));
        console.print_json(&json!({
            "format": "drawtube-gathering/1",
            "parts": of,
            "missing": parts.collect::<serde_json::Value>(),
            "sweep": results,
        }))?;
    } else {
        let lines = missing
            .iter()
            .map(|(share, points)| format!("--part {share}  {points} points missing"));
        let missing: Vec<String> = lines.collect();
        let told = text::sweep::results(&results);
        console.print(&[vec![told], missing].concat().join("\n"))?;
    }
    let complete = missing.is_empty() && results.failed == 0;
    Ok(if complete { ExitStatus::Done } else { ExitStatus::Missed })
}
