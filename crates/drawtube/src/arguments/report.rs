//! Arguments of `report`.

use std::path::PathBuf;

use clap::Args;

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
    /// Replace files that are there already
    #[arg(long)]
    pub(crate) force: bool,
}
