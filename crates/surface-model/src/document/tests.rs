//! Whole documents, read, checked and complained about as a user meets it.

mod design;
mod every_key;
mod mistakes;
mod published;
mod survival;

use proptest::prelude::*;
use serde_json::Value;

use super::*;
use design::{Freedom, Lenses, Wanted, design_schema};

pub(super) use design::SAMPLE;

/// Any value with texts, numbers and keys that try the writer.
pub(super) fn any_value() -> impl Strategy<Value = Value> {
    let finite = any::<u64>().prop_map(f64::from_bits).prop_filter("finite", |n| n.is_finite());
    let leaf = prop_oneof![
        Just(Value::Null),
        any::<bool>().prop_map(Value::from),
        finite.prop_map(Value::from),
        (-1e4..1e4_f64).prop_map(Value::from),
        any::<i64>().prop_map(Value::from),
        any::<u64>().prop_map(Value::from),
        ".{0,12}".prop_map(Value::from),
        any::<String>().prop_map(Value::from),
    ];
    leaf.prop_recursive(6, 96, 12, |inner| {
        prop_oneof![
            proptest::collection::vec(inner.clone(), 0..12).prop_map(Value::from),
            proptest::collection::vec((-1e4..1e4_f64).prop_map(Value::from), 0..40)
                .prop_map(Value::from),
            proptest::collection::vec((".{0,8}", inner), 0..12)
                .prop_map(|entries| Value::Object(entries.into_iter().collect())),
        ]
    })
}

/// Equality that tells -0.0 from 0.0, 1.0 from 1, and the order of keys.
pub(super) fn same_bits(one: &Value, other: &Value) -> bool {
    match (one, other) {
        (Value::Number(a), Value::Number(b)) => {
            a.is_f64() == b.is_f64()
                && a == b
                && a.as_f64().map(f64::to_bits) == b.as_f64().map(f64::to_bits)
        }
        (Value::Array(a), Value::Array(b)) => {
            a.len() == b.len() && a.iter().zip(b).all(|(a, b)| same_bits(a, b))
        }
        (Value::Object(a), Value::Object(b)) => {
            a.len() == b.len() && a.iter().zip(b).all(|((k, a), (l, b))| k == l && same_bits(a, b))
        }
        _ => one == other,
    }
}

fn sample() -> Document {
    Document::parse("design.json", SAMPLE.as_bytes()).unwrap()
}

fn read(bytes: &[u8]) -> Result<(), Complaints> {
    let document = Document::parse("design.json", bytes)?;
    document.check(&design_schema())?;
    document.read::<Lenses>()?;
    document.read::<Wanted>()?;
    document.read::<Freedom>().map(drop)
}

fn keys(value: &Value, at: &Address, out: &mut Vec<Address>) {
    match value {
        Value::Array(list) => {
            list.iter().enumerate().for_each(|(i, e)| keys(e, &at.clone().index(i), out));
        }
        Value::Object(map) => {
            for (key, entry) in map {
                let here = at.clone().key(key.as_str());
                keys(entry, &here, out);
                out.push(here);
            }
        }
        _ => {}
    }
}

#[test]
fn the_sample_is_fine() {
    assert_eq!(read(SAMPLE.as_bytes()).map_err(|e| e.to_string()), Ok(()));
    assert_eq!(read(layout(sample().value()).as_bytes()), Ok(()));
}

#[test]
fn line_ends_and_marks_of_other_systems_are_fine() {
    let windows = format!("\u{FEFF}{}", SAMPLE.replace('\n', "\r\n"));
    assert_eq!(read(windows.as_bytes()), Ok(()));
    let document = Document::parse("d", windows.as_bytes()).unwrap();
    let at: Address = "/housing/track_mm".parse().unwrap();
    assert_eq!(document.position(&at), sample().position(&at));
}
