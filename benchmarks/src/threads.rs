//! Many independent optimisations on two threads over one.

use std::fmt::Write;
use std::time::Instant;

use driver::optimise::merit_of;
use driver::solve::{Settings, Unwatched, run};
use rayon::prelude::*;

use crate::page::{Section, Verdict};
use crate::spread::{Spread, meanwhile, ratios};
use crate::{Failure, design};

const STARTS: usize = 2000;
const ROUNDS: usize = 25;

const INTRODUCTION: &str = "## Two threads over one

2000 optimisations of the three singlets from starts a few per cent apart, shared out by rayon, in
turn on one thread and on two. Starts that cannot be traced count as done. Wanted: at least 1.9.

| starts a second, one thread | two threads | two over one |
|---|---|---|
";

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let pool = |threads| rayon::ThreadPoolBuilder::new().num_threads(threads).build();
    let (one, two) = (pool(1)?, pool(2)?);
    let (mut alone, mut shared) = (vec![one.install(search)?], Vec::new());
    for _ in 0..ROUNDS {
        shared.push(two.install(search)?);
        alone.push(one.install(search)?);
    }
    let rate = |seconds: &[f64]| {
        Spread::of(seconds.iter().map(|seconds| STARTS as f64 / seconds).collect())
    };
    let mut page = Section::new(INTRODUCTION);
    let ratio = ratios(&meanwhile(&alone), &shared);
    page.verdicts.push(Verdict::at_least(
        "two threads over one, starts a second".into(),
        1.9,
        ratio,
    ));
    writeln!(page.text, "| {} | {} | **{ratio}** |", rate(&alone), rate(&shared))?;
    Ok(page)
}

/// Optimises from every start; seconds. The sum of the merits keeps the work from being dropped.
fn search() -> Result<f64, String> {
    let file = design::load("three-singlets").map_err(|error| error.to_string())?;
    let began = Instant::now();
    let make = || merit_of(&file).map_err(|error| error.to_string());
    let merits: Result<Vec<f64>, String> = (0..STARTS)
        .into_par_iter()
        .map_init(make, |merit, number| {
            let merit = merit.as_mut().map_err(|error| error.clone())?;
            let mut start = merit.variables().start().to_vec();
            for (j, x) in start.iter_mut().enumerate() {
                *x *= 1.0 + 0.03 * scatter(number, j);
            }
            let outcome = run(merit, &start, &Settings::default(), &mut Unwatched);
            Ok(outcome.map_or(f64::INFINITY, |outcome| outcome.sum_of_squares))
        })
        .collect();
    std::hint::black_box(merits?);
    Ok(began.elapsed().as_secs_f64())
}

/// A number from −1 to 1 for each start and variable: the golden-ratio sequence.
pub(crate) fn scatter(start: usize, variable: usize) -> f64 {
    const GOLDEN: f64 = 0.618_033_988_749_894_9;
    2.0 * ((start * 31 + variable * 7 + 1) as f64 * GOLDEN).fract() - 1.0
}
