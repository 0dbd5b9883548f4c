//! Arguments of `overnight`.

use std::path::PathBuf;

use clap::{Args, ValueEnum};

use super::RunArguments;

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

Examples:
  drawtube overnight configs/river-lidar-2x-6x.json --run night --starts 4
  drawtube overnight --run night --show --picture night.svg")]
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
    /// Seed of the random numbers
    #[arg(long, value_name = "N", default_value_t = 0)]
    pub(crate) seed: u64,
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
    /// Draw the merit against time and the best design as SVG
    #[arg(long, value_name = "FILE")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace the picture if it is there already, as in a run that goes on
    #[arg(long, requires = "picture")]
    pub(crate) force: bool,
    #[command(flatten)]
    pub(crate) run_as: RunArguments,
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
