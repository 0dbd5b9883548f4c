//! Arguments of `sweep`.

use std::path::PathBuf;

use clap::Args;

use super::ProgressArgument;

/// Optimise a design at every point of a grid or a sample.
///
/// PLAN names a design and axes: any addresses of it, with values or a range (`drawtube schema
/// plan`). Every point starts from the better of its fixed neighbours. Stopped or killed, the same
/// command line goes on, and ends in the same bytes as if it had not been, on any number of
/// threads.
#[derive(Debug, Args)]
#[command(after_help = "\
DIR holds asked.json (a copy of the plan), run.json, journal.jsonl (what every
point came to) and, when a session ends, points.csv, points.json and the best
designs as best/01.json, … Ctrl-C and SIGTERM stop within a second, saved;
SIGUSR1 prints a line of progress. Status 3 if points could not be optimised.

Examples:
  drawtube sweep configs/track-and-ratio.json --dry-run
  drawtube sweep configs/exit-glass.json --run glasses")]
pub(crate) struct SweepArguments {
    /// The plan; "-" is standard input
    pub(crate) plan: PathBuf,
    /// The run folder; it is made if it is not there
    #[arg(long, value_name = "DIR", required_unless_present = "dry_run")]
    pub(crate) run: Option<PathBuf>,
    /// List the points and do nothing else
    #[arg(long, conflicts_with_all = ["run", "time_limit", "threads", "part", "quiet"])]
    pub(crate) dry_run: bool,
    /// Leave after so many minutes with status 75; run again, it goes on
    #[arg(long, value_name = "MINUTES", allow_negative_numbers = true)]
    pub(crate) time_limit: Option<f64>,
    /// Threads to compute on [default: all the machine has]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=4096))]
    pub(crate) threads: Option<u16>,
    /// Take part I of N: every N-th point, into DIR/parts. "auto" reads I and N from the variables
    /// of a job engine, "auto/N" only I
    #[arg(long, value_name = "I/N")]
    pub(crate) part: Option<String>,
    /// Draw the points as SVG: a curve over one axis, a map over two, the trade that the plan asks for
    #[arg(long, value_name = "FILE", conflicts_with = "dry_run")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace the picture if it is there already
    #[arg(long, requires = "picture")]
    pub(crate) force: bool,
    /// Print every point with its design as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// Leave with status 3 if any point misses a goal or crosses a limit
    #[arg(long)]
    pub(crate) require: bool,
    /// Print no table and no progress, only errors
    #[arg(short, long, conflicts_with = "json")]
    pub(crate) quiet: bool,
    /// How progress is told on standard error
    #[arg(long, value_enum, default_value_t, env = "DRAWTUBE_PROGRESS", value_name = "FORM")]
    pub(crate) progress: ProgressArgument,
    /// Least time between two plain lines of progress
    #[arg(long, value_name = "SECONDS", default_value_t = 60.0, allow_negative_numbers = true)]
    pub(crate) progress_every: f64,
}
