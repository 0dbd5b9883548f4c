//! How many steps the solver takes: the same on every machine, however busy; and what was tried to
//! take fewer.

use std::fmt::Write;

use driver::solve::{Outcome, Settings, Unwatched, run};
use merit_function::problem::MeritFunction;

use crate::Failure;
use crate::design::{self, DESIGNS};
use crate::page::Section;
use crate::threads::scatter;

/// Near enough to the end to compare solvers: within a hundredth of the final merit.
const WITHIN: f64 = 1.01;
/// Merits below a hundredth of a goal missed are all the same to whoever makes the lens.
const NOTHING: f64 = 1e-4;
/// Starts a design for the mean cost, and how far apart they lie.
const STARTS: usize = 15;
const APART: f64 = 1e-4;

const INTRODUCTION: &str = "## Steps

Steps tried and evaluations of the residuals alone (probes for the curvature, trials) and with the
Jacobian, from the file's start to within 1 % of the merit the solver ends at, and to that end.
`shipped` designs are those of `configs/`, all limits on. *Cost* is evaluations of the residuals, plus
three times those with the Jacobian, plus the steps tried, to within 1 % of that merit or to 1e-4:
about the time in units of one evaluation. It is the geometric mean over fifteen starts that lie a
ten-thousandth apart: one start alone says little, because rounding decides where a narrow valley is
entered.

| design | steps to 1 % | residuals | with Jacobian | steps to the end | residuals | with Jacobian | merit | cost | starts that arrive |
|---|---|---|---|---|---|---|---|---|---|
";

/// What was tried, and what came of it: kept by hand, figures from the run in which it was decided.
const TRIED: &str = include_str!("tried.md");

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    let mut designs = Vec::new();
    for measured in &DESIGNS {
        designs.push((measured.name.to_owned(), design::document(measured.name)?));
    }
    for count in [8, 64] {
        let document = design::with_states("three-singlets", count)?;
        designs.push((format!("three-singlets with {count} states"), document));
    }
    for (name, document) in design::shipped()? {
        designs.push((format!("{name}, shipped"), document));
    }
    let mut costs = Vec::new();
    for (name, document) in designs {
        costs.push(row(&mut page, &name, design::merit_of_document(&name, document)?)?);
    }
    writeln!(page.text, "\nGeometric mean of the costs: **{:.1}**.", geometric_mean(&costs))?;
    write!(page.text, "\n{TRIED}")?;
    Ok(page)
}

/// Writes a design's row; its cost.
fn row(page: &mut Section, name: &str, mut merit: MeritFunction) -> Result<f64, Failure> {
    let start = merit.variables().start().to_vec();
    let whole = run(&mut merit, &start, &Settings::default(), &mut Unwatched)?;
    let near = Settings::default().with_target(WITHIN * whole.sum_of_squares)?;
    let near = run(&mut merit, &start, &near, &mut Unwatched)?;
    let counts = |outcome: &Outcome| {
        format!("{} | {} | {}", outcome.iterations, outcome.evaluations, outcome.linearisations)
    };
    let target = (WITHIN * whole.sum_of_squares).max(NOTHING);
    let settings = Settings::default().with_target(target)?;
    let (mut costs, mut arrived) = (Vec::new(), 0);
    for number in 0..STARTS {
        let scattered = start.iter().enumerate();
        let scattered: Vec<f64> =
            scattered.map(|(j, x)| x * (1.0 + APART * scatter(number, j))).collect();
        let outcome = run(&mut merit, &scattered, &settings, &mut Unwatched)?;
        arrived += usize::from(outcome.sum_of_squares <= target);
        let Outcome { iterations, evaluations, linearisations, .. } = outcome;
        costs.push((evaluations + 3 * linearisations + iterations) as f64);
    }
    let cost = geometric_mean(&costs);
    writeln!(
        page.text,
        "| {name} | {} | {} | {:.6e} | {cost:.1} | {arrived} of {STARTS} |",
        counts(&near),
        counts(&whole),
        whole.sum_of_squares
    )?;
    Ok(cost)
}

fn geometric_mean(numbers: &[f64]) -> f64 {
    (numbers.iter().map(|number| number.ln()).sum::<f64>() / numbers.len() as f64).exp()
}
