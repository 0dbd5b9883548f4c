//! Arguments of `report`.

use std::path::PathBuf;

use clap::Args;
use driver::tolerance::MOST_SYSTEMS;

use super::tolerance::{DEFAULT_SEED, DEFAULT_SYSTEMS};

/// Write one self-contained page about a design, or about several side by side.
///
/// The page needs no network and prints on A4. `--sheets` writes what a shop needs instead or as
/// well: one sheet an element, and the same as tables.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube report configs/river-lidar-2x-6x.json -o report.html")]
pub(crate) struct ReportArguments {
    /// The designs; "-" is standard input
    #[arg(required = true, value_name = "DESIGN")]
    pub(crate) designs: Vec<PathBuf>,
    /// Where the page goes; "-" is standard output
    #[arg(short, long, value_name = "OUT", required_unless_present = "sheets")]
    pub(crate) output: Option<PathBuf>,
    /// Folder for the shop's sheets, HTML for A4, and tables, CSV; of one design
    #[arg(long, value_name = "DIR")]
    pub(crate) sheets: Option<PathBuf>,
    /// What a design came from: a run folder, or what optimise --json printed; may be repeated. A
    /// design in a run folder's "best" needs none
    #[arg(long, value_name = "RUN", requires = "output")]
    pub(crate) found: Vec<PathBuf>,
    /// How many systems are built at random, where a design has tolerances
    #[arg(long, value_name = "N", default_value_t = DEFAULT_SYSTEMS,
        value_parser = clap::value_parser!(u64).range(1..=MOST_SYSTEMS))]
    pub(crate) systems: u64,
    /// Which sequence of random numbers
    #[arg(long, value_name = "N", default_value_t = DEFAULT_SEED)]
    pub(crate) seed: u64,
    /// Replace files that are there already
    #[arg(long)]
    pub(crate) force: bool,
}
