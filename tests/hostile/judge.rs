//! What must hold of any file, however it is spoilt.

use std::fmt::Debug;
use std::time::{Duration, Instant};

use driver::design_file::DesignFile;
use driver::optimise::{Optimisation, merit_of, optimise};
use driver::solve::{Settings, Unwatched};
use merit_function::assessment::{Assessment, assess};
use merit_function::block::BlockProblem;
use merit_function::problem::MeritFunction;
use surface_model::document::{Complaints, Document};

/// How far a file came.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub(crate) enum Came {
    /// Refused with its places told.
    Refused,
    /// Read and assessed, but not to be optimised: a typed error said why.
    Assessed,
    /// Optimised.
    Optimised,
}

/// Longest a file may take to be read, and to be assessed and optimised, with room for a slow or
/// busy machine.
const LONGEST_READ: Duration = Duration::from_secs(2);
const LONGEST: Duration = Duration::from_secs(20);

/// Reads, assesses and optimises a file.
///
/// # Errors
/// What did not hold, as a sentence.
pub(crate) fn judge(bytes: &[u8], iterations: u64) -> Result<Came, String> {
    let began = Instant::now();
    let read = Document::parse("spoilt.json", bytes).and_then(DesignFile::read);
    holds(began.elapsed() < LONGEST_READ, || format!("read in {:?}", began.elapsed()))?;
    match read {
        Err(complaints) => refusal(&complaints).map(|()| Came::Refused),
        Ok(file) => {
            let came = design(&file, iterations)?;
            holds(began.elapsed() < LONGEST, || format!("took {:?}", began.elapsed()))?;
            Ok(came)
        }
    }
}

fn holds(truth: bool, otherwise: impl FnOnce() -> String) -> Result<(), String> {
    if truth { Ok(()) } else { Err(otherwise()) }
}

/// Every complaint has a line and a column, and nothing that upsets a terminal.
pub(crate) fn refusal(complaints: &Complaints) -> Result<(), String> {
    let json = complaints.to_json();
    let problems = json["problems"].as_array().ok_or("no list of problems")?;
    holds(!problems.is_empty(), || "refused without a complaint".into())?;
    for problem in problems {
        // What is wrong with the whole of a file has no place of its own.
        let placed = problem["line"].is_u64() && problem["column"].is_u64()
            || problem["found"] == "the text is in UTF-16"
            || problem["found"] == "the file is empty";
        holds(placed, || format!("no place: {problem}"))?;
        holds(problem["found"].as_str() != Some(""), || format!("no words: {problem}"))?;
    }
    let told = complaints.to_string();
    let quiet = told.chars().all(|c| c == '\n' || !c.is_control());
    holds(quiet, || format!("control characters: {told:?}"))?;
    holds(told.len() < 60_000, || format!("{} bytes of complaints", told.len()))
}

/// The words `NaN` and `inf` outside quotes in what `Debug` writes: unlike JSON, it hides none.
pub(crate) fn finite(what: &str, value: &impl Debug) -> Result<(), String> {
    let text = format!("{value:?}");
    let mut quoted = false;
    let mut escaped = false;
    let bare: String = text
        .chars()
        .filter(|&c| {
            let end = c == '"' && !escaped;
            escaped = quoted && c == '\\' && !escaped;
            quoted ^= end;
            !quoted && !end
        })
        .collect();
    let words = bare.split(|c: char| !c.is_alphanumeric() && c != '.');
    let bad = words.into_iter().find(|word| matches!(*word, "NaN" | "inf"));
    holds(bad.is_none(), || {
        let at = bare.find("NaN").or_else(|| bare.find("inf")).unwrap_or(0);
        format!("{what} holds {bad:?}: …{}…", &bare[at.saturating_sub(80)..bare.len().min(at + 20)])
    })
}

fn assessment(what: &str, assessment: &Assessment) -> Result<(), String> {
    finite(what, assessment)?;
    serde_json::to_string(assessment).map_err(|error| error.to_string())?;
    for state in &assessment.states {
        let null = state.positions_mm.values().find(|position| !position.is_number());
        holds(null.is_none(), || format!("{what} has a position {null:?}"))?;
        let known = state.ratio.is_some() && state.wavefront.iter().all(|w| w.rms_waves.is_some());
        holds(known || state.fault.is_some(), || format!("{what} hides a fault: {state:?}"))?;
    }
    Ok(())
}

fn design(file: &DesignFile, iterations: u64) -> Result<Came, String> {
    finite("the design", &file.design)?;
    assessment("the assessment", &assess(&file.design, &file.wishes))?;
    again("the file", file)?;
    let settings = Settings::default().with_max_iterations(iterations).unwrap();
    match optimise(file, &settings, &mut Unwatched) {
        Ok(optimised) => optimisation(file, &optimised).map(|()| Came::Optimised),
        Err(driver::optimise::OptimiseError::Result(complaints)) => {
            Err(format!("the numbers found make no design: {complaints}"))
        }
        Err(error) => {
            holds(!error.to_string().is_empty(), || "an error without words".into())?;
            Ok(Came::Assessed)
        }
    }
}

/// The text of a file reads as the same design.
fn again(what: &str, file: &DesignFile) -> Result<(), String> {
    let text = file.text();
    let read = Document::parse("again.json", text.as_bytes()).and_then(DesignFile::read);
    let read = read.map_err(|complaints| format!("{what} does not read again: {complaints}"))?;
    holds(format!("{:?}", read.design) == format!("{:?}", file.design), || {
        format!("{what} reads as another design")
    })
}

/// Sum of squares and the limits' rows at some values of the variables.
fn evaluated(merit: &mut MeritFunction, variables: &[f64]) -> Option<(f64, bool)> {
    let mut residuals = vec![0.0; merit.shape().residuals()];
    merit.residuals(variables, &mut residuals).ok()?;
    let mut rows = Vec::new();
    merit.limits(variables, &mut rows).ok()?;
    let kept = rows.iter().all(|&row| row >= 0.0);
    Some((residuals.iter().map(|r| r * r).sum(), kept))
}

fn optimisation(file: &DesignFile, optimised: &Optimisation) -> Result<(), String> {
    let report = &optimised.report;
    finite("the report", report)?;
    assessment("the assessment at the end", &report.end)?;
    again("the optimised file", &optimised.file)?;

    let mut merit = merit_of(file).map_err(|error| error.to_string())?;
    let start = merit.variables().start().to_vec();
    let after = merit_of(&optimised.file).map_err(|error| format!("afterwards: {error}"))?;
    let end = after.variables().start().to_vec();
    let bounds = merit.bounds().to_vec();
    let within = start.iter().zip(&bounds).all(|(x, bound)| *x >= bound.low && *x <= bound.high);
    for (number, (&x, bound)) in end.iter().zip(&bounds).enumerate() {
        // A curvature goes through its reciprocal to the file and back; a travel's start is told
        // by no number of the file.
        let slack = 4.0 * f64::EPSILON * x.abs();
        let inside = x >= bound.low - slack && x <= bound.high + slack;
        holds(inside, || format!("variable {number} is {x:e}, out of {bound:?}"))?;
    }
    let total = report.end.merit.total;
    let Some((before, feasible)) = evaluated(&mut merit, &start) else {
        return holds(total.is_some(), || "brought in, but cannot be evaluated".into());
    };
    let (now, _) = evaluated(&mut merit, &end).ok_or("the end cannot be evaluated")?;
    holds(now.is_finite(), || format!("the merit ends at {now}"))?;
    if within && feasible {
        holds(now <= before * (1.0 + 1e-9) + 1e-12, || format!("from {before:e} up to {now:e}"))?;
    }
    Ok(())
}
