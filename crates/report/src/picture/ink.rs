//! The one look of all pictures: what is drawn in which colour, dash and type.
//!
//! Colours are those of M. Okabe and K. Ito, *Color Universal Design* (2008): told apart with any
//! of the common colour deficiencies. No colour speaks alone: each comes with a dash of its own
//! and a name at the end of its line, so that a grey print says as much. Maps run along the
//! *cividis* scale (J. R. Nuñez, C. R. Anderton and R. S. Renslow, PLoS ONE 13, e0199239 (2018)),
//! whose lightness rises evenly.

/// Lines and words.
pub(crate) const INK: &str = "#1b1b1b";
/// What is there to be looked past: ticks, rules, captions.
pub(crate) const FAINT: &str = "#6e6e6e";
/// Hairlines.
pub(crate) const HAIR: &str = "#c4c4c4";
/// Glass, drawn translucent.
pub(crate) const GLASS: &str = "#56B4E9";
/// Rays.
pub(crate) const RAY: &str = "#D55E00";
/// What is missed or crossed.
pub(crate) const MISS: &str = "#D55E00";

/// Type for everything.
pub(crate) const TYPE: &str = "'Source Sans 3', 'Fira Sans', 'DejaVu Sans', Verdana, sans-serif";
/// Size of words, px.
pub(crate) const WORDS: f64 = 11.0;
/// Size of titles, px.
pub(crate) const TITLE: f64 = 13.0;

/// Series by their number: blue, green, purple, orange, sky, black. (Yellow is left out, it does
/// not print; vermillion is for rays and for what is missed.)
const SERIES: [&str; 6] = ["#0072B2", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#1b1b1b"];
/// The dash that goes with each.
const DASHES: [&str; 6] = ["", "8 3", "10 3 2 3", "2.5 2.5", "5 2", "12 3 2 3 2 3"];

/// A stroke.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Stroke {
    pub(crate) colour: &'static str,
    pub(crate) width: f64,
    pub(crate) dash: &'static str,
}

impl Stroke {
    pub(crate) const fn solid(colour: &'static str, width: f64) -> Self {
        Self { colour, width, dash: "" }
    }

    pub(crate) const fn dashed(colour: &'static str, width: f64, dash: &'static str) -> Self {
        Self { colour, width, dash }
    }

    /// The stroke of a series.
    pub(crate) fn series(number: usize) -> Self {
        let number = number % SERIES.len();
        Self { colour: SERIES[number], width: 1.6, dash: DASHES[number] }
    }
}

/// Anchors of the cividis scale in equal steps.
const CIVIDIS: [[f64; 3]; 9] = [
    [0.0, 32.0, 77.0],
    [15.0, 52.0, 110.0],
    [64.0, 77.0, 107.0],
    [92.0, 101.0, 111.0],
    [122.0, 123.0, 120.0],
    [149.0, 147.0, 120.0],
    [180.0, 172.0, 111.0],
    [215.0, 199.0, 92.0],
    [254.0, 232.0, 56.0],
];

/// A colour of the map's scale, `share` from 0 (dark) to 1 (light), and the ink to write on it.
pub(crate) fn map_colour(share: f64) -> (String, &'static str) {
    let share = if share.is_finite() { share.clamp(0.0, 1.0) } else { 0.0 };
    let last = CIVIDIS.len() - 1;
    let place = share * last as f64;
    let from = (place.floor() as usize).min(last - 1);
    let part = place - from as f64;
    let mix = |i: usize| CIVIDIS[from][i] + part * (CIVIDIS[from + 1][i] - CIVIDIS[from][i]);
    let colour = format!("#{:02x}{:02x}{:02x}", mix(0) as u8, mix(1) as u8, mix(2) as u8);
    (colour, if share < 0.5 { "#ffffff" } else { INK })
}
