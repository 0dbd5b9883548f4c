//! Arguments of `retune`.

use std::path::PathBuf;

use clap::Args;

/// After a change, move only what can still move.
///
/// Four stages side by side: the design as it was; after the change with nothing moved; with the
/// spacings re-adjusted, which is what a mechanic can do on the bench; and with everything else
/// that is free and not made yet. A number that is changed is a fact and no longer free.
///
/// ADDRESS is a JSON Pointer with names, VALUE is JSON or a bare word; null drops an entry, the
/// step "-" adds one to a list. A glass may be given by measured indices: 1.51947@532 (index at
/// nm, several with commas between).
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  drawtube retune configs/river-as-designed.json --change /housing/track_mm=151
  drawtube retune configs/two-colour-pairs.json --equivalents N-SF6 --most 3
  drawtube retune configs/river-as-designed.json --batch configs/river-units.csv")]
pub(crate) struct RetuneArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// What is different now; may be repeated
    #[arg(long, value_name = "ADDRESS=VALUE")]
    pub(crate) change: Vec<String>,
    /// A group or element that exists already, by name or address; may be repeated
    #[arg(long, value_name = "PART")]
    pub(crate) made: Vec<String>,
    /// Try the nearest glasses of other makers in place of this one, and rank what they come to
    #[arg(long, value_name = "GLASS", conflicts_with_all = ["tool_radii", "batch"])]
    pub(crate) equivalents: Option<String>,
    /// How many glasses are tried
    #[arg(long, value_name = "N", default_value_t = 8, requires = "equivalents")]
    pub(crate) most: usize,
    /// Move each free radius to one of this table (a column radius_mm), in the order that costs
    /// least
    #[arg(long, value_name = "LIST.csv", conflicts_with = "batch")]
    pub(crate) tool_radii: Option<PathBuf>,
    /// Give each unit of this table (a column serial, the others headed by addresses) its own
    /// spacings
    #[arg(long, value_name = "UNITS.csv", conflicts_with = "made")]
    pub(crate) batch: Option<PathBuf>,
    /// Where the design of the last stage goes, or with --batch the table of spacings; "-" is
    /// standard output, the summary then goes to standard error
    #[arg(short, long, value_name = "OUT")]
    pub(crate) output: Option<PathBuf>,
    /// Replace OUT if it is there already
    #[arg(long, requires = "output")]
    pub(crate) force: bool,
    /// Print the outcome as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// Leave with status 3 if a goal is missed or a limit crossed at the end, or in any unit
    #[arg(long)]
    pub(crate) require: bool,
}
