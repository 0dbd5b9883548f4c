//! From an address with names and `*` to the places it means in a document.

use serde_json::Value;
use thiserror::Error;

use super::address::{Address, EVERY, as_index};
use super::complaint::{Complaint, Place};
use super::suggest::nearest;
use super::wording::{did_you_mean, in_words, one_of, quoted};

/// What there is at the place where an address goes astray.
#[derive(Debug, Clone, PartialEq, Eq)]
#[non_exhaustive]
pub enum Present {
    /// An object with these keys.
    Keys(Vec<String>),
    /// A list of this length, and the names of its entries.
    Entries {
        /// Number of entries.
        count: usize,
        /// Names that reach an entry.
        names: Vec<String>,
    },
    /// A value without entries, in words.
    Nothing(String),
}

/// Why an address means nothing in a document.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[non_exhaustive]
pub enum AddressError {
    /// The first step that leads nowhere.
    #[error("nothing is at {}: there is no {} in {}", shown(.address), quoted(.step), shown(.within))]
    Astray {
        /// The address as it was written.
        address: Address,
        /// The step.
        step: String,
        /// The part of the address that does exist, with indices for names.
        within: Address,
        /// What could have been said instead.
        present: Present,
    },
    /// Several entries bear the name.
    #[error("{} entries of {} are called {}", .indices.len(), shown(.within), quoted(.step))]
    Ambiguous {
        /// The address as it was written.
        address: Address,
        /// The name.
        step: String,
        /// The list.
        within: Address,
        /// Indices of the entries with that name.
        indices: Vec<usize>,
    },
}

fn shown(address: &Address) -> String {
    address.last().map_or_else(|| "the document".into(), |_| address.to_string())
}

impl AddressError {
    /// What the address could have said instead.
    pub fn expected(&self) -> String {
        match self {
            Self::Ambiguous { indices, .. } => {
                let indices: Vec<String> = indices.iter().take(8).map(usize::to_string).collect();
                format!("its index: {}", indices.join(", "))
            }
            Self::Astray { present: Present::Keys(keys), .. } if keys.is_empty() => {
                "nothing more, the object is empty".into()
            }
            Self::Astray { present: Present::Keys(keys), .. } => {
                one_of(keys.iter().map(String::as_str))
            }
            Self::Astray { present: Present::Entries { count: 0, .. }, .. } => {
                "nothing more, the list is empty".into()
            }
            Self::Astray { present: Present::Entries { count, names }, .. } => {
                let indices = if *count == 1 {
                    "the index 0".into()
                } else {
                    format!("an index from 0 to {}", count - 1)
                };
                if names.is_empty() {
                    indices
                } else {
                    format!("{}, or {indices}", one_of(names.iter().map(String::as_str)))
                }
            }
            Self::Astray { present: Present::Nothing(kind), .. } => {
                format!("nothing more, this is {kind}")
            }
        }
    }

    /// The nearest step that does exist.
    pub fn nearest(&self) -> Option<&str> {
        match self {
            Self::Astray { step, present: Present::Keys(words), .. }
            | Self::Astray { step, present: Present::Entries { names: words, .. }, .. } => {
                nearest(step, words.iter().map(String::as_str))
            }
            _ => None,
        }
    }

    /// The complaint for an address that is itself written at `place` of a document.
    pub fn complaint(&self, place: Place) -> Complaint {
        Complaint {
            place,
            found: self.to_string(),
            expected: Some(self.expected()),
            advice: self.nearest().map(did_you_mean),
        }
    }
}

impl Address {
    /// The places this address means in `root`, in the order of the document: names have become
    /// indices, `*` has become its entries. Entries under a `*` that lack a later step are passed
    /// over as long as one has it (`/groups/*/airs_mm/0` where only some groups have airs).
    ///
    /// # Errors
    /// No place is meant, or a name is borne by several entries; the error is about the first step
    /// that goes wrong.
    pub fn resolve(&self, root: &Value) -> Result<Vec<Self>, AddressError> {
        let mut reached = vec![(Self::root(), root)];
        for step in self.steps() {
            let mut next = Vec::new();
            let mut failure = None;
            for (at, value) in &reached {
                match self.enter(step, at, value) {
                    Ok(entries) => next.extend(entries),
                    Err(error @ AddressError::Ambiguous { .. }) => return Err(error),
                    Err(error) => failure = failure.or(Some(error)),
                }
            }
            match failure {
                Some(error) if next.is_empty() => return Err(error),
                _ => reached = next,
            }
        }
        Ok(reached.into_iter().map(|(at, _)| at).collect())
    }

    /// The entries of `value`, which lies at `at`, that one step means.
    fn enter<'v>(
        &self,
        step: &str,
        at: &Self,
        value: &'v Value,
    ) -> Result<Vec<(Self, &'v Value)>, AddressError> {
        let astray = || AddressError::Astray {
            address: self.clone(),
            step: step.to_owned(),
            within: at.clone(),
            present: present(value),
        };
        let entries: Vec<(Self, &Value)> = match value {
            Value::Object(map) if step == EVERY => {
                map.iter().map(|(key, entry)| (at.clone().key(key.as_str()), entry)).collect()
            }
            Value::Object(map) => {
                map.get(step).map(|entry| (at.clone().key(step), entry)).into_iter().collect()
            }
            Value::Array(list) => {
                let indices = match as_index(step) {
                    _ if step == EVERY => (0..list.len()).collect(),
                    Some(index) => vec![index],
                    None => self.named_entries(step, at, list)?,
                };
                let entry = |index: usize| Some((at.clone().index(index), list.get(index)?));
                indices.into_iter().filter_map(entry).collect()
            }
            _ => Vec::new(),
        };
        if entries.is_empty() { Err(astray()) } else { Ok(entries) }
    }

    /// Index of the one entry with this name, or none.
    fn named_entries(
        &self,
        name: &str,
        within: &Self,
        list: &[Value],
    ) -> Result<Vec<usize>, AddressError> {
        let named = |(index, entry)| (name_of(entry) == Some(name)).then_some(index);
        let indices: Vec<usize> = list.iter().enumerate().filter_map(named).collect();
        if indices.len() > 1 {
            return Err(AddressError::Ambiguous {
                address: self.clone(),
                step: name.to_owned(),
                within: within.clone(),
                indices,
            });
        }
        Ok(indices)
    }

    /// The value at this address, in which steps into lists are indices.
    pub fn get<'v>(&self, root: &'v Value) -> Option<&'v Value> {
        self.steps().into_iter().try_fold(root, |value, step| match value {
            Value::Object(map) => map.get(step),
            Value::Array(list) => list.get(as_index(step)?),
            _ => None,
        })
    }

    /// The same as [`Address::get`], to change the value in place.
    pub fn get_mut<'v>(&self, root: &'v mut Value) -> Option<&'v mut Value> {
        self.steps().into_iter().try_fold(root, |value, step| match value {
            Value::Object(map) => map.get_mut(step),
            Value::Array(list) => list.get_mut(as_index(step)?),
            _ => None,
        })
    }

    /// The same place as people like to read it: names in place of indices, wherever a name
    /// reaches the entry. Steps that do not exist in `root` stay as they are.
    pub fn with_names(&self, root: &Value) -> Self {
        let mut named = Self::root();
        let mut value = Some(root);
        for step in self.steps() {
            let name = match (value, as_index(step)) {
                (Some(Value::Array(list)), Some(index)) => {
                    let name = list.get(index).and_then(name_of);
                    name.filter(|name| reaches_one(name, list))
                }
                _ => None,
            };
            value = value.and_then(|value| Self::root().key(step).get(value));
            named = named.key(name.unwrap_or(step));
        }
        named
    }
}

fn name_of(entry: &Value) -> Option<&str> {
    entry.get("name").and_then(Value::as_str)
}

/// Whether the name, as a step, means one entry of the list.
fn reaches_one(name: &str, list: &[Value]) -> bool {
    let bearers = list.iter().filter(|entry| name_of(entry) == Some(name)).take(2).count();
    name != EVERY && as_index(name).is_none() && bearers == 1
}

fn present(value: &Value) -> Present {
    match value {
        Value::Object(map) => Present::Keys(map.keys().cloned().collect()),
        Value::Array(list) => Present::Entries {
            count: list.len(),
            names: list.iter().filter_map(name_of).map(str::to_owned).collect(),
        },
        _ => Present::Nothing(in_words(value)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    fn sample() -> Value {
        json!({
            "groups": [
                { "name": "entry", "elements": [{ "radii_mm": [74.76, -20.16] }] },
                { "name": "1", "elements": [{ "radii_mm": [-23.63, 8.94] }] },
                { "name": "exit", "airs_mm": [1.0], "elements": [
                    { "name": "pair", "radii_mm": [426.0, -60.0, -85.6] },
                    { "name": "pair", "radii_mm": ["flat"] }] }
            ],
            "states": [], "a/b": 1
        })
    }

    fn resolved(text: &str) -> Vec<String> {
        let address: Address = text.parse().unwrap();
        address.resolve(&sample()).unwrap().iter().map(Address::to_string).collect()
    }

    fn told(text: &str) -> String {
        let error = text.parse::<Address>().unwrap().resolve(&sample()).unwrap_err();
        let nearest = error.nearest().map(did_you_mean).unwrap_or_default();
        format!("{error}\n{}\n{nearest}", error.expected())
    }

    #[test]
    fn names_indices_and_every_entry_are_understood() {
        assert_eq!(resolved("/groups/exit/elements/0"), ["/groups/2/elements/0"]);
        assert_eq!(resolved("/groups/1/elements"), ["/groups/1/elements"], "the index wins");
        assert_eq!(resolved("/groups/*/elements/*/radii_mm/1").len(), 3, "one has no second");
        assert_eq!(resolved("/groups/*/airs_mm/*"), ["/groups/2/airs_mm/0"]);
        assert_eq!(resolved("/groups/exit/*").len(), 3);
        assert_eq!(resolved("/a~1b"), ["/a~1b"]);
        assert_eq!(resolved(""), [""]);
    }

    #[test]
    fn the_first_step_astray_is_named_with_what_is_there() {
        insta::assert_snapshot!(told("/groups/exti/elements"), @r#"
        nothing is at /groups/exti/elements: there is no "exti" in /groups
        one of "entry", "1", "exit", or an index from 0 to 2
        did you mean "exit"?
        "#);
        insta::assert_snapshot!(told("/groups/exit/elements/pair/radii_mm"), @r#"
        2 entries of /groups/2/elements are called "pair"
        its index: 0, 1
        "#);
        insta::assert_snapshot!(told("/group/0"), @r#"
        nothing is at /group/0: there is no "group" in the document
        one of "groups", "states", "a/b"
        did you mean "groups"?
        "#);
        insta::assert_snapshot!(told("/states/*"), @r#"
        nothing is at /states/*: there is no "*" in /states
        nothing more, the list is empty
        "#);
        insta::assert_snapshot!(told("/a~1b/0"), @r#"
        nothing is at /a~1b/0: there is no "0" in /a~1b
        nothing more, this is the number 1
        "#);
        insta::assert_snapshot!(told("/groups/0/elements/0/radii_mm/2"), @r#"
        nothing is at /groups/0/elements/0/radii_mm/2: there is no "2" in /groups/0/elements/0/radii_mm
        an index from 0 to 1
        "#);
    }

    #[test]
    fn every_resolved_address_reaches_its_value() {
        let mut root = sample();
        for at in
            "/groups/*/elements/*/radii_mm/*".parse::<Address>().unwrap().resolve(&root).unwrap()
        {
            *at.get_mut(&mut root).unwrap() = json!(7);
            assert_eq!(at.get(&root), Some(&json!(7)), "{at}");
        }
        assert_eq!(root["groups"][2]["elements"][1]["radii_mm"], json!([7]));
    }

    #[test]
    fn names_are_shown_where_they_lead_back() {
        let shown = |text: &str| text.parse::<Address>().unwrap().with_names(&sample()).to_string();
        assert_eq!(shown("/groups/2/elements/0/radii_mm/1"), "/groups/exit/elements/0/radii_mm/1");
        assert_eq!(shown("/groups/1"), "/groups/1", "a name that would be read as an index");
        assert_eq!(shown("/groups/9/x"), "/groups/9/x");
    }
}
