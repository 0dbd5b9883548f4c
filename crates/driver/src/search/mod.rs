//! The global search: from a problem to many finished designs, one a *start*.
//!
//! # What a start is
//!
//! A start is a small search of its own, some milliseconds long: it draws points, brings
//! them to first order, improves many a little and few a lot, and finishes the best. What comes of
//! it depends on the problem, the seed and the start's number alone, bit for bit, so starts can be
//! shared out over threads, machines and nights, interrupted and run again:
//!
//! ```text
//! let problem = SearchProblem::of_brief(&brief, SearchSettings::default())?;   // or of_design(&file, …)
//! let result: Option<StartResult> = problem.start(seed, number, &interrupt);   // None: interrupted
//! ranking.insert(&result);                     // any order, any number of times
//! ranking.best(10);                            // the numbers of the best that really differ
//! ```
//!
//! [`StartResult`] is plain serde data and comes back from JSON with the same bits. It holds its
//! design as the JSON of a design file; [`Ranking`] keeps only merits and shapes, so that a hundred
//! thousand results are cheap, and names the starts whose designs are wanted.
//!
//! # How it searches
//!
//! 1. **Points** from a low-discrepancy sequence: of a design file, over the whole range of every
//!    free number, some around the file's own numbers; of a brief, over the layouts of
//!    [`start`](crate::start).
//! 2. **First order**: a design's point is brought to ratio, collimation and limits by the local
//!    solver on the paraxial residuals alone, which cannot lose a ray and cost a fraction; a
//!    brief's layouts are there already and are screened by their first-order score.
//! 3. **Halving**: what traces is improved by a few steps of the exact problem, the better part by
//!    more (successive halving: K. Jamieson and A. Talwalkar, AISTATS 51, 240 (2016)).
//! 4. What follows is the [`Strategy`]'s: nothing more, or hops from the best; differential
//!    evolution takes the place of 3. `benchmarks/` compares them; the best is the default.
//! 5. **The finish** is the local solver to convergence, and an assessment of the design, whose
//!    wavefronts are integrated to convergence: that is the merit a start reports.

mod basin_hopping;
mod brief_source;
mod candidate;
mod design_source;
mod differential_evolution;
mod ground;
mod multistart;
mod problem;
mod ranking;
mod settings;
mod shape;
mod source;
mod start_result;
#[cfg(test)]
mod tests;
mod workbench;

pub(crate) use problem::Attempt;
pub use problem::{SearchError, SearchProblem};
pub use ranking::Ranking;
pub use settings::{SearchSettings, Strategy};
pub use shape::Shape;
pub use start_result::{Found, StartResult};
