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
    /// Reads `ADDRESS=VALUE`; messages about it begin with `option` and the text. `document` is what
    /// the change is about: where there is no address, it says which could be meant.
    ///
    /// # Errors
    /// There is no `=`, or what stands before it is not an address.
    pub fn read(option: &str, text: &str, document: &Value) -> Result<Self, Complaints> {
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
        let at = address.parse::<Address>().map_err(|error| {
            let complaint = error.complaint(Place::File);
            let likely = alike(address, document);
            let advice = likely.map(|list| format!("write the whole address, such as {list}"));
            refused(Complaint { advice: advice.or(complaint.advice.clone()), ..complaint })
        })?;
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
    pub(crate) fn source(&self) -> &Source {
        &self.source
    }
}

/// Most addresses that are offered.
const OFFERED: usize = 4;

/// Addresses of a document whose last key is the word, or begins with it.
fn alike(word: &str, document: &Value) -> Option<String> {
    let mut found = Vec::new();
    collect_alike(&word.to_lowercase(), document, &Address::root(), &mut found);
    let told: Vec<String> =
        found.iter().take(OFFERED).map(|at| at.with_names(document).to_string()).collect();
    let more = if found.len() > OFFERED { ", …" } else { "" };
    (!word.is_empty() && !told.is_empty()).then(|| told.join(", ") + more)
}

fn collect_alike(word: &str, value: &Value, at: &Address, found: &mut Vec<Address>) {
    match value {
        Value::Object(map) => {
            for (key, entry) in map {
                let here = at.clone().key(key.as_str());
                if !key.starts_with(word) {
                    collect_alike(word, entry, &here, found);
                } else if let Value::Array(list) = entry {
                    found.extend((0..list.len()).map(|index| here.clone().index(index)));
                } else {
                    found.push(here);
                }
            }
        }
        Value::Array(list) => {
            for (index, entry) in list.iter().enumerate() {
                collect_alike(word, entry, &at.clone().index(index), found);
            }
        }
        _ => {}
    }
}

/// A value as written: JSON if it is, otherwise the word it is.
#[must_use]
pub(crate) fn value_of(text: &str) -> Value {
    serde_json::from_str(text).unwrap_or_else(|_| Value::from(text))
}
