//! What a change does to which place of a document.

use serde_json::Value;
use surface_model::document::{Address, Complaint, Place};

use super::written::Change;

/// The step that means the place behind the last entry of a list (RFC 6902).
const BEHIND: &str = "-";

/// One place and what is done there.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Target {
    /// Where, with indices for entries of lists; for an entry to be added, its list.
    pub(super) at: Address,
    pub(super) edit: Edit,
}

/// What is done at a place.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Edit {
    /// Another value for what is there.
    Set(Value),
    /// A key that is not there yet.
    Insert(Value),
    /// It goes.
    Drop,
    /// One more entry for the list.
    Append(Value),
}

impl Target {
    /// Whether a number, or a list of numbers, is given.
    pub(super) fn is_number(&self) -> bool {
        let number = |value: &Value| value.is_number() || value == "flat";
        match &self.edit {
            Edit::Set(Value::Array(list)) => list.iter().all(number),
            Edit::Set(value) | Edit::Insert(value) => number(value),
            Edit::Drop | Edit::Append(_) => false,
        }
    }
}

/// The places a change is about.
pub(super) fn targets(change: &Change, before: &Value) -> Result<Vec<Target>, Complaint> {
    let (at, value) = (change.at(), change.value());
    let all = |list: Vec<Address>, edit: Edit| {
        list.into_iter().map(|at| Target { at, edit: edit.clone() }).collect()
    };
    if at.last().is_none() {
        return Err(Complaint {
            place: Place::File,
            found: "the address is that of the whole document".to_owned(),
            expected: Some("the address of something in it".to_owned()),
            advice: None,
        });
    }
    let parents = || at.parent().and_then(|parent| parent.resolve(before).ok()).unwrap_or_default();
    if at.last() == Some(BEHIND) {
        let lists: Vec<Address> = parents()
            .into_iter()
            .filter(|at| at.get(before).is_some_and(Value::is_array))
            .collect();
        if !lists.is_empty() && !value.is_null() {
            return Ok(all(lists, Edit::Append(value.clone())));
        }
    }
    match at.resolve(before) {
        Ok(found) if value.is_null() => Ok(all(found, Edit::Drop)),
        Ok(found) => Ok(all(found, Edit::Set(value.clone()))),
        Err(error) => {
            let objects: Vec<Address> = parents()
                .into_iter()
                .filter(|at| at.get(before).is_some_and(Value::is_object))
                .collect();
            let key = at.last().filter(|key| *key != "*" && !value.is_null());
            match key {
                Some(key) if !objects.is_empty() => {
                    let here = objects.into_iter().map(|at| at.key(key)).collect();
                    Ok(all(here, Edit::Insert(value.clone())))
                }
                _ => Err(error.complaint(Place::File)),
            }
        }
    }
}
