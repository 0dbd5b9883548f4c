//! Whole local optimisations, one thread, from the same start to the same merit.

use std::fmt::Write;

use driver::optimise::merit_of;
use driver::solve::{Outcome, Settings, Unwatched, run};
use merit_function::problem::MeritFunction;

use crate::design::{self, DESIGNS};
use crate::page::{Section, Verdict};
use crate::peers::{Program, Reached};
use crate::spread::{Spread, meanwhile, ratios};
use crate::{Failure, minpack};

/// A peer has arrived when its merit is within this of the higher of the two minima.
const WITHIN: f64 = 1.01;
/// Merits below a hundredth of a goal missed are all the same to whoever makes the lens.
const NOTHING: f64 = 1e-4;
/// First step bounds the MINPACK port is tried with.
const STEP_BOUNDS: [f64; 4] = [100.0, 10.0, 1.0, 0.1];
/// The designs on which all solvers find the same minimum.
const ALIKE: [&str; 4] = ["three-singlets", "four-singlets", "cemented-pairs", "one-mover"];
/// Our optimisations a round; their median stands against the peer's.
const OURS_A_ROUND: usize = 9;
const PEERS_A_ROUND: usize = 3;
/// A peer that takes longer than this, s, is run once a round, in fewer rounds.
const SLOW: f64 = 0.5;

/// One design, ready to be optimised.
pub(crate) struct Job {
    name: &'static str,
    merit: MeritFunction,
    start: Vec<f64>,
    ours: Outcome,
}

/// What a peer reaches at its best, and how much longer it takes to reach the same.
pub(crate) struct Match {
    peer: String,
    options: String,
    merit: f64,
    pub(crate) target: f64,
    pub(crate) ours: Spread,
    pub(crate) theirs: Spread,
    pub(crate) ratio: Spread,
}

/// The section of the page.
pub(crate) fn section(filter: &[&str]) -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    let mut minima = String::from(
        "| design | variables | drawtube | SciPy | Ceres | levenberg-marquardt crate |\n\
         |---|---|---|---|---|---|\n",
    );
    let mut times = String::from(
        "| design | peer, its best options | both down to | drawtube, ms | peer, ms | ratio |\n\
         |---|---|---|---|---|---|\n",
    );
    let programs = [Program::scipy(), Program::ceres()];
    for measured in &DESIGNS {
        if !filter.is_empty() && !filter.contains(&measured.name) {
            continue;
        }
        eprintln!("{}", measured.name);
        let mut job = Job::load(measured.name)?;
        let mut reached = Vec::new();
        for program in &programs {
            match program {
                Ok(program) => {
                    let (merit, matched) = job.against(program)?;
                    reached.push(format!("{merit:.6e}"));
                    for matched in matched {
                        times.push_str(&matched.row(job.name)?);
                        page.verdicts.extend(matched.verdict(job.name));
                    }
                }
                Err(reason) => reached.push(reason.clone()),
            }
        }
        let matched = job.against_minpack();
        times.push_str(&matched.row(job.name)?);
        page.verdicts.extend(matched.verdict(job.name));
        writeln!(
            minima,
            "| {}: {} | {} | {:.6e} | {} | {:.6e} |",
            job.name,
            measured.about,
            job.start.len(),
            job.ours.sum_of_squares,
            reached.join(" | "),
            matched.merit
        )?;
    }
    write!(page.text, "\n{minima}\n{TIMES}\n{times}")?;
    Ok(page)
}

const INTRODUCTION: &str = "## Whole local optimisations

Same residuals, same start, one thread. The first table is the merit each solver ends at when left
to itself with tolerances of 1e-15 (SciPy and Ceres: best of all options tried). The first four
designs have one minimum inside all bounds; there options named *unbounded*, which drop the bounds,
may compete. The others end on bounds. The crate knows none and solves another, easier problem there:
what it ends at is not allowed, and its times count only as a curiosity.
";

const TIMES: &str = "The second is the time to a merit both reach: 1.01 times the higher of the two
minima, or 1e-4 where that is higher. Timed inside each program around the solver alone, in turn in
the same run, ours before and after each of the peer's: median (min … max). A ratio above 1 is how
much longer the peer takes. `trf-differences` is SciPy's `least_squares` as one calls it, with the
residuals alone; its other options are given the whole Jacobian too, exact to rounding, by our NumPy
program, which is a stronger peer than NumPy with SciPy is by itself.
";

impl Match {
    /// What was wanted of it, for the designs on which all solvers find the same minimum.
    fn verdict(&self, design: &str) -> Option<Verdict> {
        let wanted = match self.peer.as_str() {
            "SciPy" => 1000.0,
            "Ceres" => 3.0,
            _ => 2.0,
        };
        let what = format!("{} ({}) over drawtube: {design}", self.peer, self.options);
        ALIKE.contains(&design).then(|| Verdict::at_least(what, wanted, self.ratio))
    }

    fn row(&self, design: &str) -> Result<String, Failure> {
        let (ours, theirs) = (self.ours.scaled(1e3), self.theirs.scaled(1e3));
        let mut row = String::new();
        writeln!(
            row,
            "| {design} | {}, {} | {:.4e} | {ours} | {theirs} | **{}** |",
            self.peer, self.options, self.target, self.ratio
        )?;
        Ok(row)
    }
}

impl Job {
    fn load(name: &'static str) -> Result<Self, Failure> {
        Self::new(name, merit_of(&design::load(name)?)?)
    }

    pub(crate) fn new(name: &'static str, mut merit: MeritFunction) -> Result<Self, Failure> {
        let start = merit.variables().start().to_vec();
        let ours = run(&mut merit, &start, &Settings::default(), &mut Unwatched)?;
        Ok(Self { name, merit, start, ours })
    }

    fn target(&self, theirs: f64) -> f64 {
        (WITHIN * theirs.max(self.ours.sum_of_squares)).max(NOTHING)
    }

    /// Median time of some of our optimisations down to `target`, s.
    fn ours(&mut self, target: f64) -> Result<f64, Failure> {
        let settings = Settings::default().with_target(target)?;
        let mut seconds = Vec::with_capacity(OURS_A_ROUND);
        for _ in 0..OURS_A_ROUND {
            let outcome = run(&mut self.merit, &self.start, &settings, &mut Unwatched)?;
            seconds.push(outcome.time.as_secs_f64());
        }
        Ok(Spread::of(seconds).median)
    }

    /// The lowest merit the program reaches, and the race: against its fastest options, and for
    /// SciPy also as one calls it, without writing a Jacobian.
    fn against(&mut self, program: &Program) -> Result<(f64, Vec<Match>), Failure> {
        let input = program.input(self.name)?;
        let mut survey = program.run(&input, 0.0, 1, &[])?;
        // Without its bounds a design that ends on them is another problem.
        survey.retain(|run| ALIKE.contains(&self.name) || !run.options.contains("unbounded"));
        let lowest = |runs: &[Reached]| runs.iter().map(|run| run.merit).fold(f64::MAX, f64::min);
        let merit = lowest(&survey);
        let target = self.target(merit);
        let arrive = survey.iter().filter(|run| run.merit <= target);
        let arrive: Vec<String> = arrive.map(|run| run.options.clone()).collect();
        let trial = program.run(&input, target, 1, &arrive)?;
        let mut raced = Vec::new();
        if let Some(best) = fastest(&trial, target) {
            raced.push((best, merit));
        }
        let plain = survey.iter().find(|run| run.options == "trf-differences");
        if let Some(plain) = plain.filter(|_| ALIKE.contains(&self.name)) {
            raced.push((plain.options.clone(), plain.merit));
        }
        let mut matches = Vec::new();
        for (options, merit) in raced {
            let target = self.target(merit);
            let known = survey.iter().find(|run| run.options == options);
            let slow = known.and_then(|run| run.seconds.first()).is_some_and(|&time| time > SLOW);
            let (rounds, repeats) = if slow { (3, 1) } else { (25, PEERS_A_ROUND) };
            let (mut ours, mut theirs) = (vec![self.ours(target)?], Vec::new());
            for _ in 0..rounds {
                let options = std::slice::from_ref(&options);
                let runs = program.run(&input, target, repeats, options)?;
                let seconds = runs.into_iter().flat_map(|run| run.seconds).collect();
                theirs.push(Spread::of(seconds).median);
                ours.push(self.ours(target)?);
            }
            matches.push(Match {
                peer: program.name.into(),
                options,
                merit,
                target,
                ratio: ratios(&theirs, &meanwhile(&ours)),
                ours: Spread::of(ours),
                theirs: Spread::of(theirs),
            });
        }
        Ok((merit, matches))
    }

    /// The race against the MINPACK port.
    pub(crate) fn against_minpack(&mut self) -> Match {
        let start = self.start.clone();
        let finals = STEP_BOUNDS.map(|step| minpack::run(&mut self.merit, &start, 0.0, step).merit);
        let merit = finals.into_iter().fold(f64::MAX, f64::min);
        let target = self.target(merit);
        let arrives = |job: &mut Self, step: f64| {
            let ended = minpack::run(&mut job.merit, &start, target, step);
            (ended.merit <= target).then_some(ended.time)
        };
        let trials = STEP_BOUNDS.map(|step| (step, arrives(self, step)));
        let best = trials
            .iter()
            .filter_map(|&(step, time)| Some((time?, step)))
            .min_by(|a, b| a.0.cmp(&b.0));
        let step = best.map_or(STEP_BOUNDS[0], |(_, step)| step);
        let (mut ours, mut theirs) = (Vec::from_iter(self.ours(target)), Vec::new());
        for _ in 0..25 {
            let times = (0..PEERS_A_ROUND)
                .map(|_| minpack::run(&mut self.merit, &start, target, step).time.as_secs_f64());
            theirs.push(Spread::of(times.collect()).median);
            ours.extend(self.ours(target));
        }
        Match {
            peer: "crate".into(),
            options: format!("step bound {step}"),
            merit,
            target,
            ratio: ratios(&theirs, &meanwhile(&ours)),
            ours: Spread::of(ours),
            theirs: Spread::of(theirs),
        }
    }
}

/// The options that arrive first.
fn fastest(runs: &[Reached], target: f64) -> Option<String> {
    let arrived = runs.iter().filter(|run| run.merit <= target);
    let time = |run: &&Reached| run.seconds.first().copied().unwrap_or(f64::INFINITY);
    arrived.min_by(|a, b| time(a).total_cmp(&time(b))).map(|run| run.options.clone())
}
