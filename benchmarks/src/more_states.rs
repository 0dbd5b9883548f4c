//! A dense Levenberg-Marquardt step costs the cube of the variables; eliminating the states does
//! not. The gap must widen with the number of zoom states.

use std::fmt::Write;

use crate::jobs::Job;
use crate::page::{Section, Verdict};
use crate::{Failure, design};

const INTRODUCTION: &str = "## The MINPACK port with more states

Three singlets with 8 to 64 states between 2x and 6x, whole optimisations as above, from the
`levenberg-marquardt` crate given our residuals and whole Jacobian. Wanted: twice the time at 8
states, more with more states.

| states | both down to | drawtube, ms | crate, ms | ratio |
|---|---|---|---|---|
";

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    for count in [8, 16, 32, 64] {
        let document = design::with_states("three-singlets", count)?;
        let mut job = Job::new("more states", design::merit_of_document("states", document)?)?;
        let matched = job.against_minpack();
        if count == 8 || count == 64 {
            let what = format!("crate over drawtube: three singlets, {count} states");
            page.verdicts.push(Verdict::at_least(what, 2.0, matched.ratio));
        }
        writeln!(
            page.text,
            "| {count} | {:.4e} | {} | {} | **{}** |",
            matched.target,
            matched.ours.scaled(1e3),
            matched.theirs.scaled(1e3),
            matched.ratio
        )?;
    }
    Ok(page)
}
