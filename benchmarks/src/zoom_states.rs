//! How time and memory of a step grow with the number of zoom states.

use std::fmt::Write;

use driver::design_file::DesignFile;
use driver::optimise::merit_of;
use driver::solve::{Settings, Unwatched, run};
use merit_function::problem::MeritFunction;
use surface_model::document::Document;

use crate::page::{Section, Verdict};
use crate::spread::{Spread, ratios};
use crate::{Failure, design, memory};

const STATES: [usize; 4] = [8, 16, 32, 64];
const STEPS: u64 = 20;
const ROUNDS: usize = 25;

const INTRODUCTION: &str = "## Zoom states

Three singlets with 8 to 64 states between 2x and 6x, the first 20 steps from the file's start: time a
step, and most memory the solver holds beyond the problem. *Bounds only*: limits on single numbers. *All
limits*: as shipped, edge thickness, track and internal focus too. Wanted: 64 states at most 9 times 8.

| limits | states | a step, µs | over 8 states | memory, kB | over 8 states |
|---|---|---|---|---|---|
";

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    for (about, all) in [("bounds only", false), ("all limits", true)] {
        let mut problems = Vec::new();
        let mut bytes = Vec::new();
        for count in STATES {
            let mut merit = problem(count, all)?;
            // Once for buffers that are kept, once to be counted.
            steps(&mut merit)?;
            let (done, solver) = memory::most_during(|| steps(&mut merit));
            done?;
            bytes.push(solver);
            problems.push(merit);
        }
        let mut seconds = vec![Vec::with_capacity(ROUNDS); STATES.len()];
        for _ in 0..ROUNDS {
            for (merit, seconds) in problems.iter_mut().zip(&mut seconds) {
                seconds.push(steps(merit)?);
            }
        }
        let last = STATES.len() - 1;
        let growth = ratios(&seconds[last], &seconds[0]);
        let what = |of: &str| format!("64 states over 8, {of}, {about}");
        page.verdicts.push(Verdict::at_most(what("time a step"), 9.0, growth));
        let growth = Spread::of(vec![bytes[last] as f64 / bytes[0] as f64]);
        page.verdicts.push(Verdict::at_most(what("memory"), 9.0, growth));
        for (i, count) in STATES.iter().enumerate() {
            writeln!(
                page.text,
                "| {about} | {count} | {} | **{}** | {:.0} | **{:.2}** |",
                Spread::of(seconds[i].clone()).scaled(1e6),
                ratios(&seconds[i], &seconds[0]),
                bytes[i] as f64 / 1e3,
                bytes[i] as f64 / bytes[0] as f64
            )?;
        }
    }
    Ok(page)
}

fn problem(states: usize, all_limits: bool) -> Result<MeritFunction, Failure> {
    let mut document = design::with_states("river-lidar-2x-6x", states)?;
    if all_limits {
        let path = design::home().join("../configs/river-lidar-2x-6x.json");
        let shipped: serde_json::Value = serde_json::from_slice(&std::fs::read(path)?)?;
        document["limits"] = shipped["limits"].clone();
        document["housing"] = shipped["housing"].clone();
    }
    let file = DesignFile::read(Document::from_value("zoom states", document))?;
    Ok(merit_of(&file)?)
}

/// Seconds a step.
fn steps(merit: &mut MeritFunction) -> Result<f64, Failure> {
    let start = merit.variables().start().to_vec();
    let settings = Settings::default().with_max_iterations(STEPS)?;
    let outcome = run(merit, &start, &settings, &mut Unwatched)?;
    Ok(outcome.time.as_secs_f64() / outcome.iterations.max(1) as f64)
}
