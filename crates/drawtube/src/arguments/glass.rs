//! Arguments of `glass`.

use clap::Args;

/// Look through the glass catalogue, or find equivalents of a glass.
///
/// A word is looked for in name, maker, six-digit code and status. nd=1.7..1.8, vd=..30 ask for a
/// range, nd=1.5168 and vd=64.2 for a value within 0.0005 and 0.2, "nd>1.7" and "vd<30" for one
/// side. Status 1 if nothing is found.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  drawtube glass schott nd=1.7..1.8 vd=..30 --at-nm 532
  drawtube glass --nearest N-BK7 --at-nm 532 --at-nm 1064")]
pub(crate) struct GlassArguments {
    /// Words that must all suit; all glasses if there is none
    #[arg(value_name = "WORDS", conflicts_with = "nearest")]
    pub(crate) words: Vec<String>,
    /// List the glasses nearest to this one in index, at the wavelengths of --at-nm or else at the
    /// d, F and C lines
    #[arg(long, value_name = "GLASS")]
    pub(crate) nearest: Option<String>,
    /// How many of the nearest are listed
    #[arg(long, value_name = "N", default_value_t = 10, requires = "nearest")]
    pub(crate) most: usize,
    /// Add a column with the index at this wavelength; may be repeated
    #[arg(long, value_name = "NM", allow_negative_numbers = true)]
    pub(crate) at_nm: Vec<f64>,
    /// Print the glasses as JSON
    #[arg(long)]
    pub(crate) json: bool,
}
