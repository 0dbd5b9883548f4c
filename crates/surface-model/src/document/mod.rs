//! JSON documents that people write, read with care: every mistake is told with its line and
//! column, its address, what was expected there and what was probably meant.
//!
//! This module serves every kind of document and knows nothing of optics. A kind of document is a
//! JSON Schema ([`union`] joins the parts of several owners) and, for each owner, a type that
//! serde reads:
//!
//! ```
//! use surface_model::document::{Complaints, Document, union};
//!
//! #[derive(serde::Deserialize, schemars::JsonSchema)]
//! #[schemars(inline)]
//! struct Beam {
//!     diameter_mm: f64,
//! }
//!
//! fn diameter_mm(label: &str, bytes: &[u8]) -> Result<f64, Complaints> {
//!     let schema = union("Beam", &[schemars::schema_for!(Beam)]);
//!     let document = Document::parse(label, bytes)?;
//!     document.check(&schema)?;
//!     let beam: Beam = document.read()?;
//!     Ok(beam.diameter_mm)
//! }
//!
//! assert_eq!(diameter_mm("beam.json", br#"{ "diameter_mm": 2.4 }"#).ok(), Some(2.4));
//! let complaints = diameter_mm("beam.json", br#"{ "diametre_mm": 2.4 }"#).map_err(|e| e.to_string());
//! assert!(complaints.is_err_and(|told| told.contains("did you mean \"diameter_mm\"?")));
//! ```
//!
//! The way of a document: `text` makes text of bytes, `parse` values of text, `structure` holds the
//! values against the schema. An [`Address`] names a place (`resolve` finds it in the values,
//! `locate` in the text); a [`Complaint`] is about such a place. [`fn@layout`] writes.

mod address;
mod alternatives;
mod complaint;
mod layout;
mod locate;
mod parse;
mod problems;
mod resolve;
mod rewriting;
mod schema;
mod shape;
mod structure;
mod structure_error;
mod suggest;
mod syntax;
mod text;
mod trail;
mod wording;

use std::io::Read;

use schemars::Schema;
use serde::de::DeserializeOwned;
use serde_json::Value;

pub use address::{Address, AddressSyntaxError};
pub use complaint::{Complain, Complaint, Complaints, Place, Source};
pub use layout::layout;
pub use parse::ParseError;
pub use resolve::{AddressError, Present};
pub use schema::{unchecked_keywords, union};
pub use structure_error::StructureError;
pub use suggest::nearest;
pub use syntax::SyntaxFault;
pub use text::{LARGEST_BYTES, Position, TextError};
pub use wording::{did_you_mean, in_words, one_of, quoted, rounded, system_words};

/// The key that is allowed in every object, for a remark.
const NOTE: &str = "note";

/// The key that is allowed at the root, for editors.
const SCHEMA: &str = "$schema";

/// A JSON document: its text, the values in it, and what to call it in messages.
#[derive(Debug, Clone, PartialEq)]
pub struct Document {
    label: String,
    text: String,
    value: Value,
}

impl Document {
    /// Reads a document from the bytes of a file; `label` is what messages call it, usually the
    /// path.
    ///
    /// # Errors
    /// The bytes are not a text, the text is not JSON (see [`ParseError`]), or keys are repeated.
    pub fn parse(label: impl Into<String>, bytes: &[u8]) -> Result<Self, Complaints> {
        let label = label.into();
        let refused = |errors: Vec<ParseError>| {
            Complaints::unread(&label, errors.into_iter().map(Complaint::from).collect())
        };
        let text = text::decode(bytes).map_err(|error| refused(vec![error.into()]))?;
        let value = parse::parse(text).map_err(refused)?;
        Ok(Self { text: text.to_owned(), value, label })
    }

    /// Reads a document from an open file or standard input, and never more of it than the largest
    /// document has.
    ///
    /// # Errors
    /// As [`Document::parse`], or the source cannot be read.
    pub fn from_reader(label: impl Into<String>, source: impl Read) -> Result<Self, Complaints> {
        let label = label.into();
        let mut bytes = Vec::new();
        source.take(LARGEST_BYTES as u64 + 1).read_to_end(&mut bytes).map_err(|error| {
            let found = format!("the file cannot be read: {}", system_words(&error));
            let complaint = Complaint { place: Place::File, found, expected: None, advice: None };
            Complaints::unread(&label, vec![complaint])
        })?;
        Self::parse(label, &bytes)
    }

    /// A document that the program made or changed itself; its text is its [`layout`].
    pub fn from_value(label: impl Into<String>, value: Value) -> Self {
        Self { label: label.into(), text: layout(&value), value }
    }

    /// What messages call it.
    pub fn label(&self) -> &str {
        &self.label
    }

    /// Its text, without a byte order mark.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Its values, in the order of the text.
    pub fn value(&self) -> &Value {
        &self.value
    }

    /// Holds the document against a schema, with the rules of [`union`]: objects are closed, `note`
    /// may stand in any of them.
    ///
    /// # Errors
    /// Everything that is wrong ([`StructureError`]), the first twenty in full.
    pub fn check(&self, schema: &Schema) -> Result<(), Complaints> {
        let problems = structure::check(&self.value, schema);
        if problems.told.is_empty() {
            return Ok(());
        }
        let list = problems.told.into_iter().map(Complaint::from).collect();
        Err(Complaints::about(self, list, problems.untold))
    }

    /// The document as a type of its owner. Remarks (`note`) and `$schema` are left out, so the
    /// type needs no place for them.
    ///
    /// # Errors
    /// The type refuses a value; after [`Document::check`] against the type's own schema that is
    /// rare, and the words are serde's.
    pub fn read<T: DeserializeOwned>(&self) -> Result<T, Complaints> {
        let mut value = self.value.clone();
        if let Value::Object(map) = &mut value {
            map.shift_remove(SCHEMA);
        }
        drop_notes(&mut value);
        serde_path_to_error::deserialize(value).map_err(|error| {
            let told = error.inner().to_string();
            let (found, expected) = match told.rsplit_once(", expected ") {
                Some((found, expected)) => (found.to_owned(), Some(expected.to_owned())),
                None => (told, None),
            };
            let place = Place::Value(address_of(error.path(), &self.value));
            let complaint = Complaint { place, found, expected, advice: None };
            Complaints::about(self, vec![complaint], 0)
        })
    }

    /// Complaints about this document, placed in its text.
    #[must_use]
    pub fn refuse<E: Into<Complaint>>(&self, errors: impl IntoIterator<Item = E>) -> Complaints {
        Complaints::about(self, errors.into_iter().map(E::into).collect(), 0)
    }

    /// Nothing if `errors` is empty, otherwise all of them, placed in the text.
    ///
    /// # Errors
    /// There are errors.
    pub fn verdict<E: Into<Complaint>>(
        &self,
        errors: impl IntoIterator<Item = E>,
    ) -> Result<(), Complaints> {
        let list: Vec<Complaint> = errors.into_iter().map(E::into).collect();
        if list.is_empty() { Ok(()) } else { Err(Complaints::about(self, list, 0)) }
    }
}

/// Whether a key is for people and editors rather than for the program.
fn is_remark(key: &str) -> bool {
    key == NOTE || key == SCHEMA
}

fn drop_notes(value: &mut Value) {
    match value {
        Value::Array(list) => list.iter_mut().for_each(drop_notes),
        Value::Object(map) => {
            map.shift_remove(NOTE);
            map.values_mut().for_each(drop_notes);
        }
        _ => {}
    }
}

fn address_of(path: &serde_path_to_error::Path, root: &Value) -> Address {
    use serde_path_to_error::Segment;
    path.iter().fold(Address::root(), |at, segment| match segment {
        Segment::Seq { index } => at.index(*index),
        Segment::Map { key } => at.key(key.as_str()),
        Segment::Enum { variant } => {
            let inner = at.clone().key(variant.as_str());
            if inner.get(root).is_some() { inner } else { at }
        }
        Segment::Unknown => at,
    })
}

#[cfg(test)]
mod tests;
