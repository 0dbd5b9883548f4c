//! Arguments of `trace`.

use std::path::PathBuf;

use clap::Args;

/// Follow one exact ray through a design, surface by surface.
///
/// The ray starts in the plane through the first vertex, parallel to the axis unless told
/// otherwise.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube trace configs/river-lidar-2x-6x.json --state 6x --height-mm 1.2")]
pub(crate) struct TraceArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Name of the zoom state
    #[arg(long)]
    pub(crate) state: String,
    /// Height of the ray at entry, y
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    pub(crate) height_mm: f64,
    /// Place of the ray at entry across the height, x
    #[arg(long, value_name = "MM", default_value_t = 0.0, allow_negative_numbers = true)]
    pub(crate) x_mm: f64,
    /// Angle to the axis in y, positive when the height grows
    #[arg(long, value_name = "MRAD", default_value_t = 0.0, allow_negative_numbers = true)]
    pub(crate) angle_mrad: f64,
    /// Angle to the axis in x
    #[arg(long, value_name = "MRAD", default_value_t = 0.0, allow_negative_numbers = true)]
    pub(crate) angle_x_mrad: f64,
    /// Wavelength in air [default: the state's first]
    #[arg(long, value_name = "NM", allow_negative_numbers = true)]
    pub(crate) wavelength_nm: Option<f64>,
    /// Print the ray as JSON
    #[arg(long)]
    pub(crate) json: bool,
}
