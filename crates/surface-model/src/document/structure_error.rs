//! What a document can have that its schema does not allow, in words.

use thiserror::Error;

use super::address::{Address, as_index};
use super::complaint::{Complain, Place};
use super::wording::{did_you_mean, quoted};

/// Something in a document that its schema does not allow.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[non_exhaustive]
pub enum StructureError {
    /// A value of another type.
    #[error("{} is {found}", subject(.at))]
    WrongType {
        /// The value.
        at: Address,
        /// What it is.
        found: String,
        /// What it may be.
        expected: String,
        /// What was probably meant.
        advice: Option<String>,
    },
    /// A key that has to be there is not.
    #[error("the key {} is missing", quoted(.key))]
    MissingKey {
        /// The object.
        at: Address,
        /// The key.
        key: String,
        /// What it may hold.
        expected: String,
    },
    /// A key that is not known in its object.
    #[error("the key {} is not known here", quoted(.key))]
    UnknownKey {
        /// The entry with this key.
        at: Address,
        /// The key.
        key: String,
        /// What it may be.
        expected: String,
        /// The known key that is nearest to it.
        nearest: Option<String>,
    },
    /// A value of the right type that is not one of those allowed.
    #[error("{} is {found}", subject(.at))]
    NotAChoice {
        /// The value.
        at: Address,
        /// What it is.
        found: String,
        /// What it may be.
        expected: String,
        /// What was probably meant.
        advice: Option<String>,
    },
    /// A number beyond its range.
    #[error("{} is {found}", subject(.at))]
    OutOfRange {
        /// The number.
        at: Address,
        /// What it is.
        found: String,
        /// The range.
        expected: String,
    },
    /// A list or text that is too short or too long.
    #[error("{} has {found}", subject(.at))]
    WrongLength {
        /// The list or text.
        at: Address,
        /// Its length.
        found: String,
        /// The length it may have.
        expected: String,
    },
}

impl Complain for StructureError {
    fn place(&self) -> Place {
        match self {
            Self::UnknownKey { at, .. } => Place::Key(at.clone()),
            Self::WrongType { at, .. }
            | Self::MissingKey { at, .. }
            | Self::NotAChoice { at, .. }
            | Self::OutOfRange { at, .. }
            | Self::WrongLength { at, .. } => Place::Value(at.clone()),
        }
    }

    fn expected(&self) -> Option<String> {
        match self {
            Self::WrongType { expected, .. }
            | Self::MissingKey { expected, .. }
            | Self::UnknownKey { expected, .. }
            | Self::NotAChoice { expected, .. }
            | Self::OutOfRange { expected, .. }
            | Self::WrongLength { expected, .. } => Some(expected.clone()),
        }
    }

    fn advice(&self) -> Option<String> {
        match self {
            Self::WrongType { advice, .. } | Self::NotAChoice { advice, .. } => advice.clone(),
            Self::UnknownKey { nearest, .. } => nearest.as_deref().map(did_you_mean),
            _ => None,
        }
    }
}

/// How a sentence calls the value at an address.
fn subject(at: &Address) -> String {
    let parent = at.parent().unwrap_or_default();
    let is_index = |step: &str| as_index(step).is_some();
    match (at.last(), parent.last()) {
        (None, _) => "the document".into(),
        (Some(index), Some(list)) if is_index(index) => {
            format!("entry {index} of {}", quoted(list))
        }
        (Some(index), None) if is_index(index) => format!("entry {index}"),
        (Some(key), _) => quoted(key),
    }
}
