//! What can go wrong with glass: each error says what was found and what was expected, `advice` what to do.

use thiserror::Error;

use super::range::WavelengthRange;
use crate::document::quoted;

/// Anything that can be wrong with a glass.
#[derive(Clone, Debug, PartialEq, Error)]
#[non_exhaustive]
pub enum GlassError {
    /// The index was asked for where the glass is not known.
    #[error("{glass} is known from {range}; {wavelength_nm} nm is outside")]
    OutsideRange {
        /// Name of the glass.
        glass: String,
        /// What was asked for, nm.
        wavelength_nm: f64,
        /// Where it is known.
        range: WavelengthRange,
    },
    /// The index was asked for at something that is no wavelength.
    #[error("{wavelength_nm} nm is no wavelength for {glass}; a positive number is needed")]
    NotAWavelength {
        /// Name of the glass.
        glass: String,
        /// What was asked for, nm.
        wavelength_nm: f64,
    },
    /// The dispersion law has no real, finite value there.
    #[error("the dispersion law of {glass} gives no real index at {wavelength_nm} nm")]
    NoRealIndex {
        /// Name of the glass.
        glass: String,
        /// What was asked for, nm.
        wavelength_nm: f64,
    },
    /// Nothing says how the index changes with temperature.
    #[error("nothing is known of how the index of {glass} changes with temperature")]
    NoThermalTerms {
        /// Name of the glass.
        glass: String,
    },
    /// Nothing says how it expands.
    #[error("nothing is known of how {glass} expands with temperature")]
    NoExpansion {
        /// Name of the glass.
        glass: String,
    },
    /// A temperature at which no maker vouches for an index.
    #[error("{glass} is known from -100 °C to 140 °C; {temperature_c} °C is outside")]
    OutsideTemperatures {
        /// Name of the glass.
        glass: String,
        /// What was asked for, °C.
        temperature_c: f64,
    },
    /// The name leads to no single glass.
    #[error(transparent)]
    Lookup(#[from] LookupError),
    /// A glass of the design file is not defined as it must be.
    #[error(transparent)]
    Definition(#[from] DefinitionError),
}

impl GlassError {
    /// What to do about it.
    pub fn advice(&self) -> Option<String> {
        match self {
            Self::OutsideRange { wavelength_nm, .. } if *wavelength_nm < SHORTEST_NM => {
                Some(IN_NANOMETRES.to_owned())
            }
            Self::OutsideRange { .. } => Some(
                "choose a glass that is known at this wavelength, or define one from measured points"
                    .to_owned(),
            ),
            Self::NotAWavelength { .. } => Some(IN_NANOMETRES.to_owned()),
            Self::NoRealIndex { .. } => {
                Some("check the coefficients and the range of the glass".to_owned())
            }
            Self::NoThermalTerms { glass } | Self::NoExpansion { glass } => Some(format!(
                "choose a glass whose maker tells it, or define one from your maker's data sheet: \
                 \"glasses\": {{ \"my-{glass}\": {{ \"from\": \"{glass}\", \"index_shift\": 0, \
                 \"index_per_k\": …, \"expansion_per_k\": …, \"density_g_cm3\": … }} }}"
            )),
            Self::OutsideTemperatures { .. } => {
                Some("temperatures are in °C; 20 is what designs are drawn at".to_owned())
            }
            Self::Lookup(error) => error.advice(),
            Self::Definition(error) => error.advice(),
        }
    }
}

/// Why a name leads to no single glass.
#[derive(Clone, Debug, PartialEq, Error)]
#[non_exhaustive]
pub enum LookupError {
    /// Nothing has this name.
    #[error("there is no glass named {}", quoted(name))]
    Unknown {
        /// What was asked for.
        name: String,
        /// Names not far from it, nearest first.
        near: Vec<String>,
    },
    /// The name differs from a known one only in capitals, spaces or hyphens.
    #[error("\"{name}\" is not written as the catalogue writes it: {}", exact.join(", "))]
    NotExact {
        /// What was asked for.
        name: String,
        /// How it is written.
        exact: Vec<String>,
    },
    /// More than one maker has a glass of this name.
    #[error("\"{name}\" is the name of more than one glass: {}", choices.join(", "))]
    Ambiguous {
        /// What was asked for.
        name: String,
        /// The names with their makers.
        choices: Vec<String>,
    },
    /// The design file defines this glass, but its definition has a fault of its own.
    #[error("the glass {} is defined with a fault", quoted(name))]
    Faulty {
        /// The glass in question.
        name: String,
    },
}

impl LookupError {
    /// What to do about it.
    pub fn advice(&self) -> Option<String> {
        match self {
            Self::Unknown { near, .. } if near.is_empty() => {
                Some("look through the catalogue for the exact name".to_owned())
            }
            Self::Unknown { near: names, .. } => {
                Some(format!("did you mean {}?", names.join(", ")))
            }
            Self::NotExact { exact: names, .. } | Self::Ambiguous { choices: names, .. } => {
                Some(format!("write {}", names.join(" or ")))
            }
            Self::Faulty { .. } => Some("put its definition right first".to_owned()),
        }
    }
}

/// Shortest wavelength taken for one, nm: no lens material passes light below lithium fluoride's edge near 105 nm
/// (common practice, no published source for the round figure).
pub const SHORTEST_NM: f64 = 100.0;
/// The index of a glass lies above this.
pub(super) const INDEX_ABOVE: f64 = 1.0;
/// The index of a glass lies below this; germanium, the highest in use, is near 4.
pub(super) const INDEX_BELOW: f64 = 5.0;
/// The largest index shift taken for a melt. Makers hold melts to a few times 0.001 (common practice, no published
/// source); a larger number is a slip of the pen.
pub(super) const MOST_SHIFT: f64 = 0.05;

/// The largest change a kelvin taken for a glass or a metal, 1/K: ten times that of the metals that expand most
/// (common practice, no published source); a larger number is a slip of the pen.
pub(super) const MOST_PER_K: f64 = 3e-4;

/// Measured points must be at least this far apart, nm: closer ones are one measurement.
pub(super) const CLOSEST_POINTS_NM: f64 = 0.001;

const IN_NANOMETRES: &str = "wavelengths are in nanometres: 0.532 um is 532";

/// Why a glass of the design file is not defined.
#[derive(Clone, Debug, PartialEq, Error)]
#[non_exhaustive]
pub enum DefinitionError {
    /// The name is empty or nothing but spaces.
    #[error("a glass needs a name; this one is empty")]
    EmptyName,
    /// The name is already the catalogue's.
    #[error("\"{name}\" is a glass of the catalogue and cannot be given another meaning")]
    Shadows {
        /// The name.
        name: String,
    },
    /// Two definitions have one name.
    #[error("the glass {} is defined more than once", quoted(name))]
    Repeated {
        /// The name.
        name: String,
    },
    /// None of the four ways of definition is there.
    #[error("the glass is not defined: none of from, index, points or sellmeier is given")]
    Undefined,
    /// More than one of the four ways of definition is there.
    #[error("the glass is defined in more than one way: {}", keys.join(" and "))]
    Mixed {
        /// The keys found.
        keys: Vec<&'static str>,
    },
    /// A key that means something only beside another.
    #[error("\"{key}\" is given without \"{needs}\"")]
    Lonely {
        /// The key found.
        key: &'static str,
        /// The key that is missing.
        needs: &'static str,
    },
    /// Melts that are defined from each other.
    #[error("these glasses are defined from each other in a circle: {}", names.join(" -> "))]
    Circle {
        /// The way round, first name repeated at the end.
        names: Vec<String>,
    },
    /// No glass has such an index.
    #[error("an index must lie between {INDEX_ABOVE} and {INDEX_BELOW}, not at {index}")]
    IndexBounds {
        /// What was given.
        index: f64,
    },
    /// The definition leads to an index no glass has.
    #[error(
        "the definition gives an index of {index:.5} at {wavelength_nm:.1} nm; it must lie between {INDEX_ABOVE} and {INDEX_BELOW}"
    )]
    IndexInRange {
        /// What comes out.
        index: f64,
        /// Where, nm.
        wavelength_nm: f64,
    },
    /// The definition leads to a negative n².
    #[error("the definition gives no real index at {wavelength_nm:.1} nm")]
    NoRealIndex {
        /// Where, nm.
        wavelength_nm: f64,
    },
    /// No melt is that far from its catalogue.
    #[error(
        "an index shift of {shift} is too large for a melt; at most {MOST_SHIFT} either way is taken"
    )]
    ShiftBounds {
        /// What was given.
        shift: f64,
    },
    /// One point, or none, defines no law.
    #[error("measured points given: {found}; two or more are needed")]
    TooFewPoints {
        /// How many there are.
        found: usize,
    },
    /// Points must ascend.
    #[error(
        "the point at {after_nm} nm comes after the one at {before_nm} nm; points must ascend in wavelength, by {CLOSEST_POINTS_NM} nm or more"
    )]
    PointOrder {
        /// The earlier of the two, nm.
        before_nm: f64,
        /// The later, nm.
        after_nm: f64,
    },
    /// Not a wavelength for a lens.
    #[error("a wavelength must be finite and {SHORTEST_NM} nm or longer, not {found_nm} nm")]
    Wavelength {
        /// What was given, nm.
        found_nm: f64,
    },
    /// The range's ends are the wrong way round or equal.
    #[error(
        "the range starts at {low_nm} nm and ends at {high_nm} nm; it must start below its end"
    )]
    RangeOrder {
        /// First number, nm.
        low_nm: f64,
        /// Second number, nm.
        high_nm: f64,
    },
    /// A Sellmeier law without a term.
    #[error("a Sellmeier law needs at least one term [B, C]; there is none")]
    NoTerms,
    /// A number that is infinite or not a number.
    #[error("{found} is not a finite number")]
    NotFinite {
        /// What was given.
        found: f64,
    },
    /// The law has a pole where it is to be used.
    #[error(
        "C = {resonance_um2} um^2 puts a resonance at {resonance_nm} nm, inside the range from {range}"
    )]
    ResonanceInside {
        /// C as given, µm².
        resonance_um2: f64,
        /// Its wavelength, nm.
        resonance_nm: f64,
        /// The range as given.
        range: WavelengthRange,
    },
    /// Nothing changes so much a kelvin.
    #[error("{found} a kelvin is too large; at most {MOST_PER_K} either way is taken")]
    PerKelvin {
        /// What was given, 1/K.
        found: f64,
    },
    /// Nothing has such a density.
    #[error("a density must be positive and finite, not {found} g/cm^3")]
    Density {
        /// What was given, g/cm³.
        found: f64,
    },
}

impl DefinitionError {
    /// What to do about it.
    pub fn advice(&self) -> Option<String> {
        let advice = match self {
            Self::EmptyName => "give it a name such as \"melt-4471\"",
            Self::Shadows { .. } => "choose a name of your own, such as the melt number",
            Self::Repeated { .. } => "give each definition its own name",
            Self::Undefined => {
                "give \"from\" with \"index_shift\", \"index\", \"points\", or \"sellmeier\" with \"range_nm\""
            }
            Self::Mixed { .. } => "keep one and take out the others",
            Self::Lonely { key, needs } => {
                return Some(format!("add \"{needs}\" or take out \"{key}\""));
            }
            Self::Circle { .. } => "define one of them from a catalogue glass, points or an index",
            Self::IndexBounds { .. } => {
                "check the number: an index is relative to air, that of glass is 1.4 to 2.1, of germanium 4.0"
            }
            Self::IndexInRange { .. } | Self::NoRealIndex { .. } => {
                "check the coefficients, the units and the range"
            }
            Self::ShiftBounds { .. } => {
                "give the difference from the catalogue index, such as 0.00021, not the index itself"
            }
            Self::TooFewPoints { .. } => {
                "add points, or give a single \"index\" for all wavelengths"
            }
            Self::PointOrder { .. } => "sort the points by wavelength, each wavelength once",
            Self::Wavelength { .. } => IN_NANOMETRES,
            Self::RangeOrder { .. } => "write [shortest, longest] in nanometres",
            Self::NoTerms => "give pairs [B, C], C in um^2, or a constant \"index\"",
            Self::NotFinite { .. } => "give a finite number",
            Self::ResonanceInside { .. } => {
                "check that C is the squared wavelength in um^2, or end the range short of it"
            }
            Self::PerKelvin { .. } => "give 1/K, such as 7.1e-6, or leave it out",
            Self::Density { .. } => "give g/cm^3, such as 2.51, or leave it out",
        };
        Some(advice.to_owned())
    }
}

/// Why a search of the catalogue cannot be understood.
#[derive(Clone, Debug, PartialEq, Error)]
#[non_exhaustive]
pub enum SearchError {
    /// Compares something that cannot be compared.
    #[error("{} in {} cannot be compared; nd and vd can", quoted(found), quoted(word))]
    Quantity {
        /// The whole word.
        word: String,
        /// The part before the sign.
        found: String,
    },
    /// A range whose first end is the larger.
    #[error("the range in \"{word}\" runs downwards, from {low} to {high}")]
    Downwards {
        /// The whole word.
        word: String,
        /// Its first end.
        low: f64,
        /// Its last end.
        high: f64,
    },
    /// Compares with something that is no number.
    #[error("{} in {} is not a number", quoted(found), quoted(word))]
    Number {
        /// The whole word.
        word: String,
        /// The part in question.
        found: String,
    },
}

impl SearchError {
    /// What to do about it.
    pub fn advice(&self) -> Option<String> {
        Some(match self {
            Self::Downwards { low, high, .. } => format!("write {high}..{low}"),
            Self::Quantity { .. } => {
                "write nd=1.7..1.8 or \"vd<30\"; a maker, a name, a code or a status is given as a plain word"
                    .to_owned()
            }
            Self::Number { .. } => "write a number such as 1.517, or a range such as 1.5..1.6".to_owned(),
        })
    }
}
