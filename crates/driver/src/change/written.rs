//! One change as it is written: an address, a value, and where it was written.

use serde_json::Value;
use surface_model::document::{Address, Complaint, Complaints, Place, Source};

/// One change.
#[derive(Debug, Clone, PartialEq)]
pub struct Change {
    at: Address,
    value: Value,
    source: Source,
}

impl Change {
    /// Reads `ADDRESS=VALUE`; messages about it begin with `option` and the text.
    ///
    /// # Errors
    /// There is no `=`, or what stands before it is not an address.
    pub fn read(option: &str, text: &str) -> Result<Self, Complaints> {
        let source = Source { label: format!("{option} {text}"), position: None };
        let refused = |complaint: Complaint| {
            Complaints::elsewhere(option, vec![(source.clone(), complaint)], &Value::Null)
        };
        let Some((address, value)) = text.split_once('=') else {
            return Err(refused(Complaint {
                place: Place::File,
                found: "there is no \"=\" between an address and a value".to_owned(),
                expected: Some("such as \"/housing/track_mm=160\"".to_owned()),
                advice: None,
            }));
        };
        let at =
            address.parse::<Address>().map_err(|error| refused(error.complaint(Place::File)))?;
        Ok(Self { at, value: value_of(value), source })
    }

    /// A change of the program's own, or one written in a table.
    #[must_use]
    pub fn new(at: Address, value: Value, source: Source) -> Self {
        Self { at, value, source }
    }

    /// What it is about, as written.
    #[must_use]
    pub fn at(&self) -> &Address {
        &self.at
    }

    /// The value it gives; null to drop something.
    #[must_use]
    pub fn value(&self) -> &Value {
        &self.value
    }

    /// Where it is written.
    #[must_use]
    pub fn source(&self) -> &Source {
        &self.source
    }
}

/// A value as written: JSON if it is, otherwise the word it is.
#[must_use]
pub(crate) fn value_of(text: &str) -> Value {
    serde_json::from_str(text).unwrap_or_else(|_| Value::from(text))
}
