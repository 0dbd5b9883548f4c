//! What a schema cannot say about a design file: counts, ranges, names, references.

use std::fmt;

use crate::document::{Address, Complain, Place, nearest, one_of, rounded};
use crate::glass::{GlassError, LookupError};
use crate::laser::BeamFormError;
use crate::surface::ASPHERE_TERMS;

/// A fault of a design file that its structure does not show. The place is told beside it, as an
/// address: [`DesignFault`].
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum DesignError {
    /// A number that cannot be.
    #[error("{quantity} is {found}")]
    OutOfRange {
        /// What the number is.
        quantity: &'static str,
        /// The number.
        found: f64,
        /// What it must be.
        allowed: Allowed,
    },
    /// A list of the wrong length.
    #[error("there are {found} {what}")]
    Count {
        /// What the list holds.
        what: &'static str,
        /// How many there are.
        found: usize,
        /// How many there must be.
        needed: usize,
        /// What sets the number needed.
        because: String,
    },
    /// A name that something else has already.
    #[error("the name \"{0}\" is taken already")]
    NameTwice(String),
    /// A name that could not be used in an address.
    #[error("\"{0}\" cannot be a name")]
    NameUnfit(String),
    /// No group has this name.
    #[error("no group is called \"{name}\"")]
    UnknownGroup {
        /// The name asked for.
        name: String,
        /// The names there are.
        known: Vec<String>,
    },
    /// A wavelength given twice.
    #[error("the wavelength {0} nm is given twice")]
    WavelengthTwice(f64),
    /// A glass name that leads nowhere.
    #[error(transparent)]
    Glass(#[from] LookupError),
    /// A glass that is not known at a wavelength of the beam.
    #[error(transparent)]
    Index(GlassError),
    /// A glass of the design's own whose definition is wrong.
    #[error(transparent)]
    OwnGlass(GlassError),
    /// A surface that does not reach its clear diameter.
    #[error(
        "a surface of radius {} mm does not reach the clear diameter {diameter_mm} mm",
        rounded(*.radius_mm)
    )]
    Reach {
        /// Vertex radius, mm.
        radius_mm: f64,
        /// Clear diameter, mm.
        diameter_mm: f64,
    },
    /// A power of r that is not a term of the sag.
    #[error("\"{0}\" is not a power of an even asphere")]
    AspherePower(String),
    /// Keys of the beam that contradict each other or diffraction.
    #[error(transparent)]
    BeamForm(#[from] BeamFormError),
    /// A key that means nothing without another.
    #[error("{key} means nothing without {needed}")]
    Needs {
        /// The key found.
        key: &'static str,
        /// The key that is missing.
        needed: &'static str,
    },
    /// Spacings that contradict the fixed groups.
    #[error("the spacings of state \"{state}\" do not fit between the fixed groups")]
    Housing {
        /// Name of the state.
        state: String,
        /// The spacing that would mend it, mm.
        found_mm: f64,
        /// The value it would need, mm.
        needed_mm: f64,
    },
}

/// A range a number must lie in.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Allowed {
    /// Smallest value.
    pub low: f64,
    /// Largest value.
    pub high: f64,
    /// Whether the smallest value itself is out.
    pub above_low: bool,
    /// Unit, with a space in front, or nothing.
    pub unit: &'static str,
}

impl Allowed {
    /// Whether a number is allowed; NaN never is.
    #[must_use]
    pub fn contains(&self, value: f64) -> bool {
        let low = if self.above_low { value > self.low } else { value >= self.low };
        low && value <= self.high
    }
}

impl fmt::Display for Allowed {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self { low, high, above_low, unit } = self;
        let from = if *above_low { "above" } else { "at least" };
        write!(f, "a number {from} {low}{unit} and at most {high}{unit}")
    }
}

impl DesignError {
    /// What would have been right.
    #[must_use]
    pub fn expected(&self) -> String {
        match self {
            Self::OwnGlass(_) => "a definition that gives one index at every wavelength".into(),
            Self::OutOfRange { allowed, .. } => allowed.to_string(),
            Self::Count { needed, because, .. } => format!("{needed}, {because}"),
            Self::NameTwice(_) => "a name of its own".into(),
            Self::NameUnfit(_) => "a name that is not empty, not \"*\" and not a number".into(),
            Self::UnknownGroup { known, .. } => one_of(known.iter().map(String::as_str)),
            Self::WavelengthTwice(_) => "each wavelength once".into(),
            Self::Glass(_) => "a glass of the catalogue, or one defined under \"glasses\"".into(),
            Self::Index(_) => "a glass that is known at every wavelength of the beam".into(),
            Self::Reach { diameter_mm, .. } => {
                format!("a radius beyond ±{} mm, half the clear diameter", 0.5 * diameter_mm)
            }
            Self::AspherePower(_) => {
                format!("an even number from \"4\" to \"{}\"", 2 * ASPHERE_TERMS + 2)
            }
            Self::BeamForm(error) => error.expected(),
            Self::Needs { key, needed } => format!("{key} together with {needed}, or neither"),
            Self::Housing { needed_mm, .. } => {
                format!("with the others as they are, {} mm here", to_a_nanometre(*needed_mm))
            }
        }
    }

    /// What to do about it, where there is more to say.
    #[must_use]
    pub fn advice(&self) -> Option<String> {
        match self {
            Self::UnknownGroup { name, known } => nearest(name, known.iter().map(String::as_str))
                .map(|near| format!("did you mean \"{near}\"?")),
            Self::Glass(error) => error.advice(),
            Self::Index(error) | Self::OwnGlass(error) => error.advice(),
            Self::BeamForm(error) => error.advice(),
            Self::AspherePower(power) if power == "2" => {
                Some("r² is the curvature: change the radius instead".into())
            }
            Self::OutOfRange { quantity: "a wavelength", found, .. } if *found < 100.0 => {
                Some(format!("wavelengths are in nm; if this is in µm, write {}", found * 1000.0))
            }
            _ => None,
        }
    }
}

/// A spacing as precise as the housing has to be kept, and no more.
fn to_a_nanometre(spacing_mm: f64) -> f64 {
    format!("{spacing_mm:.6}").parse().unwrap_or(spacing_mm)
}

/// A fault of a design file and its place.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{error}")]
pub struct DesignFault {
    /// Where in the file.
    pub at: Address,
    /// What.
    pub error: DesignError,
}

impl Complain for DesignFault {
    fn place(&self) -> Place {
        Place::Value(self.at.clone())
    }

    fn expected(&self) -> Option<String> {
        Some(self.error.expected())
    }

    fn advice(&self) -> Option<String> {
        self.error.advice()
    }
}
