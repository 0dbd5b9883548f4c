//! Ten thousand systems built at random, every state of each re-adjusted.

use std::fmt::Write;
use std::time::Instant;

use driver::optimise::optimise;
use driver::solve::{Settings, Unwatched};
use driver::tolerance::{self, ToleranceSettings};

use crate::page::{Section, Verdict};
use crate::spread::Spread;
use crate::{Failure, design};

const SYSTEMS: u64 = 10_000;
const ROUNDS: usize = 3;

const INTRODUCTION: &str = "## Tolerances

`tolerance` on the river-survey lidar after its optimisation: three groups, five states, every
tolerance of the grade fine. 10 000 systems, each re-adjusted in every state and measured by exact
skew rays, on two threads. Wanted: less than 60 s.

| systems | seconds | systems a second |
|---|---|---|
";

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let start = design::load("river-lidar-2x-6x")?;
    let file = optimise(&start, &Settings::default(), &mut Unwatched)?.file;
    let settings = ToleranceSettings {
        systems: SYSTEMS,
        seed: 1,
        grade: None,
        readjusted: None,
        balance_percent: None,
    };
    let pool = rayon::ThreadPoolBuilder::new().num_threads(2).build()?;
    let mut seconds = Vec::new();
    for _ in 0..ROUNDS {
        let began = Instant::now();
        let watcher = &mut tolerance::Unwatched;
        std::hint::black_box(pool.install(|| tolerance::tolerance(&file, &settings, watcher))?);
        seconds.push(began.elapsed().as_secs_f64());
    }
    let mut page = Section::new(INTRODUCTION);
    let rate = Spread::of(seconds.iter().map(|seconds| SYSTEMS as f64 / seconds).collect());
    let seconds = Spread::of(seconds);
    writeln!(page.text, "| {SYSTEMS} | {seconds} | {rate} |")?;
    page.verdicts.push(Verdict::at_most(
        "seconds for 10 000 systems of three groups and five states".into(),
        60.0,
        seconds,
    ));
    Ok(page)
}
