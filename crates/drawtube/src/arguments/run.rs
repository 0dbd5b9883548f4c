//! What every command has that works in a run folder.

use clap::Args;

use super::ProgressArgument;

/// How a run is worked on and told.
#[derive(Debug, Args)]
pub(crate) struct RunArguments {
    /// Leave after so many minutes with status 75; run again, it goes on
    #[arg(long, value_name = "MINUTES", allow_negative_numbers = true)]
    pub(crate) time_limit: Option<f64>,
    /// Threads to compute on [default: all the machine has]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=4096))]
    pub(crate) threads: Option<u16>,
    /// Take part I of N of the run, into DIR/parts. "auto" reads I and N from the variables of a
    /// job engine, "auto/N" only I
    #[arg(long, value_name = "I/N")]
    pub(crate) part: Option<String>,
    /// Print no result and no progress, only errors
    #[arg(short, long, conflicts_with = "json")]
    pub(crate) quiet: bool,
    /// How progress is told on standard error
    #[arg(long, value_enum, default_value_t, env = "DRAWTUBE_PROGRESS", value_name = "FORM")]
    pub(crate) progress: ProgressArgument,
    /// Least time between two plain lines of progress
    #[arg(long, value_name = "SECONDS", default_value_t = 60.0, allow_negative_numbers = true)]
    pub(crate) progress_every: f64,
}
