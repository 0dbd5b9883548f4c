//! What must hold of any design file, however it is spoilt.

use std::time::{Duration, Instant};

use driver::design_file::DesignFile;
use driver::optimise::{Optimisation, merit_of, optimise};
use driver::solve::{Settings, Unwatched};
use merit_function::assessment::{Assessment, assess};
use merit_function::block::BlockProblem;
use merit_function::problem::MeritFunction;
use surface_model::document::Document;

use super::verdict::{finite, holds, refusal};

/// How far a file came.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Came {
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
pub fn judge(bytes: &[u8], iterations: u64) -> Result<Came, String> {
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
