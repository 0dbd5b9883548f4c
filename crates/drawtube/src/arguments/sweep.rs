//! Arguments of `sweep`.

use std::path::PathBuf;

use clap::Args;

use super::RunArguments;

/// Optimise a design, or answer a brief, at every point of a grid or a sample.
///
/// PLAN names a design or a brief and axes: any addresses of it, with values or a range (`drawtube
/// schema plan`). Every point starts from the better of its fixed neighbours; of a brief a design
/// is searched for besides. Stopped or killed, the same command line goes on, and ends in the same
/// bytes as if it had not been, on any number of threads.
#[derive(Debug, Args)]
#[command(after_help = "\
DIR holds asked.json (a copy of the plan), run.json, journal.jsonl (what every
point came to) and, when a session ends, points.csv, points.json and the best
designs as best/01.json, … Ctrl-C and SIGTERM stop within a second, saved;
SIGUSR1 prints a line of progress. Status 3 if points could not be optimised;
that a brief has no layout at some is an answer, not a failure.

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
    /// Draw the points as SVG: a curve over one axis, a map over two, the trade that the plan asks for
    #[arg(long, value_name = "FILE", conflicts_with = "dry_run")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace the picture if it is there already, as in a run that goes on
    #[arg(long, requires = "picture")]
    pub(crate) force: bool,
    /// Print every point with its design as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// Leave with status 3 if any point misses a goal or crosses a limit
    #[arg(long)]
    pub(crate) require: bool,
    #[command(flatten)]
    pub(crate) run_as: RunArguments,
}
