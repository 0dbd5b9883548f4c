//! What must hold of any run folder, whatever has become of its files.
//!
//! An input is a folder in one text: a line `>>> NAME` begins the file of that name. So that
//! journals get as far as they would in a folder that was tampered with by somebody who knows how,
//! a line of a journal that is a bare entry is given its checksum; `@ASKED` stands for the hash of
//! the copy of what was asked, `@RUN` for that of the run.

use std::path::{Component, Path};

use driver::design_file::DesignFile;
use driver::overnight::{Gathering, Overnight};
use driver::run::{
    Ask, Budget, Earlier, Finished, ResultsFolder, RunDocument, RunError, RunFolder, Saving, Share,
    Survey, Tally, Watcher, perform,
};
use driver::search::{SearchProblem, SearchSettings, StartResult};
use driver::sweep::{PlanFile, Subject, Sweep, SweepGathering, SweepResults};
use report::text;
use serde_json::{Value, json};
use surface_model::document::Document;

use super::verdict::{finite, printed, quiet};

/// Digits of a journal's checksums.
const DIGITS: usize = 16;

/// Lays the folder out in `scratch`, and looks into it as `--show`, `gather` and the next session
/// would; how far that went without anything wrong with the folder.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(bytes: &[u8], scratch: &Path) -> Result<bool, String> {
    let folder = scratch.join("run");
    let _ = std::fs::remove_dir_all(&folder);
    lay_out(bytes, &folder).map_err(|error| error.to_string())?;
    let survey = match Survey::of(&folder) {
        Ok(survey) => survey,
        Err(error) => return refused(&error),
    };
    let surveys = [survey];
    let whole = match surveys[0].run.kind.as_str() {
        "sweep" => sweep(&surveys, scratch)?,
        _ => overnight(&surveys, scratch)?,
    };
    go_on(&folder, &surveys[0])?;
    Ok(whole)
}

fn refused(error: &RunError) -> Result<bool, String> {
    quiet(&error.to_string()).map(|()| false)
}

fn hash(bytes: &[u8]) -> String {
    blake3::hash(bytes).to_hex().to_string()
}

/// The files of the text, nothing outside the folder.
fn lay_out(bytes: &[u8], folder: &Path) -> std::io::Result<()> {
    let mut files: Vec<(String, Vec<u8>)> = Vec::new();
    for line in bytes.split_inclusive(|&byte| byte == b'\n') {
        match line.strip_prefix(b">>> ") {
            Some(name) => {
                files.push((String::from_utf8_lossy(name).trim_end().to_owned(), Vec::new()));
            }
            None => files.last_mut().into_iter().for_each(|(_, text)| text.extend(line)),
        }
    }
    let named = |name: &str| files.iter().find(|(other, _)| other == name);
    let asked = hash(named("asked.json").map_or(&[][..], |(_, text)| text));
    let run = named("run.json").map_or_else(Vec::new, |(_, text)| filled(text, &asked, ""));
    let identity = serde_json::from_slice(&run).map(identity).unwrap_or_default();
    std::fs::create_dir_all(folder)?;
    for (name, text) in files {
        let path = Path::new(&name);
        if path.components().any(|step| !matches!(step, Component::Normal(_))) {
            continue;
        }
        let path = folder.join(path);
        if let Some(parent) = path.parent() {
            let _ = std::fs::create_dir_all(parent);
        }
        let mut text = filled(&text, &asked, &identity);
        if name.ends_with("journal.jsonl") {
            text = text.split_inclusive(|&byte| byte == b'\n').flat_map(checked).collect();
        }
        // A name that the system does not take is no file.
        #[expect(clippy::disallowed_methods, reason = "a spoilt folder is not the program's own")]
        let _ = std::fs::write(path, text);
    }
    Ok(())
}

/// The hash that ties a journal to its run.
fn identity(run: Value) -> String {
    let told =
        ["format", "kind", "version", "seed", "settings", "parts"].map(|key| run[key].clone());
    let mut told = Value::from(told.to_vec());
    if let Value::Array(list) = &mut told {
        list.push(run["asked"]["blake3"].clone());
    }
    hash(told.to_string().as_bytes())
}

fn filled(text: &[u8], asked: &str, run: &str) -> Vec<u8> {
    match std::str::from_utf8(text) {
        Ok(text) => text.replace("@ASKED", asked).replace("@RUN", run).into_bytes(),
        Err(_) => text.to_vec(),
    }
}

/// A bare entry with its checksum; any other line as it is.
fn checked(line: &[u8]) -> Vec<u8> {
    let is_entry =
        [&b"{\"begin\""[..], b"{\"unit\"", b"{\"end\""].iter().any(|head| line.starts_with(head));
    match std::str::from_utf8(line) {
        Ok(entry) if is_entry && entry.ends_with('\n') => {
            let entry = entry.trim_end();
            let check = &hash(entry.as_bytes())[..DIGITS];
            format!("{{\"check\":\"{check}\",\"entry\":{entry}}}\n").into_bytes()
        }
        _ => line.to_vec(),
    }
}

/// As `overnight --show` and `gather` do.
fn overnight(surveys: &[Survey; 1], scratch: &Path) -> Result<bool, String> {
    let gathering = match Gathering::of(surveys, 10) {
        Ok(gathering) => gathering,
        Err(error) => return refused(&error),
    };
    let list = gathering.list();
    finite("the list", &list)?;
    printed("the list", &text::overnight::ranking(&list))?;
    printed("the falls", &text::overnight::falls(&gathering.finds().falls()))?;
    let missing = text::overnight::missing(&gathering.missing(), gathering.of_parts());
    printed("what is missing", &missing)?;
    for facts in gathering.facts().values() {
        finite("the facts", facts)?;
        printed("the time", &text::overnight::time(facts.seconds))?;
    }
    write(surveys, scratch, &list.files().map_err(|error| error.to_string())?)
}

/// As `gather` does.
fn sweep(surveys: &[Survey; 1], scratch: &Path) -> Result<bool, String> {
    let Some((plan_file, design)) = swept(&surveys[0])? else { return Ok(false) };
    let plan = match plan_file.resolve(&design) {
        Ok(plan) => plan,
        Err(complaints) => return quiet(&complaints.to_string()).map(|()| false),
    };
    let gathering = match SweepGathering::of(surveys, &plan) {
        Ok(gathering) => gathering,
        Err(error) => return refused(&error),
    };
    finite("what is missing", &gathering.missing())?;
    let results = SweepResults::new(&plan, gathering.into_points());
    finite("the results", &results)?;
    printed("the results", &text::sweep::results(&results))?;
    write(surveys, scratch, &results.files().map_err(|error| error.to_string())?)
}

fn write(
    surveys: &[Survey; 1],
    scratch: &Path,
    files: &[driver::run::ResultFile],
) -> Result<bool, String> {
    let gathered = scratch.join("gathered");
    let _ = std::fs::remove_dir_all(&gathered);
    let folder = ResultsFolder::open(&gathered, &surveys[0]);
    match folder.and_then(|folder| folder.write_results(files)) {
        Ok(()) => Ok(true),
        Err(error) => refused(&error),
    }
}

/// The plan of a sweep and what it is about.
fn swept(survey: &Survey) -> Result<Option<(PlanFile, Subject)>, String> {
    let plan = Document::parse("asked.json", &survey.asked).and_then(PlanFile::read);
    let swept = plan.and_then(|plan| {
        let about = survey.run.settings.get(plan.subject_key()).cloned().unwrap_or_default();
        let subject = plan.read_subject(Document::from_value("subject.json", about))?;
        Ok((plan, subject))
    });
    match swept {
        Ok(swept) => Ok(Some(swept)),
        Err(complaints) => quiet(&complaints.to_string()).map(|()| None),
    }
}

/// The next session, that has nothing to compute.
fn go_on(folder: &Path, survey: &Survey) -> Result<(), String> {
    let share = survey.parts.first().map_or(Share::WHOLE, |part| part.share);
    if survey.run.kind == "sweep" {
        let Some((plan_file, design)) = swept(survey)? else { return Ok(()) };
        let Ok(plan) = plan_file.resolve(&design) else { return Ok(()) };
        let ask = driver::sweep::ask(&plan_file, &design, share);
        return session(folder, &ask, |folder, budget| {
            perform(folder, &Sweep::new(plan, design, share.of()), budget, 1, &mut Quiet)
                .map(|_| ())
        });
    }
    let Ok(text) = std::str::from_utf8(&survey.asked) else { return Ok(()) };
    let settings = SearchSettings::default();
    let seed = survey.run.seed;
    let ask = driver::overnight::ask("asked.json", text, settings, seed, share);
    let file = Document::parse("asked.json", &survey.asked).and_then(DesignFile::read);
    let Ok(Ok(problem)) = file.map(|file| SearchProblem::of_design(&file, settings)) else {
        return Ok(());
    };
    session(folder, &ask, |folder, budget| {
        perform(folder, &Overnight { problem, seed }, budget, 1, &mut Quiet).map(|_| ())
    })
}

fn session(
    folder: &Path,
    ask: &Ask,
    work: impl FnOnce(&RunFolder, &Budget) -> Result<(), RunError>,
) -> Result<(), String> {
    let budget = Budget { units: Some(0), ..Budget::default() };
    match RunFolder::open(folder, ask).and_then(|folder| work(&folder, &budget)) {
        Ok(()) => Ok(()),
        Err(error) => refused(&error).map(|_| ()),
    }
}

/// Watches and says nothing.
struct Quiet;

impl<D> Watcher<D> for Quiet {
    fn earlier(&mut self, _: &Earlier) {}
    fn found(&mut self, _: Finished<D>) {}
    fn tick(&mut self, _: &Tally) {}
    fn saving(&mut self, _: Saving<'_>) {}
    fn interrupted(&self) -> bool {
        false
    }
}

/// A folder in one text, with a run of two starts about a design; a beginning for spoilt ones.
///
/// # Panics
/// The document does not become JSON.
#[must_use]
pub fn sample(design: &str, units: &[StartResult]) -> Vec<u8> {
    let run = RunDocument {
        format: "drawtube-run/1".into(),
        kind: "overnight".into(),
        version: env!("CARGO_PKG_VERSION").into(),
        seed: 0,
        settings: json!(SearchSettings::default()),
        parts: 1,
        asked: serde_json::from_value(json!({ "name": "asked.json", "blake3": "@ASKED" })).unwrap(),
    };
    let begin = json!({ "begin": { "run": "@RUN", "part": [1, 1], "units": units.len(), "target_merit": null, "unix_seconds": 1 } });
    let mut lines = vec![begin];
    for (number, done) in units.iter().enumerate() {
        lines.push(json!({ "unit": { "number": number, "seconds": 0.5, "done": done } }));
    }
    lines.push(json!({ "end": { "seconds": 1.0, "complete": true } }));
    let lines: Vec<String> = lines.iter().map(Value::to_string).collect();
    let run = serde_json::to_string_pretty(&run).unwrap();
    format!(
        ">>> run.json\n{run}\n>>> journal.jsonl\n{}\n>>> asked.json\n{design}",
        lines.join("\n")
    )
    .into_bytes()
}
