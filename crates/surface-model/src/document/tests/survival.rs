//! Files that nobody meant to be a design: no panic, no hang, a place within the text.

use std::time::{Duration, Instant};

use proptest::prelude::*;
use serde_json::json;

use super::*;

#[test]
fn a_large_wrong_document_is_told_in_time() {
    let mut value = sample().value().clone();
    let state = json!({ "name": "2x", "ratio": 2.0, "spacings_mm": [13.39, 107.22] });
    let mut states = vec![state; 100_000];
    states.extend(vec![json!({ "name": "2x", "ratio": "two" }); 100]);
    value["states"] = states.into();
    let text = layout(&value);
    let start = Instant::now();
    assert_eq!(read(text.as_bytes()).unwrap_err().count(), 200);
    let taken = start.elapsed();
    assert!(taken < Duration::from_secs(10), "{taken:?} for {} bytes", text.len());
}

#[test]
fn a_flood_is_refused_before_it_is_read() {
    let start = Instant::now();
    for byte in [b' ', b'[', b'0', b'"'] {
        let flood = std::io::Read::take(std::io::repeat(byte), 100 << 20);
        let complaints = Document::from_reader("d", flood).unwrap_err();
        assert!(complaints.to_string().contains("larger than 16 MiB"), "{complaints}");
        let complaints = Document::parse("d", &vec![byte; 100 << 20]).unwrap_err();
        assert!(complaints.to_string().contains("larger than 16 MiB"), "{complaints}");
    }
    assert!(Document::from_reader("d", std::io::Cursor::new(SAMPLE)).is_ok());
    assert!(start.elapsed() < Duration::from_secs(10));
}

/// Reading ends in a verdict whose places lie within the text, and the check is not laxer than the
/// types.
fn survives(bytes: &[u8]) {
    if let Ok(document) = Document::parse("design.json", bytes)
        && document.check(&design_schema()).is_ok()
    {
        assert_eq!(read(bytes), Ok(()), "what the schema allows, the types read");
        return;
    }
    if let Err(complaints) = read(bytes) {
        assert!(complaints.count() > 0);
        let told = complaints.to_string();
        assert!(!told.contains(|c: char| c.is_control() && c != '\n'), "{told:?}");
        let lines = bytes.iter().filter(|byte| **byte == b'\n').count() as u64 + 1;
        for problem in complaints.to_json()["problems"].as_array().unwrap() {
            assert!(
                problem["line"].as_u64().is_none_or(|line| (1..=lines).contains(&line)),
                "{told}"
            );
        }
    }
}

#[test]
fn a_design_cut_anywhere_is_survived() {
    for cut in 0..SAMPLE.len() {
        survives(&SAMPLE.as_bytes()[..cut]);
    }
}

#[test]
fn a_design_with_any_byte_changed_removed_or_added_is_survived() {
    let bytes = SAMPLE.as_bytes();
    for at in 0..bytes.len() {
        for strange in [0, 0xFF, b'"', b'{', b']', b',', b'9', b'\\'] {
            let mut changed = bytes.to_vec();
            changed[at] = strange;
            survives(&changed);
            changed[at] = bytes[at];
            changed.insert(at, strange);
            survives(&changed);
        }
        let mut changed = bytes.to_vec();
        changed[at] ^= 1 << (at % 8);
        survives(&changed);
        changed.remove(at);
        survives(&changed);
    }
}

proptest! {
    #[test]
    fn any_bytes_are_survived(bytes in proptest::collection::vec(any::<u8>(), 0..200)) {
        survives(&bytes);
    }

    #[test]
    fn any_value_is_held_against_the_schema(value in any_value()) {
        survives(layout(&value).as_bytes());
    }

    #[test]
    fn any_value_in_any_place_is_survived(value in any_value(), place in any::<prop::sample::Index>()) {
        let mut addresses = Vec::new();
        keys(sample().value(), &Address::root(), &mut addresses);
        let mut design = sample().value().clone();
        *place.get(&addresses).get_mut(&mut design).unwrap() = value;
        survives(layout(&design).as_bytes());
    }
}
