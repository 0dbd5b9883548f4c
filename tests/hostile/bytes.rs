//! Files spoilt byte by byte, and in several places at once.

use std::panic::catch_unwind;

use proptest::prelude::*;
use proptest::sample::Index;
use serde_json::{Value, json};

use checks::judges::design::judge;
use checks::judges::mutants::one;
use checks::judges::shipped::{DESIGNS, changed};

/// A shipped design with every kind of number free and every surface shaped.
fn all_free(name: &str) -> String {
    let words = ["radii", "spacings", "thicknesses", "airs", "conics", "aspheres"];
    let mut root = changed(name, &[("/free", json!(words)), ("/held", json!([]))]);
    for group in root["groups"].as_array_mut().unwrap() {
        for element in group["elements"].as_array_mut().unwrap() {
            let surfaces = element["radii_mm"].as_array().unwrap().len();
            let shape = json!({ "conic": -0.5, "asphere": { "4": 1e-9, "12": 0.0 } });
            element["shapes"] = Value::Array(vec![shape; surfaces]);
        }
    }
    root.to_string()
}

/// Texts that files are spoilt with: numbers, brackets and other pieces of the format.
fn piece() -> impl Strategy<Value = Vec<u8>> {
    let known = prop::sample::select(vec![
        "0",
        "-",
        "1e9",
        "1e-300",
        "\"",
        "\\",
        "{",
        "}",
        "[",
        "]",
        ",",
        ":",
        "null",
        "\"flat\"",
        "\"free\"",
        "\u{feff}",
        "\u{0}",
        "/*",
        "//",
        "e",
        ".",
        "\"note\":",
        "\"radii\"",
        "\"*\"",
        "-0.0",
        "\r\n",
    ]);
    prop_oneof![
        4 => known.prop_map(|text| text.as_bytes().to_vec()),
        1 => prop::collection::vec(any::<u8>(), 0..6),
    ]
}

proptest! {
    #![proptest_config(ProptestConfig { cases: cases(250), failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_bytes_are_answered(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        prop_assert_eq!(judge(&bytes, 2).err(), None);
    }

    #[test]
    fn a_design_spoilt_byte_by_byte_is_answered(
        which in 0..DESIGNS.len(),
        wounds in prop::collection::vec((any::<Index>(), 0..12_usize, piece()), 1..5),
    ) {
        let mut bytes = DESIGNS[which].1.as_bytes().to_vec();
        for (at, taken, piece) in wounds {
            let at = at.index(bytes.len());
            let end = (at + taken).min(bytes.len());
            bytes.splice(at..end, piece);
        }
        prop_assert_eq!(judge(&bytes, 4).err(), None);
    }

    #[test]
    fn a_design_of_free_numbers_spoilt_in_several_places_is_answered(
        which in 0..DESIGNS.len(),
        wounds in prop::collection::vec((any::<Index>(), any::<Index>()), 1..4),
    ) {
        let mut text = all_free(DESIGNS[which].0);
        for (place, change) in wounds {
            // What is JSON no longer cannot be spoilt further.
            let Ok(root) = serde_json::from_str(&text) else { break };
            text = one(&root, |of| place.index(of), |of| change.index(of));
        }
        let verdict = catch_unwind(|| judge(text.as_bytes(), 6));
        let verdict = verdict.unwrap_or_else(|_| Err("a panic".into()));
        prop_assert!(verdict.is_ok(), "{:?}\n{}", verdict, text);
    }
}

/// `PROPTEST_CASES` asks for more than the usual number.
fn cases(usual: u32) -> u32 {
    std::env::var("PROPTEST_CASES").ok().and_then(|cases| cases.parse().ok()).unwrap_or(usual)
}
