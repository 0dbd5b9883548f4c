//! From an address to the place in the text.
//!
//! Nothing about places is kept from reading: they are wanted only when something is wrong. The
//! text is then read again level by level, each level as slices of the text, and the place is
//! where the slice lies.

use std::fmt;

use serde::de::{Deserialize, Deserializer, MapAccess, SeqAccess, Visitor};
use serde_json::value::RawValue;

use super::address::{Address, as_index};
use super::text::offset_within;

/// Where an entry lies in the text, in bytes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Located {
    /// The first byte of the value.
    pub(super) value: usize,
    /// The opening quote of the key, when the entry has one.
    pub(super) key: Option<usize>,
    /// How many steps of the address lead here; fewer than it has when the rest does not exist.
    pub(super) steps: usize,
}

/// The place of the value at `address` (with indices for entries of lists), or of the nearest
/// thing around it that exists. `text` has been parsed before.
pub(super) fn locate(text: &str, address: &Address) -> Located {
    let start = text.len() - text.trim_ascii_start().len();
    let mut place = Located { value: start, key: None, steps: 0 };
    let mut level = text.trim_ascii();
    for step in address.steps() {
        let Some((key, value)) = entry(level, step) else { break };
        let Some(offset) = offset_within(text, value) else { break };
        place = Located {
            value: offset,
            key: key.and_then(|key| offset_within(text, key)),
            steps: place.steps + 1,
        };
        level = value;
    }
    place
}

/// The slices of the key and the value that `step` leads to from the object or list in `level`.
fn entry<'t>(level: &'t str, step: &str) -> Option<(Option<&'t str>, &'t str)> {
    match serde_json::from_str(level).ok()? {
        Level::Leaf => None,
        Level::List(entries) => Some((None, entries.get(as_index(step)?)?.get())),
        Level::Object(entries) => {
            let (key, value) = entries.into_iter().find(|(key, _)| spells(key.get(), step))?;
            Some((Some(key.get()), value.get()))
        }
    }
}

/// Whether a key as it is written, quotes, escapes and all, is the key `step`.
fn spells(raw: &str, step: &str) -> bool {
    serde_json::from_str::<String>(raw).is_ok_and(|key| key == step)
}

/// One level of a text, its entries unread.
enum Level<'t> {
    Object(Vec<(&'t RawValue, &'t RawValue)>),
    List(Vec<&'t RawValue>),
    Leaf,
}

impl<'de> Deserialize<'de> for Level<'de> {
    fn deserialize<D: Deserializer<'de>>(source: D) -> Result<Self, D::Error> {
        source.deserialize_any(LevelVisitor)
    }
}

struct LevelVisitor;

impl<'de> Visitor<'de> for LevelVisitor {
    type Value = Level<'de>;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a JSON value")
    }

    fn visit_unit<E>(self) -> Result<Level<'de>, E> {
        Ok(Level::Leaf)
    }

    fn visit_bool<E>(self, _: bool) -> Result<Level<'de>, E> {
        Ok(Level::Leaf)
    }

    fn visit_i64<E>(self, _: i64) -> Result<Level<'de>, E> {
        Ok(Level::Leaf)
    }

    fn visit_u64<E>(self, _: u64) -> Result<Level<'de>, E> {
        Ok(Level::Leaf)
    }

    fn visit_f64<E>(self, _: f64) -> Result<Level<'de>, E> {
        Ok(Level::Leaf)
    }

    fn visit_str<E>(self, _: &str) -> Result<Level<'de>, E> {
        Ok(Level::Leaf)
    }

    fn visit_seq<A: SeqAccess<'de>>(self, mut entries: A) -> Result<Level<'de>, A::Error> {
        let mut list = Vec::new();
        while let Some(entry) = entries.next_element()? {
            list.push(entry);
        }
        Ok(Level::List(list))
    }

    fn visit_map<A: MapAccess<'de>>(self, mut entries: A) -> Result<Level<'de>, A::Error> {
        let mut list = Vec::new();
        while let Some(entry) = entries.next_entry()? {
            list.push(entry);
        }
        Ok(Level::Object(list))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::document::layout;
    use crate::document::tests::any_value;
    use proptest::prelude::*;
    use serde_json::Value;

    #[test]
    fn finds_values_and_keys() {
        let text = " {\"a\": [1, {\"b/c\\u0041\" :\r\n \"x\"}]}";
        let at = |address: &str| locate(text, &address.parse().unwrap());
        assert_eq!(at(""), Located { value: 1, key: None, steps: 0 });
        assert_eq!(at("/a"), Located { value: 7, key: Some(2), steps: 1 });
        assert_eq!(at("/a/0"), Located { value: 8, key: None, steps: 2 });
        assert_eq!(at("/a/1/b~1cA").value, text.find("\"x\"").unwrap());
        assert_eq!(at("/a/1/b~1cA").key, text.find("\"b/c"));
        assert_eq!(at("/a/1/zz"), at("/a/1"), "the nearest thing around it");
        assert_eq!(at("/a/7/zz"), at("/a"));
    }

    /// Every address of a value with the value.
    fn walk(value: &Value, at: Address, out: &mut Vec<(Address, Value)>) {
        out.push((at.clone(), value.clone()));
        match value {
            Value::Array(list) => list
                .iter()
                .enumerate()
                .for_each(|(index, entry)| walk(entry, at.clone().index(index), out)),
            Value::Object(map) => {
                map.iter().for_each(|(key, entry)| walk(entry, at.clone().key(key.as_str()), out));
            }
            _ => {}
        }
    }

    proptest! {
        /// What stands at the place reads as the value, and nothing that begins earlier does so
        /// with the same end: a reader that knows nothing of addresses agrees.
        #[test]
        fn what_stands_there_is_the_value(value in any_value()) {
            let text = layout::layout(&value);
            let mut places = Vec::new();
            walk(&value, Address::root(), &mut places);
            let mut last = None;
            for (at, expected) in places {
                let place = locate(&text, &at);
                prop_assert_eq!(place.steps, at.steps().len());
                let mut stream = serde_json::Deserializer::from_str(&text[place.value..]).into_iter::<Value>();
                prop_assert_eq!(stream.next().unwrap().unwrap(), expected);
                // Walked in the order of the text, each place lies behind the one before.
                prop_assert!(last < Some(place.value));
                last = Some(place.value);
                if let Some(key) = place.key {
                    let mut stream = serde_json::Deserializer::from_str(&text[key..]).into_iter::<String>();
                    let key_read = stream.next().unwrap().unwrap();
                    prop_assert_eq!(Some(key_read.as_str()), at.last());
                    prop_assert!(key < place.value);
                }
            }
        }
    }
}
