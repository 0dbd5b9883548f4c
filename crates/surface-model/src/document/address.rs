//! Addresses: places in a document, written as a JSON Pointer with names and `*`.

use std::fmt;
use std::str::FromStr;

use serde::{Serialize, Serializer};
use thiserror::Error;

use super::complaint::{Complaint, Place};
use super::wording::{did_you_mean, quoted};

/// The step that means every entry.
pub(super) const EVERY: &str = "*";

/// A place in a document, or with `*` several: a JSON Pointer (RFC 6901, with its escapes `~0`
/// for `~` and `~1` for `/`) in which a step into a list may also be the `name` of the entry.
///
/// A step into a list that is written as a number (no sign, no leading zero) is always the index,
/// from 0, even if an entry bears that number as its name. An entry called `*`, or one that shares
/// its name with another, is reached by its index only.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Address {
    steps: Vec<String>,
}

impl Address {
    /// The whole document, written as the empty text.
    pub fn root() -> Self {
        Self::default()
    }

    /// One step on, to a key of an object or to the entry of a list that has this name.
    pub fn key(mut self, key: impl Into<String>) -> Self {
        self.steps.push(key.into());
        self
    }

    /// One step on, to an entry of a list, counted from 0.
    pub fn index(self, index: usize) -> Self {
        self.key(index.to_string())
    }

    /// One step on, to every entry of a list or object.
    pub fn every(self) -> Self {
        self.key(EVERY)
    }

    /// One step back; `None` at the root.
    pub fn parent(&self) -> Option<Self> {
        let (_, front) = self.steps.split_last()?;
        Some(Self { steps: front.to_vec() })
    }

    /// The last step; `None` at the root.
    pub fn last(&self) -> Option<&str> {
        self.steps.last().map(String::as_str)
    }

    /// The steps without their escapes, fit for a slice pattern:
    /// `match address.steps().as_slice() { ["groups", group, ..] => … }`.
    pub fn steps(&self) -> Vec<&str> {
        self.steps.iter().map(String::as_str).collect()
    }

    /// Whether `other` is this place or lies within it, step by step as written.
    pub fn contains(&self, other: &Self) -> bool {
        other.steps.starts_with(&self.steps)
    }
}

/// The index that a step into a list stands for, if it is written as one.
pub(super) fn as_index(step: &str) -> Option<usize> {
    let plain = step == "0" || (!step.starts_with('0') && step.bytes().all(|b| b.is_ascii_digit()));
    if plain { step.parse().ok() } else { None }
}

impl fmt::Display for Address {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for step in &self.steps {
            write!(f, "/{}", step.replace('~', "~0").replace('/', "~1"))?;
        }
        Ok(())
    }
}

impl Serialize for Address {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_str(self)
    }
}

/// Why a text is not an address.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[non_exhaustive]
pub enum AddressSyntaxError {
    /// Neither empty nor with a slash in front.
    #[error("the address {} does not begin with \"/\"", quoted(.0))]
    NoSlash(String),
    /// A `~` that is not followed by 0 or 1.
    #[error("in the address {} a \"~\" is not followed by 0 or 1", quoted(.0))]
    Escape(String),
}

impl AddressSyntaxError {
    /// The complaint about an address that is itself written at `place` of a document.
    pub fn complaint(&self, place: Place) -> Complaint {
        let advice = match self {
            Self::NoSlash(text) => Some(did_you_mean(&format!("/{text}"))),
            Self::Escape(_) => {
                Some("\"~\" itself is written \"~0\", \"/\" is written \"~1\"".into())
            }
        };
        let expected =
            Some("steps with a slash in front of each, such as \"/states/0/name\"".into());
        Complaint { place, found: self.to_string(), expected, advice }
    }
}

impl FromStr for Address {
    type Err = AddressSyntaxError;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        if text.is_empty() {
            return Ok(Self::root());
        }
        let path =
            text.strip_prefix('/').ok_or_else(|| AddressSyntaxError::NoSlash(text.to_owned()))?;
        let steps: Option<Vec<String>> = path.split('/').map(unescape).collect();
        steps.map(|steps| Self { steps }).ok_or_else(|| AddressSyntaxError::Escape(text.to_owned()))
    }
}

/// A step without its escapes; `None` if one is broken.
fn unescape(step: &str) -> Option<String> {
    let mut parts = step.split('~');
    let mut out = parts.next().unwrap_or_default().to_owned();
    for part in parts {
        let (sign, rest) = match part.strip_prefix('0') {
            Some(rest) => ('~', rest),
            None => ('/', part.strip_prefix('1')?),
        };
        out.push(sign);
        out.push_str(rest);
    }
    Some(out)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn reads_and_writes_the_examples_of_the_standard() {
        // RFC 6901, section 5.
        for (text, steps) in [
            ("", vec![]),
            ("/", vec![""]),
            ("/foo/0", vec!["foo", "0"]),
            ("/a~1b", vec!["a/b"]),
            ("/m~0n", vec!["m~n"]),
            ("/c%d", vec!["c%d"]),
            ("/ ", vec![" "]),
            ("/~01", vec!["~1"]),
        ] {
            let address: Address = text.parse().unwrap();
            assert_eq!(address.steps(), steps);
            assert_eq!(address.to_string(), text);
        }
    }

    #[test]
    fn says_what_is_wrong_with_an_address() {
        let told = |text: &str| text.parse::<Address>().unwrap_err().to_string();
        insta::assert_snapshot!(told("groups/0"), @r#"the address "groups/0" does not begin with "/""#);
        insta::assert_snapshot!(told("/a~2"), @r#"in the address "/a~2" a "~" is not followed by 0 or 1"#);
        let complaint = "groups/0".parse::<Address>().unwrap_err().complaint(Place::File);
        assert_eq!(complaint.advice.as_deref(), Some("did you mean \"/groups/0\"?"));
        assert_eq!(told("/a~"), "in the address \"/a~\" a \"~\" is not followed by 0 or 1");
    }

    #[test]
    fn only_a_plain_number_is_an_index() {
        assert_eq!(as_index("0"), Some(0));
        assert_eq!(as_index("10"), Some(10));
        for step in ["", "01", "+1", "-", "1.0", "99999999999999999999999"] {
            assert_eq!(as_index(step), None, "{step}");
        }
    }

    proptest! {
        #[test]
        fn an_address_survives_being_written(steps in proptest::collection::vec(".*", 0..6)) {
            let address = steps.iter().fold(Address::root(), |a, step| a.key(step.clone()));
            prop_assert_eq!(address.to_string().parse::<Address>(), Ok(address));
        }

        #[test]
        fn any_text_is_read_or_refused(text in "[/~01*a]{0,12}") {
            if let Ok(address) = text.parse::<Address>() {
                prop_assert_eq!(address.to_string(), text);
            }
        }
    }
}
