//! Arguments of `assess`.

use std::path::PathBuf;

use clap::Args;

/// Tell every zoom state's numbers and every limit of a design.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube assess configs/river-lidar-2x-6x.json")]
pub(crate) struct AssessArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Print the assessment as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// List every limited quantity, not only the tightest of each kind and those crossed
    #[arg(long, conflicts_with = "json")]
    pub(crate) all: bool,
    /// Write a picture as SVG: layout and wavefronts
    #[arg(long, value_name = "FILE")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace FILE if it is there already
    #[arg(long, requires = "picture")]
    pub(crate) force: bool,
    /// Leave with status 3 if a goal is missed or a limit crossed
    #[arg(long)]
    pub(crate) require: bool,
}
