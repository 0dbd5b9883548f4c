//! The global search: merit reached against time, strategy by strategy.

use std::fmt::Write;
use std::sync::atomic::AtomicBool;
use std::time::{Duration, Instant};

use driver::brief::BriefFile;
use driver::design_file::DesignFile;
use driver::search::{SearchProblem, SearchSettings, Strategy};
use rayon::prelude::*;
use surface_model::document::Document;

use crate::page::{Section, Verdict};
use crate::spread::{Spread, meanwhile, ratios};
use crate::{Failure, design};

/// What is searched: the shipped briefs, and a design with several valleys.
const SEARCHED: [&str; 4] = ["river-brief", "two-colour-brief", "quay-brief", "two-colour-pairs"];
/// Seeds of each strategy.
const SEEDS: u64 = 5;
/// Times the merit is told at, s of one thread.
const TIMES: [f64; 5] = [0.3, 1.0, 2.0, 5.0, 10.0];
/// Starts that are timed on one thread and on two, and how often.
const STARTS: u64 = 40;
const ROUNDS: usize = 5;

const INTRODUCTION: &str = "## Global search

Best merit reached after so many seconds of one thread, two runs side by side: median over five seeds
(worst of them). Of the briefs everything is searched that they leave open; of the design, every radius
and spacing throughout its range. A merit of 1 is one goal missed by exactly its `within`; below 1e-9
the search gains nothing more. In bold the default strategy. The last column is the worst seed over the
best merit that any strategy and seed of the run reached; wanted for three singlet groups at five
ratios: at most 1.01.

| searched | strategy | starts a second |";

/// The section of the page; with names, only those designs.
pub(crate) fn section(names: &[&str]) -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    for time in TIMES {
        write!(page.text, " {time} s |")?;
    }
    writeln!(page.text, " worst over best |\n|---|---|---|{}---|", "---|".repeat(TIMES.len()))?;
    let names = if names.is_empty() { &SEARCHED[..] } else { names };
    for name in names {
        let mut runs = Vec::with_capacity(Strategy::ALL.len());
        for strategy in Strategy::ALL {
            eprintln!("search {name}, {}", strategy.name());
            runs.push((strategy, descents(name, strategy)?));
        }
        let merits = runs.iter().flat_map(|(_, descents)| descents).map(Descent::end);
        let best = merits.fold(f64::INFINITY, f64::min);
        for (strategy, descents) in &runs {
            row(&mut page, name, *strategy, descents, best)?;
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

/// The search over a shipped brief or design.
fn problem(name: &str, strategy: Strategy) -> Result<SearchProblem, Failure> {
    let path = design::home().join("../configs").join(format!("{name}.json"));
    let document = Document::parse(name, &std::fs::read(path)?)?;
    let settings = SearchSettings { strategy };
    Ok(if name.ends_with("-brief") {
        SearchProblem::of_brief(&BriefFile::read(document)?, settings)?
    } else {
        SearchProblem::of_design(&DesignFile::read(document)?, settings)?
    })
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

    /// The best merit of all.
    fn end(&self) -> f64 {
        self.after(f64::INFINITY)
    }

    /// The best merit after so many seconds; infinite before the first.
    fn after(&self, seconds: f64) -> f64 {
        let until = self.improvements.iter().take_while(|(at, _)| *at <= seconds);
        until.last().map_or(f64::INFINITY, |&(_, merit)| merit)
    }
}

fn descents(name: &str, strategy: Strategy) -> Result<Vec<Descent>, Failure> {
    let problem = problem(name, strategy)?;
    let most = Duration::from_secs_f64(TIMES[TIMES.len() - 1]);
    let two = rayon::ThreadPoolBuilder::new().num_threads(2).build()?;
    Ok(two.install(|| {
        let seeds: Vec<u64> = (1..=SEEDS).collect();
        let seeds = seeds.into_par_iter().with_max_len(1);
        seeds.map(|seed| Descent::of(&problem, seed, most)).collect()
    }))
}

fn row(
    page: &mut Section,
    name: &str,
    strategy: Strategy,
    descents: &[Descent],
    best: f64,
) -> Result<(), Failure> {
    let rate = Spread::of(descents.iter().map(|run| run.starts as f64 / run.seconds).collect());
    let default = strategy == Strategy::default();
    let mark = if default { "**" } else { "" };
    write!(page.text, "| {name} | {mark}{}{mark} | {rate} |", strategy.name())?;
    for time in TIMES {
        let reached = Spread::of(descents.iter().map(|run| run.after(time)).collect());
        write!(page.text, " {} ({}) |", figure(reached.median), figure(reached.max))?;
    }
    let ends = Spread::of(descents.iter().map(|run| run.end() / best).collect());
    writeln!(page.text, " {:.4} |", ends.max)?;
    if default && name == SEARCHED[0] {
        let what = format!("merit of the worst of five seeds over the best, {name}");
        page.verdicts.push(Verdict::at_most(what, 1.01, Spread::of(vec![ends.max])));
    }
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
    let (mut alone, mut shared) = (vec![one.install(search)], Vec::new());
    for _ in 0..ROUNDS {
        shared.push(two.install(search));
        alone.push(one.install(search));
    }
    let rate = |seconds: &[f64]| {
        Spread::of(seconds.iter().map(|seconds| STARTS as f64 / seconds).collect())
    };
    let ratio = ratios(&meanwhile(&alone), &shared);
    writeln!(
        page.text,
        "\nStarts a second of {} on one thread: {}, on two: {}; two over one: **{ratio}**.",
        SEARCHED[0],
        rate(&alone),
        rate(&shared)
    )?;
    Ok(ratio)
}
