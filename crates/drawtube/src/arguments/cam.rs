//! Arguments of `cam`.

use std::path::PathBuf;

use clap::Args;

/// Work out the movement curves: where every group stands at any ratio.
///
/// Between the designed states the positions hold ratio and collimation on exact rays, followed
/// from state to state. Collisions, limits crossed, goals missed, reversals and slopes steeper
/// than allowed are told, and where no continuous movement leads from one state to the next.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube cam configs/river-lidar-2x-6x.json --ratios 9
  drawtube cam configs/river-lidar-2x-6x.json --step 0.5 --barrel-radius-mm 16")]
pub(crate) struct CamArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Number of ratios told, in equal steps; those of the states are told as well [default: 21]
    #[arg(long, value_name = "N", conflicts_with = "step", value_parser = count)]
    pub(crate) ratios: Option<usize>,
    /// Step between two ratios told
    #[arg(long, value_name = "X", allow_negative_numbers = true)]
    pub(crate) step: Option<f64>,
    /// Write the curves as CSV, for the cam maker or the stepper; "-" is standard output, the
    /// table then goes to standard error
    #[arg(long, value_name = "OUT")]
    pub(crate) csv: Option<PathBuf>,
    /// Write a picture as SVG
    #[arg(long, value_name = "FILE")]
    pub(crate) picture: Option<PathBuf>,
    /// Replace files that are there already
    #[arg(long)]
    pub(crate) force: bool,
    /// Radius of a barrel that turns in proportion to the ratio: tells groove angles
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    pub(crate) barrel_radius_mm: Option<f64>,
    /// How far it turns from the smallest to the largest ratio [default: 180]
    #[arg(long, value_name = "DEG", requires = "barrel_radius_mm", allow_negative_numbers = true)]
    pub(crate) barrel_turn_deg: Option<f64>,
    /// Steepest slope allowed, mm a unit of ratio
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    pub(crate) steepest_mm: Option<f64>,
    /// Largest pressure angle allowed
    #[arg(long, value_name = "DEG", requires = "barrel_radius_mm", allow_negative_numbers = true)]
    pub(crate) steepest_deg: Option<f64>,
    /// Print the curves as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// Leave with status 3 if anything along the curve is wrong
    #[arg(long)]
    pub(crate) require: bool,
}

fn count(text: &str) -> Result<usize, &'static str> {
    text.parse().map_err(|_| {
        "it counts the ratios told, in a whole number; --step sets the way from one to the next"
    })
}
