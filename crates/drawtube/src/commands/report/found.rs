//! How a design was found: from the run folder it lies in, from what `--found` names, and from its
//! own note.

use std::path::{Path, PathBuf};

use driver::design_file::DesignFile;
use driver::origin::Origin;
use merit_function::assessment::Assessment;
use report::page::Found;
use report::text::overnight::time;
use serde_json::Value;

use crate::failure::Failure;
use crate::input;

/// Numbers that belong to one design are nearer than this part of themselves.
const SAME: f64 = 1e-9;

/// What tells how designs were found.
pub(super) enum Source {
    /// A run folder.
    Run(PathBuf),
    /// What `optimise --json` printed.
    Optimisation(PathBuf, Value),
}

impl Source {
    /// A run folder, or a file that `optimise --json` printed.
    pub(super) fn of(path: PathBuf) -> Result<Self, Failure> {
        if path.is_dir() {
            return Ok(Self::Run(path));
        }
        let value = input::document(&path)?.value().clone();
        if value["format"] == "drawtube-optimisation/1" {
            Ok(Self::Optimisation(path, value))
        } else {
            Err(Failure::Argument {
                option: "--found",
                found: path.display().to_string(),
                constraint: "a run folder, or what optimise --json printed",
            })
        }
    }

    fn path(&self) -> &Path {
        match self {
            Self::Run(path) | Self::Optimisation(path, _) => path,
        }
    }

    /// What it tells of a design; nothing if the design is not from there.
    fn tell(&self, file: &DesignFile, assessment: &Assessment) -> Result<Option<Found>, Failure> {
        Ok(match self {
            Self::Run(path) => Origin::of(path, file.document().value())?
                .map(|origin| of_run(&path.display().to_string(), origin)),
            Self::Optimisation(path, told) => {
                let mine = ends_in(told, assessment);
                mine.then(|| of_optimisation(&path.display().to_string(), told))
            }
        })
    }
}

/// How each design was found.
///
/// # Errors
/// A source that none of the designs comes from.
pub(super) fn found(
    sources: &[Source],
    designs: &[(&DesignFile, &Assessment)],
) -> Result<Vec<Found>, Failure> {
    let mut all = vec![Vec::new(); designs.len()];
    for source in sources {
        let mut used = false;
        for ((file, assessment), found) in designs.iter().zip(&mut all) {
            if let Some(told) = source.tell(file, assessment)? {
                found.push(told);
                used = true;
            }
        }
        if !used {
            return Err(Failure::Argument {
                option: "--found",
                found: source.path().display().to_string(),
                constraint: "what one of these designs, as it is, came from",
            });
        }
    }
    let pairs = designs.iter().zip(all);
    Ok(pairs.map(|((file, _), told)| of_design(file, told)).collect())
}

/// What is known of one design: its file, and the sources that know it.
fn of_design(file: &DesignFile, mut told: Vec<Found>) -> Found {
    if told.is_empty() {
        told.extend(by_its_place(file));
    }
    let note = file.document().value().get("note").and_then(|note| note.as_str());
    let mut found = told.pop().unwrap_or_default();
    for more in told {
        found.settings.extend(more.settings);
        if found.runs.is_empty() {
            (found.counted, found.runs) = (more.counted, more.runs);
        }
    }
    let mut settings = vec![
        row("design file", file.label()),
        row("this page by", concat!("drawtube ", env!("CARGO_PKG_VERSION"))),
    ];
    settings.extend(note.map(|note| row("note in the file", note)));
    settings.append(&mut found.settings);
    Found { settings, ..found }
}

/// A design among the best of a run folder says by its place where it is from. A folder that
/// cannot be read is told: the page does not depend on it.
fn by_its_place(file: &DesignFile) -> Option<Found> {
    let best = Path::new(file.label()).parent().filter(|best| best.ends_with("best"))?;
    let run = best.parent().filter(|run| run.join("run.json").is_file())?;
    let name = run.display().to_string();
    match Origin::of(run, file.document().value()) {
        Ok(origin) => origin.map(|origin| of_run(&name, origin)),
        Err(error) => {
            let settings = vec![row("run folder", &format!("{name} cannot be read: {error}"))];
            Some(Found { settings, ..Found::default() })
        }
    }
}

fn row(name: &str, value: &str) -> (String, String) {
    (name.to_owned(), value.to_owned())
}

fn of_run(name: &str, origin: Origin) -> Found {
    let Origin { run, unit, called, finished, sessions, seconds, merit } = origin;
    let sessions = if sessions == 1 { "1 session".into() } else { format!("{sessions} sessions") };
    let mut settings = vec![
        row("run folder", name),
        row("search", &format!("{}, drawtube {}", run.kind, run.version)),
        row("asked about", &format!("{} (BLAKE3 {})", run.asked.name, run.asked.blake3)),
        row("seed", &run.seed.to_string()),
    ];
    let scalars = run.settings.as_object().into_iter().flatten();
    settings.extend(scalars.filter_map(|(name, value)| Some(row(name, &plain(value)?))));
    settings.push(row("found by", &format!("{called} {unit}, of {finished} finished")));
    settings.push(row("time", &format!("{} in {sessions}", time(seconds))));
    let runs = if merit.is_empty() { Vec::new() } else { vec![("best so far".to_owned(), merit)] };
    Found { settings, counted: "starts", runs }
}

/// A setting that fits a line.
fn plain(value: &Value) -> Option<String> {
    match value {
        Value::String(text) => Some(text.clone()),
        Value::Number(number) => Some(number.to_string()),
        Value::Bool(yes) => Some(if *yes { "yes" } else { "no" }.to_owned()),
        _ => None,
    }
}

/// Whether an optimisation ended in this design: its merit and its spacings.
fn ends_in(told: &Value, assessment: &Assessment) -> bool {
    let same = |told: Option<f64>, here: Option<f64>| match (told, here) {
        (Some(told), Some(here)) => (told - here).abs() <= SAME * here.abs(),
        (told, here) => told == here,
    };
    let end = &told["end"];
    let states = end["states"].as_array().map_or(&[][..], Vec::as_slice);
    let spacings = |state: &Value| -> Vec<f64> {
        let list = state["spacings_mm"].as_array().map_or(&[][..], Vec::as_slice);
        list.iter().filter_map(Value::as_f64).collect()
    };
    same(end["merit"]["total"].as_f64(), assessment.merit.total)
        && states.len() == assessment.states.len()
        && states.iter().zip(&assessment.states).all(|(told, here)| {
            let told = spacings(told);
            told.len() == here.spacings_mm.len()
                && told.iter().zip(&here.spacings_mm).all(|(&a, &b)| same(Some(a), Some(b)))
        })
}

fn of_optimisation(name: &str, told: &Value) -> Found {
    let text = |key: &str| told.get(key).and_then(plain);
    let merit = |when: &str| told[when]["merit"]["total"].as_f64();
    let mut settings = vec![row("optimisation", name)];
    settings.extend(text("version").map(|version| row("by", &format!("drawtube {version}"))));
    for (key, name) in [
        ("method", "method"),
        ("stopped", "stopped because"),
        ("iterations", "iterations"),
        ("evaluations", "evaluations"),
        ("solve_seconds", "seconds of solving"),
    ] {
        settings.extend(text(key).map(|value| row(name, &value)));
    }
    if let (Some(before), Some(after)) = (merit("start"), merit("end")) {
        settings.push(row("merit", &format!("{before:.4e}, then {after:.4e}")));
    }
    Found { settings, counted: "iteration", runs: history(told) }
}

/// The merit's history, a curve a method.
fn history(told: &Value) -> Vec<(String, Vec<(u64, f64)>)> {
    let runs = told["merit_history"].as_array().map_or(&[][..], Vec::as_slice);
    let points = |run: &Value| -> Vec<(u64, f64)> {
        let list = run["iteration_and_merit"].as_array().map_or(&[][..], Vec::as_slice);
        list.iter().filter_map(|point| Some((point[0].as_u64()?, point[1].as_f64()?))).collect()
    };
    runs.iter()
        .map(|run| (run["method"].as_str().unwrap_or_default().to_owned(), points(run)))
        .filter(|(_, points)| !points.is_empty())
        .collect()
}
