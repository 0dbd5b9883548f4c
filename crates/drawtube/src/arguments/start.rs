//! Arguments of `start`.

use std::path::PathBuf;

use clap::Args;
use clap::builder::RangedU64ValueParser;

/// Begin: work out layouts that can do what a brief asks, and rank them.
///
/// Every layout is collimated and at its ratio in every zoom state and inside its limits, before
/// any optimisation. The same brief and seed give the same layouts, bit for bit.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube start configs/river-brief.json -o first.json")]
pub(crate) struct StartArguments {
    /// The brief; "-" is standard input
    pub(crate) brief: PathBuf,
    /// Where the design of a layout goes; "-" is standard output, the table then goes to standard
    /// error
    #[arg(short, long, value_name = "OUT")]
    pub(crate) output: Option<PathBuf>,
    /// Replace OUT if it is there already
    #[arg(long, requires = "output")]
    pub(crate) force: bool,
    /// Which layout of the table is written where -o says
    #[arg(long, value_name = "N", default_value_t = 1,
        value_parser = RangedU64ValueParser::<usize>::new().range(1..=1000))]
    pub(crate) rank: usize,
    /// How many layouts are told
    #[arg(long, value_name = "N", default_value_t = 5,
        value_parser = RangedU64ValueParser::<usize>::new().range(1..=1000))]
    pub(crate) most: usize,
    /// Where in the space of layouts to look: another number, other layouts
    #[arg(long, value_name = "N", default_value_t = 0)]
    pub(crate) seed: u64,
    /// Print the layouts as JSON
    #[arg(long)]
    pub(crate) json: bool,
}
