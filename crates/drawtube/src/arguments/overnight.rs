//! Arguments of `overnight`.

use std::path::PathBuf;

use clap::{Args, ValueEnum};

use super::ProgressArgument;

/// Search for designs for hours, in a run folder that survives anything.
///
/// The search is made of numbered starts; what a start finds depends on the file, the seed and its
/// number alone. Stopped or killed, the same command line goes on, and ends in the same bytes as if
/// it had not been, on any number of threads. Without --starts, --hours or --target-merit it
/// searches until it is stopped.
#[derive(Debug, Args)]
#[command(after_help = "\
DIR holds asked.json (a copy of the file), run.json, journal.jsonl (what every
start found) and, when a session ends, the best designs as best/01.json, … with
their list in ranking.json. Ctrl-C and SIGTERM stop within a second, saved;
SIGUSR1 prints a line of progress.

Example:
  drawtube overnight configs/river-lidar-2x-6x.json --run night --starts 4")]
pub(crate) struct OvernightArguments {
    /// The design or brief; "-" is standard input
    #[arg(required_unless_present = "show")]
    pub(crate) asked: Option<PathBuf>,
    /// The run folder; it is made if it is not there
    #[arg(long, value_name = "DIR")]
    pub(crate) run: PathBuf,
    /// Starts of the whole run, all parts and sessions together
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(1..))]
    pub(crate) starts: Option<u64>,
    /// Hours of the run, all sessions together; when they are used up, the run is done
    #[arg(long, value_name = "H", allow_negative_numbers = true)]
    pub(crate) hours: Option<f64>,
    /// The run is done when a start reaches this merit with every limit kept
    #[arg(long, value_name = "X", allow_negative_numbers = true)]
    pub(crate) target_merit: Option<f64>,
    /// Leave after so many minutes with status 75; run again, it goes on
    #[arg(long, value_name = "MINUTES", allow_negative_numbers = true)]
    pub(crate) time_limit: Option<f64>,
    /// Seed of the random numbers
    #[arg(long, value_name = "N", default_value_t = 0)]
    pub(crate) seed: u64,
    /// Threads to compute on [default: all the machine has]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=4096))]
    pub(crate) threads: Option<u16>,
    /// Take part I of N: every N-th start, into DIR/parts. "auto" reads I and N from the variables
    /// of a job engine, "auto/N" only I
    #[arg(long, value_name = "I/N")]
    pub(crate) part: Option<String>,
    /// How a start searches
    #[arg(long, value_enum, default_value_t)]
    pub(crate) strategy: StrategyArgument,
    /// Designs in the list
    #[arg(long, value_name = "N", default_value_t = 10,
        value_parser = clap::value_parser!(u16).range(1..=99))]
    pub(crate) keep: u16,
    /// Print the state of the run in DIR, at work or ended, and do nothing else
    #[arg(long, conflicts_with_all = ["asked", "starts", "hours", "target_merit", "time_limit",
        "threads", "part", "quiet"])]
    pub(crate) show: bool,
    /// Print the state as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// Print no list and no progress, only errors
    #[arg(short, long, conflicts_with = "json")]
    pub(crate) quiet: bool,
    /// How progress is told on standard error
    #[arg(long, value_enum, default_value_t, env = "DRAWTUBE_PROGRESS", value_name = "FORM")]
    pub(crate) progress: ProgressArgument,
    /// Least time between two plain lines of progress
    #[arg(long, value_name = "SECONDS", default_value_t = 60.0, allow_negative_numbers = true)]
    pub(crate) progress_every: f64,
}

/// A strategy by its name.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum StrategyArgument {
    /// Many points, the better ones improved further
    #[default]
    Multistart,
    /// Shake the best point of a start and improve it again
    BasinHopping,
    /// Cross points with each other and keep the better ones
    DifferentialEvolution,
}
