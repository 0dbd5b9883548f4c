//! A sweep in a run folder, on one thread and on two.

use std::fmt::Write;
use std::path::{Path, PathBuf};
use std::time::Instant;

use driver::run::{Budget, Earlier, Finished, RunFolder, Saving, Share, Tally, Watcher, perform};
use driver::sweep::{PlanFile, PointResult, Subject, Sweep, ask};
use surface_model::document::Document;

use crate::page::{Section, Verdict};
use crate::spread::{Spread, meanwhile, ratios};
use crate::{Failure, design};

const ROUNDS: usize = 5;

const INTRODUCTION: &str = "## A sweep of 21 × 21 points

`configs/track-and-ratio.json`: three groups, five states, every point optimised, journal and results
written to a run folder; in turn on one thread and on two. Wanted: under 30 s on two threads, and at
least 1.9 times the points a second of one.

| points | one thread, s | two threads, s | points a second, two threads | two over one |
|---|---|---|---|---|
";

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let (seconds, points) = run(1)?;
    let (mut alone, mut shared) = (vec![seconds], Vec::new());
    for _ in 0..ROUNDS {
        shared.push(run(2)?.0);
        alone.push(run(1)?.0);
    }
    let rate = Spread::of(shared.iter().map(|seconds| points as f64 / seconds).collect());
    let ratio = ratios(&meanwhile(&alone), &shared);
    let took = Spread::of(shared.clone());
    let mut page = Section::new(INTRODUCTION);
    page.verdicts.push(Verdict::at_most(
        "sweep of 21 × 21 points on two threads, s".into(),
        30.0,
        took,
    ));
    page.verdicts.push(Verdict::at_least("sweep: two threads over one".into(), 1.9, ratio));
    writeln!(page.text, "| {points} | {} | {took} | {rate} | **{ratio}** |", Spread::of(alone))?;
    Ok(page)
}

/// Seconds of a sweep on so many threads, and its points.
fn run(threads: usize) -> Result<(f64, usize), Failure> {
    let configs = design::home().join("../configs");
    let read = |path: PathBuf| -> Result<Document, Failure> {
        Ok(Document::parse(path.display().to_string(), &std::fs::read(&path)?)?)
    };
    let plan = PlanFile::read(read(configs.join("track-and-ratio.json"))?)?;
    let design = plan.read_subject(read(configs.join(plan.subject_name()))?)?;
    let sweep = Sweep::new(plan.resolve(&design)?, design.clone(), 1);
    let points = sweep.plan().points.len();
    let place = std::env::temp_dir().join(format!("drawtube-sweep-{}", std::process::id()));
    let began = Instant::now();
    let done = in_folder(&place, &plan, &design, &sweep, threads);
    let seconds = began.elapsed().as_secs_f64();
    let _ = std::fs::remove_dir_all(&place);
    done?;
    Ok((seconds, points))
}

fn in_folder(
    place: &Path,
    plan: &PlanFile,
    design: &Subject,
    sweep: &Sweep,
    threads: usize,
) -> Result<(), Failure> {
    let folder = RunFolder::open(place, &ask(plan, design, Share::WHOLE))?;
    let budget = Budget { units: Some(sweep.plan().points.len() as u64), ..Budget::default() };
    perform(&folder, sweep, &budget, threads, &mut Unwatched)?;
    Ok(())
}

/// Watches nothing.
struct Unwatched;

impl Watcher<PointResult> for Unwatched {
    fn earlier(&mut self, _: &Earlier) {}
    fn found(&mut self, _: Finished<PointResult>) {}
    fn tick(&mut self, _: &Tally) {}
    fn saving(&mut self, _: Saving<'_>) {}
    fn interrupted(&self) -> bool {
        false
    }
}
