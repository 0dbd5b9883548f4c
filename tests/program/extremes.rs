//! Numbers at the edge of what a double is, in every place of a design.

use serde_json::{Value, json};

use crate::designs::{every_key, pointers, text};
use crate::program::{Ended, run_on};

const TOKENS: [&str; 9] =
    ["NaN", "Infinity", "-Infinity", "1e999", "1e308", "-1e308", "5e-324", "-0.0", "1e-300"];

/// Every design with one number replaced by an extreme one.
fn designs() -> impl Iterator<Item = (String, String)> {
    let whole = every_key();
    let numbers: Vec<String> = pointers(&whole)
        .into_iter()
        .filter(|pointer| whole.pointer(pointer).is_some_and(Value::is_number))
        .collect();
    numbers.into_iter().flat_map(move |pointer| {
        let mut design = whole.clone();
        *design.pointer_mut(&pointer).unwrap() = json!("@@");
        let written = text(&design);
        TOKENS.map(|token| (format!("{pointer} = {token}"), written.replace("\"@@\"", token)))
    })
}

/// A run that claims to be done has a document without a number that is none.
fn check(what: &str, ended: &Ended) {
    assert!([0, 1, 2].contains(&ended.status), "{what}: {}", ended.err);
    if ended.status == 0 {
        let document = ended.json();
        assert!(document.is_object(), "{what}");
    } else {
        assert!(!ended.err.is_empty() && ended.out.is_empty(), "{what}");
    }
    for word in ["NaN", "Infinity", ": inf"] {
        assert!(!ended.out.contains(word), "{what}");
    }
}

#[test]
fn assess_answers_or_refuses() {
    for (what, design) in designs() {
        let ended = run_on("assess - --json", &design);
        check(&what, &ended);
        if what.ends_with("NaN") || what.ends_with("Infinity") || what.ends_with("1e999") {
            assert_eq!(ended.status, 2, "{what}");
        }
        if ended.status == 0 {
            run_on("assess -", &design);
        }
    }
}

#[test]
fn optimise_answers_or_refuses() {
    for (what, design) in designs() {
        let ended = run_on("optimise - --json --iterations 4", &design);
        check(&what, &ended);
        if ended.status == 0 {
            let merit = |part: &str| ended.json()[part]["merit"]["total"].as_f64();
            if let Some(start) = merit("start") {
                // A start that keeps its limits ends no worse; one that crosses some may have to.
                let crossed = ended.json()["start"]["merit"]["limits"].as_f64().unwrap() > 0.0;
                let end = merit("end").unwrap();
                assert!(crossed || end <= start * (1.0 + 1e-6), "{what}: {start} to {end}");
            }
        }
    }
}
