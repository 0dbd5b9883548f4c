//! Arguments of `tolerance`.

use std::path::PathBuf;

use clap::{Args, ValueEnum};

use super::ProgressArgument;

/// Systems that are built where nothing else is asked for, here and for a report.
pub(super) const DEFAULT_SYSTEMS: u64 = 1000;
/// The sequence of random numbers they are drawn from.
pub(super) const DEFAULT_SEED: u64 = 1;

/// Tell what a workshop's errors do to a design, and how many systems come out right.
///
/// Every system is built with errors drawn within its tolerances ("tolerances" in the design, or a
/// grade), its spacings are re-adjusted in every state as a user would, and it is judged by exact
/// skew rays against the design's goals. The same seed gives the same systems on any number of
/// threads.
#[derive(Debug, Args)]
#[command(after_help = "\
The first Ctrl-C tells what has been built so far, the second leaves at once.

Example:
  drawtube tolerance configs/survey-lidar-to-build.json --systems 200")]
pub(crate) struct ToleranceArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// How many systems are built at random
    #[arg(long, value_name = "N", default_value_t = DEFAULT_SYSTEMS)]
    pub(crate) systems: u64,
    /// Which sequence of random numbers
    #[arg(long, value_name = "N", default_value_t = DEFAULT_SEED)]
    pub(crate) seed: u64,
    /// Threads to compute on [default: all the machine has]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=4096))]
    pub(crate) threads: Option<u16>,
    /// A named set of tolerances, in place of the design's
    #[arg(long, value_enum)]
    pub(crate) grade: Option<GradeArgument>,
    /// Spacings that are re-adjusted, in place of the design's: "spacings", an address, or
    /// "none"; may be repeated
    #[arg(long, value_name = "ADDRESS")]
    pub(crate) readjust: Vec<String>,
    /// Find tolerances with this yield at least cost
    #[arg(long = "yield", value_name = "PERCENT", allow_negative_numbers = true)]
    pub(crate) wanted_yield: Option<f64>,
    /// Print the result as JSON, every tolerance in every state
    #[arg(long)]
    pub(crate) json: bool,
    /// Print what every tolerance does in every state as CSV
    #[arg(long, conflicts_with = "json")]
    pub(crate) csv: bool,
    /// List every tolerance, not only the worst
    #[arg(long, conflicts_with_all = ["json", "csv"])]
    pub(crate) all: bool,
    /// Leave with status 3 if the yield is below this
    #[arg(long, value_name = "PERCENT", allow_negative_numbers = true)]
    pub(crate) require: Option<f64>,
    /// How progress is told on standard error
    #[arg(long, value_enum, default_value_t, env = "DRAWTUBE_PROGRESS", value_name = "FORM")]
    pub(crate) progress: ProgressArgument,
    /// Least time between two plain lines of progress
    #[arg(long, value_name = "SECONDS", default_value_t = 10.0, allow_negative_numbers = true)]
    pub(crate) progress_every: f64,
}

/// A grade by its name. The values are common practice, no published source.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(crate) enum GradeArgument {
    /// What a workshop takes on without question
    Ordinary,
    /// With care
    Fine,
    /// At a price
    Finest,
}
