//! Residuals, limits and all their derivatives, over residuals and limits alone.

use std::fmt::Write;
use std::time::Duration;

use merit_function::block::{BlockProblem, Linearisation};
use merit_function::problem::MeritFunction;
use serde_json::{Value, json};

use crate::page::{Section, Verdict};
use crate::spread::{Spread, interleaved, ratios};
use crate::{Failure, design};

const INTRODUCTION: &str = "## Residuals and whole Jacobian over residuals alone

Time of `linearise` over time of `residuals` at the start, in turn. `linearise` gives limits and their
gradients as well: of a design *as shipped*, whose limits are more than single numbers, it is held
against `residuals` and `limits` together, which is what the solver works out to try a step. Wanted:
at most 4.

| problem | variables | residuals | limits | alone, µs | with all derivatives, µs | ratio |
|---|---|---|---|---|---|---|
";

/// After the name of a design all of whose limits are on.
const AS_SHIPPED: &str = " as shipped, all limits";

/// The problems, by what they are.
fn problems() -> Result<Vec<(String, MeritFunction)>, Failure> {
    let make =
        |about: &str, document| Ok((about.to_owned(), design::merit_of_document(about, document)?));
    let mut problems: Vec<(String, MeritFunction)> = [
        make("three singlets, 5 states", design::document("river-lidar-2x-6x")?),
        make("three singlets, 27 states", design::with_states("river-lidar-2x-6x", 27)?),
        make("cemented pairs with thicknesses and conics, 18 states", many_shapes()?),
        make("four groups, an asphere, 3 states", design::document("four-groups-asphere")?),
    ]
    .into_iter()
    .collect::<Result<_, Failure>>()?;
    for (name, document) in design::shipped()? {
        let about = format!("{name}{AS_SHIPPED}");
        let merit = design::merit_of_document(&about, document)?;
        problems.push((about, merit));
    }
    Ok(problems)
}

/// The cemented pairs with 24 shared variables: radii, thicknesses and conic constants.
fn many_shapes() -> Result<Value, Failure> {
    let mut document = design::document("two-colour-pairs")?;
    let states = design::between_states(&document["states"], 18).ok_or("unknown states")?;
    document["states"] = states;
    document["free"] = json!(["radii", "spacings", "thicknesses", "conics"]);
    let groups = document["groups"].as_array_mut().ok_or("no groups")?;
    for group in groups {
        let conic = json!({ "conic": -0.1 });
        group["elements"][0]["shapes"] = json!([conic, conic, conic]);
    }
    Ok(document)
}

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    for (about, mut merit) in problems()? {
        let shape = merit.shape().clone();
        let start = merit.variables().start().to_vec();
        let mut residuals = vec![0.0; shape.residuals()];
        let mut linear = Linearisation::zeros(&shape);
        merit.residuals(&start, &mut residuals)?;
        merit.linearise(&start, &mut linear)?;
        let with_limits = about.contains(AS_SHIPPED);
        let merit = std::cell::RefCell::new(merit);
        let mut limits = Vec::new();
        let mut alone = || {
            let mut merit = merit.borrow_mut();
            let _ = merit.residuals(std::hint::black_box(&start), &mut residuals);
            if with_limits {
                let _ = merit.limits(std::hint::black_box(&start), &mut limits);
            }
        };
        let mut whole = || {
            let _ = merit.borrow_mut().linearise(std::hint::black_box(&start), &mut linear);
        };
        let times = interleaved(25, Duration::from_millis(15), &mut [&mut alone, &mut whole]);
        let micro = |seconds: &Vec<f64>| Spread::of(seconds.clone()).scaled(1e6);
        let ratio = ratios(&times[1], &times[0]);
        let alone = if with_limits { "residuals and limits" } else { "residuals" };
        let what = format!("{alone} and their derivatives over {alone}: {about}");
        page.verdicts.push(Verdict::at_most(what, 4.0, ratio));
        writeln!(
            page.text,
            "| {about} | {} | {} | {} | {} | {} | **{}** |",
            shape.variables(),
            shape.residuals(),
            linear.limits.len(),
            micro(&times[0]),
            micro(&times[1]),
            ratio
        )?;
    }
    Ok(page)
}
