//! Arguments of `gather`.

use std::path::PathBuf;

use clap::Args;

/// Put the parts of an overnight run or a sweep together into what one machine would have found.
///
/// DIR is a run folder with one or more parts in it, or several of them with a part each. Neither
/// their order nor a part that is there twice makes a difference.
#[derive(Debug, Args)]
#[command(after_help = "\
Parts that are missing or not finished are listed, ready to be submitted again,
and the status is 3.

Example:
  drawtube gather night -o all")]
pub(crate) struct GatherArguments {
    /// Run folders of the same run
    #[arg(required = true, value_name = "DIR")]
    pub(crate) folders: Vec<PathBuf>,
    /// Folder for the list [default: DIR, if there is only one]
    #[arg(short, long, value_name = "OUT")]
    pub(crate) output: Option<PathBuf>,
    /// Designs in the list
    #[arg(long, value_name = "N", default_value_t = 10,
        value_parser = clap::value_parser!(u16).range(1..=99))]
    pub(crate) keep: u16,
    /// Draw the result as SVG, as `overnight` and `sweep` do
    #[arg(long, value_name = "FILE")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace the picture if it is there already
    #[arg(long, requires = "picture")]
    pub(crate) force: bool,
    /// Print the list as JSON
    #[arg(long)]
    pub(crate) json: bool,
}
