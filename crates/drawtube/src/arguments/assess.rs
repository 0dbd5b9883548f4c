//! Arguments of `assess`.

use std::path::PathBuf;

use clap::Args;

/// Tell every zoom state's numbers and every limit of a design.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube assess configs/river-lidar-2x-6x.json
  drawtube assess configs/gorge-lidar-pulsed.json --beam --ranges-m 100,1000
  drawtube assess configs/gorge-lidar-pulsed.json --hazards")]
pub(crate) struct AssessArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Print the assessment as JSON: everything, whatever else is asked to be printed
    #[arg(long)]
    pub(crate) json: bool,
    /// List every limited quantity, not only the tightest of each kind and those crossed
    #[arg(long)]
    pub(crate) all: bool,
    /// Write a picture as SVG: layout and wavefronts
    #[arg(long, value_name = "FILE")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace FILE if it is there already
    #[arg(long, requires = "picture")]
    pub(crate) force: bool,
    /// Print all about the real beam instead: as it leaves, far off, at every surface, re-adjusted
    #[arg(long, conflicts_with = "all")]
    pub(crate) beam: bool,
    /// Print all about hazards instead: every surface, focus and ghost
    #[arg(long, conflicts_with_all = ["all", "beam"])]
    pub(crate) hazards: bool,
    /// Distances behind the last vertex to tell the real beam's diameter at, in m
    #[arg(
        long,
        value_name = "M",
        value_delimiter = ',',
        value_parser = range_m,
        allow_negative_numbers = true,
        conflicts_with_all = ["all", "hazards"]
    )]
    pub(crate) ranges_m: Vec<f64>,
    /// Tell also what the design does at these temperatures, °C, untouched and re-adjusted; it is
    /// drawn at 20
    #[arg(
        long,
        value_name = "C",
        num_args = 1..,
        value_delimiter = ',',
        allow_negative_numbers = true
    )]
    pub(crate) temperatures_c: Vec<f64>,
    /// Leave with status 3 if a goal is missed or a limit crossed
    #[arg(long)]
    pub(crate) require: bool,
}

/// Longest range taken, m.
const LONGEST_RANGE_M: f64 = 1e9;

fn range_m(text: &str) -> Result<f64, String> {
    match text.parse() {
        Ok(range_m) if (0.0..=LONGEST_RANGE_M).contains(&range_m) => Ok(range_m),
        _ => Err(format!("a range is a number of metres from 0 to {LONGEST_RANGE_M}")),
    }
}
