//! The global search: from a problem to many finished designs, one a *start*.
//!
//! # What a start is
//!
//! A start is a small search of its own, some tens of milliseconds long: it draws points, brings
//! them to first order, improves many a little and few a lot, and finishes the best. What comes of
//! it depends on the problem, the seed and the start's number alone, bit for bit, so starts can be
//! shared out over threads, machines and nights, interrupted and run again:
//!
//! ```text
//! let problem = SearchProblem::of_design(&file, SearchSettings::default())?;
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
//! 1. **Points** from a low-discrepancy sequence over the whole bounded range ([`template`]),
//!    some around the numbers of the file.
//! 2. **First order**: each is brought to ratio, collimation and limits by the local solver on the
//!    paraxial residuals alone, which cannot lose a ray and cost a fraction.
//! 3. **Halving**: what traces is improved by a few steps of the exact problem, the better part by
//!    more (successive halving: K. Jamieson and A. Talwalkar, AISTATS 51, 240 (2016)).
//! 4. What follows is the [`Strategy`]'s: nothing more, or hops from the best.
//! 5. **The finish** is the local solver to convergence, and an assessment of the design, whose
//!    wavefronts are integrated to convergence: that is the merit a start reports.

mod basin_hopping;
mod candidate;
mod multistart;
mod problem;
mod ranking;
mod settings;
mod shape;
mod start_result;
mod template;
#[cfg(test)]
mod tests;
mod workbench;

pub use problem::{SearchError, SearchProblem};
pub use ranking::Ranking;
pub use settings::{SearchSettings, Strategy};
pub use shape::Shape;
pub use start_result::{Found, StartResult};
