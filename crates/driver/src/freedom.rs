//! What the optimiser may change: `free` and `held` of a design file.

use std::collections::{HashMap, HashSet};

use merit_function::block::Bounds;
use merit_function::variables::FreePlace;
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use serde_json::Value;
use surface_model::design::Design;
use surface_model::document::{Address, AddressSyntaxError, Complaint, nearest, one_of};
use surface_model::document::{AddressError, Place as PlaceInFile};
use surface_model::place::Place;

/// The part of a design file that says what may change.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub(crate) struct FreedomDocument {
    /// What the optimiser may change: words (`radii`, `spacings`, `thicknesses`, `airs`, `conics`,
    /// `aspheres`), addresses, or an address with a range of its own. Radii and spacings if left
    /// out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(crate) free: Option<Vec<FreeDocument>>,
    /// What it must leave alone all the same: words or addresses.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub(crate) held: Vec<String>,
}

/// One entry of `free`.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
#[serde(untagged)]
pub(crate) enum FreeDocument {
    /// A word or an address.
    Words(String),
    /// An address with a range.
    Ranged(RangedDocument),
}

/// An address with a range of its own, kept by every step.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub(crate) struct RangedDocument {
    /// What it is about.
    pub(crate) at: String,
    /// Smallest value, in the unit of the file.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(crate) min: Option<f64>,
    /// Largest value, in the unit of the file.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(crate) max: Option<f64>,
}

/// The words for all numbers of a kind.
const WORDS: [&str; 6] = ["radii", "spacings", "thicknesses", "airs", "conics", "aspheres"];

/// An entry of `free` or `held` that leads nowhere.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub(crate) enum FreedomError {
    /// Neither a word nor an address.
    #[error("\"{0}\" is not something that can be free")]
    Word(String),
    /// Not written as an address.
    #[error(transparent)]
    Syntax(#[from] AddressSyntaxError),
    /// The address leads nowhere.
    #[error(transparent)]
    Nowhere(#[from] AddressError),
    /// The address leads to something the optimiser cannot change.
    #[error("nothing at \"{0}\" can be changed by the optimiser")]
    Unchangeable(String),
    /// A range the wrong way round.
    #[error("the range has min {min} above max {max}")]
    Reversed {
        /// Its min.
        min: f64,
        /// Its max.
        max: f64,
    },
    /// A range of radii with the radius zero inside.
    #[error("the range from {min} to {max} mm passes through the radius zero")]
    ThroughZero {
        /// Its min, mm.
        min: f64,
        /// Its max, mm.
        max: f64,
    },
    /// An end of a range that no length or radius can have.
    #[error("an end of the range is {0}")]
    End(f64),
}

impl FreedomError {
    fn complaint(&self, at: Address) -> Complaint {
        let place = PlaceInFile::Value(at);
        let (expected, advice) = match self {
            Self::Syntax(error) => return error.complaint(place),
            Self::Nowhere(error) => return error.complaint(place),
            Self::Word(word) => {
                let advice = nearest(word, WORDS).map(|near| format!("did you mean \"{near}\"?"));
                (format!("{}, or an address that begins with \"/\"", one_of(WORDS)), advice)
            }
            Self::Unchangeable(_) => (
                "a radius, thickness, air, spacing, conic constant or asphere coefficient, or \
                 something that holds some"
                    .into(),
                None,
            ),
            Self::Reversed { .. } => ("min at most max".into(), None),
            Self::ThroughZero { .. } => (
                "min and max on the same side of zero; a surface bends through flat, not through \
                 a point"
                    .into(),
                None,
            ),
            Self::End(_) => ("a number within ±1 000 000 000".into(), None),
        };
        Complaint { place, found: self.to_string(), expected: Some(expected), advice }
    }
}

/// Works out which numbers are free, and with which ranges of their own.
///
/// # Errors
/// Every entry that leads nowhere, as a complaint about its place.
pub(crate) fn resolve(
    document: &FreedomDocument,
    design: &Design,
    file: &Value,
) -> Result<Vec<FreePlace>, Vec<Complaint>> {
    let resolver = Resolver::new(design, file);
    let mut complaints = Vec::new();
    let mut free: HashMap<Place, Bounds> = HashMap::new();
    let default = ["radii", "spacings"].map(|word| FreeDocument::Words(word.into()));
    let entries = document.free.as_deref().unwrap_or(&default);
    for (i, entry) in entries.iter().enumerate() {
        let (words, range) = match entry {
            FreeDocument::Words(words) => (words, None),
            FreeDocument::Ranged(ranged) => (&ranged.at, Some(ranged)),
        };
        let found = resolver.places(words).and_then(|places| {
            places.into_iter().map(|place| Ok((place, own_range(place, range)?))).collect()
        });
        match found {
            // A later entry about the same number wins: the finer one follows the coarser.
            Ok::<Vec<(Place, Bounds)>, _>(places) => free.extend(places),
            Err(error) => {
                complaints.push(error.complaint(Address::root().key("free").index(i)));
            }
        }
    }
    for (i, words) in document.held.iter().enumerate() {
        match resolver.places(words).map(HashSet::<Place>::from_iter) {
            Ok(held) => free.retain(|place, _| !held.contains(place)),
            Err(error) => {
                complaints.push(error.complaint(Address::root().key("held").index(i)));
            }
        }
    }
    if !complaints.is_empty() {
        return Err(complaints);
    }
    let in_order = resolver.places.iter().filter_map(|&(_, place)| {
        free.get(&place).map(|&own_range| FreePlace { place, own_range })
    });
    Ok(in_order.collect())
}

/// The numbers that a word of `free`, or an address, means.
///
/// # Errors
/// It leads nowhere, or to nothing that could be free.
pub(crate) fn places_of(
    words: &str,
    design: &Design,
    file: &Value,
) -> Result<Vec<Place>, FreedomError> {
    Resolver::new(design, file).places(words)
}

struct Resolver<'a> {
    file: &'a Value,
    /// Every number of the design that the file writes out, with its address.
    places: Vec<(Address, Place)>,
}

impl<'a> Resolver<'a> {
    fn new(design: &Design, file: &'a Value) -> Self {
        let all = Place::all(design).into_iter().map(|place| (place.address(), place));
        let written = all.filter(|(at, place)| match place {
            // A surface with an entry under `shapes` has a conic constant even if it is left out.
            Place::Conic(_) => {
                at.parent().and_then(|shape| shape.get(file)).is_some_and(Value::is_object)
            }
            _ => at.get(file).is_some(),
        });
        Self { file, places: written.collect() }
    }

    fn places(&self, words: &str) -> Result<Vec<Place>, FreedomError> {
        let kind: fn(&Place) -> bool = match words {
            "radii" => |place| matches!(place, Place::Radius(_)),
            "spacings" => |place| matches!(place, Place::Spacing { .. }),
            "thicknesses" => |place| matches!(place, Place::Thickness { .. }),
            "airs" => |place| matches!(place, Place::Air { .. }),
            "conics" => |place| matches!(place, Place::Conic(_)),
            "aspheres" => |place| matches!(place, Place::Asphere(..)),
            address if address.starts_with('/') => return self.at(address),
            word => return Err(FreedomError::Word(word.into())),
        };
        Ok(self.places.iter().map(|&(_, place)| place).filter(kind).collect())
    }

    fn at(&self, written: &str) -> Result<Vec<Place>, FreedomError> {
        let address: Address = written.parse()?;
        let targets: HashSet<Address> = self.targets(&address)?.into_iter().collect();
        let around = |at: &Address| std::iter::successors(Some(at.clone()), Address::parent);
        let within =
            self.places.iter().filter(|(at, _)| around(at).any(|at| targets.contains(&at)));
        let places: Vec<Place> = within.map(|&(_, place)| place).collect();
        if places.is_empty() { Err(FreedomError::Unchangeable(written.into())) } else { Ok(places) }
    }

    /// What an address names. A conic constant that its surface leaves out can be named too.
    fn targets(&self, address: &Address) -> Result<Vec<Address>, FreedomError> {
        match address.resolve(self.file) {
            Ok(targets) => Ok(targets),
            Err(error) => {
                let shape = address.parent().filter(|_| address.last() == Some("conic"));
                match shape.map(|shape| shape.resolve(self.file)) {
                    Some(Ok(shapes)) => {
                        Ok(shapes.into_iter().map(|shape| shape.key("conic")).collect())
                    }
                    _ => Err(error.into()),
                }
            }
        }
    }
}

/// A range of the file as bounds on the number inside the program: radii become curvatures.
fn own_range(place: Place, range: Option<&RangedDocument>) -> Result<Bounds, FreedomError> {
    let Some(RangedDocument { min, max, .. }) = range else { return Ok(Bounds::FREE) };
    for end in [min, max].into_iter().flatten() {
        if !(-1e9..=1e9).contains(end) {
            return Err(FreedomError::End(*end));
        }
    }
    let low = min.unwrap_or(f64::NEG_INFINITY);
    let high = max.unwrap_or(f64::INFINITY);
    if low > high {
        return Err(FreedomError::Reversed { min: low, max: high });
    }
    if !matches!(place, Place::Radius(_)) {
        return Ok(Bounds { low, high });
    }
    // 1/x falls on either side of zero, so the ends change places; ±∞ is flat.
    if low > 0.0 || high < 0.0 {
        Ok(Bounds { low: 1.0 / high, high: 1.0 / low })
    } else if min.is_none() && max.is_none() {
        Ok(Bounds::FREE)
    } else {
        Err(FreedomError::ThroughZero { min: low, max: high })
    }
}
