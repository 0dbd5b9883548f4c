//! Every key of a design removed, of a wrong type, misspelt, out of range: one at a time.

use serde_json::{Value, json};

use crate::designs::{every_key, pointers, text};
use crate::program::{Ended, run_on};

fn assess(design: &Value) -> Ended {
    let ended = run_on("assess - --json", &text(design));
    assert!([0, 2].contains(&ended.status), "{}", ended.err);
    ended
}

/// Holds what is told about each change for a snapshot; a change that does no harm is named.
fn told(changes: impl IntoIterator<Item = (String, Value)>) -> String {
    let each = changes.into_iter().map(|(what, design)| {
        let ended = assess(&design);
        let words = if ended.status == 0 { "is taken\n".to_owned() } else { ended.err };
        format!("# {what}\n{words}")
    });
    each.collect::<Vec<_>>().join("\n")
}

fn split(pointer: &str) -> (&str, &str) {
    pointer.rsplit_once('/').unwrap()
}

fn map_at<'v>(
    design: &'v mut Value,
    pointer: &str,
) -> Option<&'v mut serde_json::Map<String, Value>> {
    design.pointer_mut(pointer)?.as_object_mut()
}

#[test]
fn the_design_itself_is_taken() {
    assert_eq!(assess(&every_key()).status, 0);
}

#[test]
fn every_key_removed() {
    let whole = every_key();
    let changes = pointers(&whole).into_iter().filter_map(|pointer| {
        let mut design = whole.clone();
        let (parent, key) = split(&pointer);
        map_at(&mut design, parent)?.shift_remove(key)?;
        Some((pointer, design))
    });
    insta::assert_snapshot!(told(changes));
}

#[test]
fn every_value_of_a_wrong_type() {
    let whole = every_key();
    let changes = pointers(&whole).into_iter().map(|pointer| {
        let mut design = whole.clone();
        let value = design.pointer_mut(&pointer).unwrap();
        *value = match value {
            Value::String(_) | Value::Object(_) | Value::Array(_) => json!(7),
            _ => json!("seven"),
        };
        (pointer, design)
    });
    insta::assert_snapshot!(told(changes));
}

#[test]
fn every_key_misspelt() {
    let whole = every_key();
    for pointer in pointers(&whole) {
        let (parent, key) = split(&pointer);
        // Names of own glasses and powers of r are the user's; two letters are no likeness.
        // Remarks are not suggested.
        let own = parent == "/glasses" || parent.ends_with("/asphere");
        if own || key.len() < 3 || key == "$schema" || key == "note" {
            continue;
        }
        let mut design = whole.clone();
        let Some(map) = map_at(&mut design, parent) else { continue };
        // The last two letters change places.
        let (front, back) = key.split_at(key.len() - 2);
        let wrong = format!("{front}{}", back.chars().rev().collect::<String>());
        if wrong == key {
            continue;
        }
        let entries = std::mem::take(map).into_iter();
        *map = entries.map(|(k, v)| if k == key { (wrong.clone(), v) } else { (k, v) }).collect();
        let ended = assess(&design);
        assert_eq!(ended.status, 2, "{pointer}");
        let written = text(&design);
        let line = 1 + written.lines().position(|l| l.contains(&format!("\"{wrong}\":"))).unwrap();
        let place = format!("standard input:{line}:");
        assert!(ended.err.contains(&place), "{pointer} is in line {line}: {}", ended.err);
        let suggestion = format!("did you mean \"{key}\"?");
        assert!(ended.err.contains(&suggestion), "{pointer}: {}", ended.err);
    }
}

#[test]
fn every_number_out_of_range() {
    let whole = every_key();
    let changes = pointers(&whole).into_iter().flat_map(|pointer| {
        let number = whole.pointer(&pointer).is_some_and(Value::is_number);
        let values: &[f64] = if number { &[-1e3, 0.0, 1e12] } else { &[] };
        let whole = whole.clone();
        values.iter().map(move |&value| {
            let mut design = whole.clone();
            *design.pointer_mut(&pointer).unwrap() = json!(value);
            (format!("{pointer} = {value:e}"), design)
        })
    });
    insta::assert_snapshot!(told(changes));
}

#[test]
fn names_that_stand_twice_and_melts_in_a_circle() {
    let mut groups = every_key();
    groups["groups"][1]["name"] = json!("entry");
    let mut states = every_key();
    states["states"][1]["name"] = json!("2x");
    let mut circle = every_key();
    circle["glasses"]["melt"]["from"] = json!("other");
    circle["glasses"]["other"] = json!({ "from": "melt", "index_shift": 0.001 });
    let mut shadow = every_key();
    shadow["glasses"]["N-BK7"] = json!({ "index": 1.5 });
    let list = [("groups", groups), ("states", states), ("circle", circle), ("shadow", shadow)];
    let mut words = told(list.map(|(what, design)| (what.to_owned(), design)));
    let twice = text(&every_key()).replacen("\"title\"", "\"title\": \"one\",\n  \"title\"", 1);
    words.push_str(&format!("\n# a key twice\n{}", run_on("assess -", &twice).err));
    insta::assert_snapshot!(words);
}
