//! The global search: merit reached against time, strategy by strategy.

use std::fmt::Write;
use std::sync::atomic::AtomicBool;
use std::time::{Duration, Instant};

use driver::design_file::DesignFile;
use driver::search::{SearchProblem, SearchSettings, Strategy};
use rayon::prelude::*;
use surface_model::document::Document;

use crate::page::{Section, Verdict};
use crate::spread::{Spread, ratios};
use crate::{Failure, design};

/// What is searched: every radius, thickness and spacing.
const SEARCHED: [&str; 3] = ["river-lidar-2x-6x", "two-colour-pairs", "four-groups-asphere"];
/// Seeds of each strategy.
const SEEDS: u64 = 5;
/// Times the merit is told at, s of one thread.
const TIMES: [f64; 6] = [0.3, 1.0, 3.0, 10.0, 30.0, 60.0];
/// Starts that are timed on one thread and on two, and how often.
const STARTS: u64 = 60;
const ROUNDS: usize = 7;

const INTRODUCTION: &str = "## Global search

Best merit reached after so many seconds of one thread: median over five seeds (worst of them). Every
radius and spacing of the design is searched throughout its range. A merit of 1 is one goal missed by
exactly its `within`. In bold the default strategy.

| design | strategy | starts a second |";

/// The section of the page; with names, only those designs.
pub(crate) fn section(names: &[&str]) -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    for time in TIMES {
        write!(page.text, " {time} s |")?;
    }
    writeln!(page.text, "\n|---|---|---|{}", "---|".repeat(TIMES.len()))?;
    let names = if names.is_empty() { &SEARCHED[..] } else { names };
    for name in names {
        for strategy in Strategy::ALL {
            eprintln!("search {name}, {}", strategy.name());
            row(&mut page, name, strategy)?;
        }
    }
    let rate = rates(&mut page)?;
    page.verdicts.push(Verdict::at_least(
        "two threads over one, starts of the global search".into(),
        1.9,
        rate,
    ));
    Ok(page)
}

fn problem(name: &str, strategy: Strategy) -> Result<SearchProblem, Failure> {
    let path = design::home().join("../configs").join(format!("{name}.json"));
    let file = DesignFile::read(Document::parse(name, &std::fs::read(path)?)?)?;
    Ok(SearchProblem::of_design(&file, SearchSettings { strategy })?)
}

/// How the best merit of a seed fell: (seconds of one thread, merit) at every improvement, and how
/// many starts were done.
struct Descent {
    improvements: Vec<(f64, f64)>,
    starts: u64,
    seconds: f64,
}

impl Descent {
    fn of(problem: &SearchProblem, seed: u64, most: Duration) -> Self {
        let never = AtomicBool::new(false);
        let began = Instant::now();
        let mut descent = Self { improvements: Vec::new(), starts: 0, seconds: 0.0 };
        let mut best = f64::INFINITY;
        while began.elapsed() < most {
            let found = problem.start(seed, descent.starts, &never).and_then(|result| result.found);
            descent.starts += 1;
            descent.seconds = began.elapsed().as_secs_f64();
            if let Some(found) = found.filter(|found| found.limits_kept && found.merit < best) {
                best = found.merit;
                descent.improvements.push((descent.seconds, best));
            }
        }
        descent
    }

    /// The best merit after so many seconds; infinite before the first.
    fn after(&self, seconds: f64) -> f64 {
        let until = self.improvements.iter().take_while(|(at, _)| *at <= seconds);
        until.last().map_or(f64::INFINITY, |&(_, merit)| merit)
    }
}

fn row(page: &mut Section, name: &str, strategy: Strategy) -> Result<(), Failure> {
    let problem = problem(name, strategy)?;
    let most = Duration::from_secs_f64(TIMES[TIMES.len() - 1]);
    let descents: Vec<Descent> =
        (1..=SEEDS).into_par_iter().map(|seed| Descent::of(&problem, seed, most)).collect();
    let rate = Spread::of(descents.iter().map(|run| run.starts as f64 / run.seconds).collect());
    let mark = if strategy == Strategy::default() { "**" } else { "" };
    write!(page.text, "| {name} | {mark}{}{mark} | {rate} |", strategy.name())?;
    for time in TIMES {
        let reached = Spread::of(descents.iter().map(|run| run.after(time)).collect());
        write!(page.text, " {} ({}) |", figure(reached.median), figure(reached.max))?;
    }
    writeln!(page.text)?;
    Ok(())
}

fn figure(merit: f64) -> String {
    if merit.is_finite() { format!("{merit:.5e}") } else { "none yet".into() }
}

/// Starts a second on two threads over one.
fn rates(page: &mut Section) -> Result<Spread, Failure> {
    let problem = problem(SEARCHED[0], Strategy::default())?;
    let pool = |threads| rayon::ThreadPoolBuilder::new().num_threads(threads).build();
    let (one, two) = (pool(1)?, pool(2)?);
    let never = AtomicBool::new(false);
    let search = || {
        let began = Instant::now();
        let starts = 0..STARTS;
        let found: Vec<_> =
            starts.into_par_iter().map(|number| problem.start(1, number, &never)).collect();
        std::hint::black_box(found);
        began.elapsed().as_secs_f64()
    };
    let (mut alone, mut shared) = (Vec::new(), Vec::new());
    for _ in 0..ROUNDS {
        alone.push(one.install(search));
        shared.push(two.install(search));
    }
    let rate = |seconds: &[f64]| {
        Spread::of(seconds.iter().map(|seconds| STARTS as f64 / seconds).collect())
    };
    let ratio = ratios(&alone, &shared);
    writeln!(
        page.text,
        "\nStarts a second of {} on one thread: {}, on two: {}; two over one: **{ratio}**.",
        SEARCHED[0],
        rate(&alone),
        rate(&shared)
    )?;
    Ok(ratio)
}
