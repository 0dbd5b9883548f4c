//! Arguments of `optimise`, and the methods.

use std::path::PathBuf;

use clap::{Args, ValueEnum};

use super::ProgressArgument;

/// Improve a design: move what is free until the goals are met as well as they can be.
///
/// The search is local: it goes downhill from the design as it is. It is serial and draws no
/// random numbers: the same file gives the same design, bit for bit.
#[derive(Debug, Args)]
#[command(after_help = "\
The first Ctrl-C finishes the step, saves the best so far where -o says, and
prints the summary; the second leaves at once.

Example:
  drawtube optimise configs/river-lidar-2x-6x.json -o better.json")]
pub(crate) struct OptimiseArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Where the optimised design goes; "-" is standard output, the summary then goes to standard
    /// error
    #[arg(short, long, value_name = "OUT")]
    pub(crate) output: Option<PathBuf>,
    /// Write a picture as SVG: how the merit fell, and the optimised design
    #[arg(long, value_name = "FILE")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace OUT and FILE if they are there already
    #[arg(long)]
    pub(crate) force: bool,
    /// Print the summary as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// How to go downhill
    #[arg(long, value_enum, default_value_t)]
    pub(crate) method: MethodArgument,
    /// Go on with this method where the one before stopped; may be repeated
    #[arg(long, value_enum, value_name = "METHOD")]
    pub(crate) then: Vec<MethodArgument>,
    /// Most iterations of each method [default: 1000 for least-squares, 20000 for nelder-mead]
    #[arg(long, value_name = "N")]
    pub(crate) iterations: Option<u64>,
    /// Stop as soon as the merit is this small and every limit is kept
    #[arg(long, value_name = "X", allow_negative_numbers = true)]
    pub(crate) target_merit: Option<f64>,
    /// Leave with status 3 if a goal is missed or a limit crossed at the end
    #[arg(long)]
    pub(crate) require: bool,
    /// Print no summary and no progress, only errors
    #[arg(short, long, conflicts_with = "json")]
    pub(crate) quiet: bool,
    /// How progress is told on standard error
    #[arg(long, value_enum, default_value_t, env = "DRAWTUBE_PROGRESS", value_name = "FORM")]
    pub(crate) progress: ProgressArgument,
    /// Least time between two plain lines of progress
    #[arg(long, value_name = "SECONDS", default_value_t = 10.0, allow_negative_numbers = true)]
    pub(crate) progress_every: f64,
}

/// A method by its name.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum MethodArgument {
    /// Damped least squares with exact derivatives
    #[default]
    LeastSquares,
    /// The simplex of Nelder and Mead: no derivatives, far slower
    NelderMead,
}
