//! Holding values against a JSON Schema (draft 2020-12, as far as schemars writes it): everything
//! that is wrong, in words.
//!
//! Two rules go beyond the standard, and [`super::union`] writes them into the schema that is
//! published: an object whose schema lists `properties` is closed unless the schema says otherwise,
//! and the key `note` is allowed in every object, `$schema` at the root. `oneOf` is read as
//! `anyOf`. In one respect the check is stricter: a whole number may not be written `3.0`, because
//! serde does not read it as one. Schemas are the program's own: those that refer to themselves
//! through several alternatives at once would make the check slow.

use schemars::Schema;
use serde_json::{Map, Value};

use super::alternatives::check_alternatives;
use super::complaint::MOST_COMPLAINTS;
use super::problems::Problems;
use super::rewriting::differently_written;
use super::shape::{KeyShape, Shape};
use super::structure_error::StructureError;
use super::suggest::{nearest, nearest_key};
use super::trail::Trail;
use super::wording::{counted, did_you_mean, in_words, one_of, quoted};

/// Everything in `value` that `schema` does not allow.
pub(super) fn check(value: &Value, schema: &Schema) -> Problems {
    let mut problems = Problems::none(MOST_COMPLAINTS);
    check_node(value, Shape::of(schema.as_value()), Trail::Root, &mut problems);
    problems
}

/// Checks a value and all within it.
pub(super) fn check_node(value: &Value, shape: Shape, at: Trail, problems: &mut Problems) {
    if !shape.takes_type_of(value) {
        problems.add(|| wrong_type(value, shape, at));
        return;
    }
    if let Some(choices) = shape.choices() {
        check_choice(value, choices, shape, at, problems);
        return;
    }
    shape.all_of().for_each(|part| check_node(value, part, at, problems));
    check_alternatives(value, shape, at, problems);
    match value {
        Value::Number(_) => check_number(value, shape, at, problems),
        Value::String(text) => {
            check_length(
                text.chars().count(),
                ["minLength", "maxLength"],
                "character",
                shape,
                at,
                problems,
            );
        }
        Value::Array(list) => check_list(list, shape, at, problems),
        Value::Object(map) => check_object(map, shape, at, problems),
        Value::Null | Value::Bool(_) => {}
    }
}

/// The problem of a value that is of none of the types allowed.
pub(super) fn wrong_type(value: &Value, shape: Shape, at: Trail) -> StructureError {
    StructureError::WrongType {
        at: at.address(),
        found: in_words(value),
        expected: shape.in_words(),
        advice: differently_written(value, shape, at),
    }
}

/// Checks a value that may only be one of `choices`, of all that `shape` allows.
pub(super) fn check_choice(
    value: &Value,
    choices: &[Value],
    shape: Shape,
    at: Trail,
    problems: &mut Problems,
) {
    if choices.contains(value) {
        return;
    }
    problems.add(|| {
        let words = choices.iter().filter_map(Value::as_str);
        let near = value.as_str().and_then(|word| nearest(word, words));
        StructureError::NotAChoice {
            at: at.address(),
            found: in_words(value),
            expected: shape.in_words(),
            advice: near.map(did_you_mean).or_else(|| differently_written(value, shape, at)),
        }
    });
}

fn check_number(value: &Value, shape: Shape, at: Trail, problems: &mut Problems) {
    if shape.is_whole() && value.is_f64() {
        problems.add(|| StructureError::WrongType {
            at: at.address(),
            found: in_words(value),
            expected: shape.number_in_words(),
            advice: whole(value).map(|whole| format!("write it without a point: {whole}")),
        });
        return;
    }
    let Some(number) = value.as_f64() else { return };
    let fits = shape.number("minimum").is_none_or(|least| number >= least)
        && shape.number("maximum").is_none_or(|most| number <= most)
        && shape.number("exclusiveMinimum").is_none_or(|limit| number > limit)
        && shape.number("exclusiveMaximum").is_none_or(|limit| number < limit);
    if !fits {
        problems.add(|| StructureError::OutOfRange {
            at: at.address(),
            found: value.to_string(),
            expected: shape.number_in_words(),
        });
    }
}

/// The whole number that is written with a point.
fn whole(value: &Value) -> Option<String> {
    let number = value.as_f64().filter(|n| n.fract() == 0.0 && n.abs() < 1e15)?;
    Some(format!("{number:.0}"))
}

fn check_length(
    length: usize,
    [least, most]: [&str; 2],
    noun: &str,
    shape: Shape,
    at: Trail,
    problems: &mut Problems,
) {
    let (least, most) = (shape.count(least), shape.count(most));
    if least.is_none_or(|least| length >= least) && most.is_none_or(|most| length <= most) {
        return;
    }
    problems.add(|| StructureError::WrongLength {
        at: at.address(),
        found: counted(length, noun),
        expected: match (least, most) {
            (Some(least), Some(most)) if least == most => counted(least, noun),
            (Some(least), Some(most)) => format!("{least} to {}", counted(most, noun)),
            (Some(least), None) => format!("at least {}", counted(least, noun)),
            (None, most) => format!("at most {}", counted(most.unwrap_or_default(), noun)),
        },
    });
}

fn check_list(list: &[Value], shape: Shape, at: Trail, problems: &mut Problems) {
    check_length(list.len(), ["minItems", "maxItems"], "entry", shape, at, problems);
    for (index, entry) in list.iter().enumerate() {
        match shape.entry(index) {
            Some(expected) => check_node(entry, expected, Trail::Index(&at, index), problems),
            None => {
                // One problem is enough for all the entries that are too many.
                if shape.count("maxItems").is_none() {
                    problems.add(|| StructureError::WrongLength {
                        at: at.address(),
                        found: counted(list.len(), "entry"),
                        expected: format!("at most {}", counted(index, "entry")),
                    });
                }
                break;
            }
        }
    }
}

fn check_object(map: &Map<String, Value>, shape: Shape, at: Trail, problems: &mut Problems) {
    let missing: Vec<&str> = shape.required().filter(|key| !map.contains_key(*key)).collect();
    let unused = || shape.keys().map(|(key, _)| key).filter(|key| !map.contains_key(*key));
    // A misspelt key is one mistake, not one unknown and one missing.
    let meant: Vec<Option<&str>> = map
        .keys()
        .filter(|key| matches!(shape.key(key, at.is_root()), KeyShape::Unknown))
        .take(MOST_COMPLAINTS)
        .map(|key| nearest_key(key, &unused().collect::<Vec<_>>()))
        .collect();
    for key in missing.into_iter().filter(|key| !meant.contains(&Some(key))) {
        problems.add(|| StructureError::MissingKey {
            at: at.address(),
            key: key.to_owned(),
            expected: missing_in_words(key, shape),
        });
    }
    for (key, entry) in map {
        let here = Trail::Key(&at, key);
        match shape.key(key, at.is_root()) {
            KeyShape::Known(expected) => check_node(entry, expected, here, problems),
            KeyShape::Remark if entry.is_string() => {}
            KeyShape::Remark => problems.add(|| StructureError::WrongType {
                at: here.address(),
                found: in_words(entry),
                expected: "a text in quotes".into(),
                advice: None,
            }),
            KeyShape::Unknown => problems.add(|| unknown_key(key, map, shape, here)),
        }
    }
}

fn missing_in_words(key: &str, shape: Shape) -> String {
    let found = shape.keys().find(|(known, _)| *known == key);
    let Some((_, expected)) = found else { return format!("the key {}", quoted(key)) };
    match expected.remark() {
        Some(remark) => format!("{}: {} ({remark})", quoted(key), expected.in_words()),
        None => format!("{}: {}", quoted(key), expected.in_words()),
    }
}

fn unknown_key(key: &str, map: &Map<String, Value>, shape: Shape, at: Trail) -> StructureError {
    let known: Vec<&str> =
        shape.keys().map(|(known, _)| known).filter(|k| !super::is_remark(k)).collect();
    let unused: Vec<&str> = known.iter().copied().filter(|key| !map.contains_key(*key)).collect();
    let near = nearest_key(key, &unused).or_else(|| nearest(key, known.iter().copied()));
    let expected = if !known.is_empty() {
        one_of(known)
    } else if shape.get("patternProperties").is_some() {
        "a whole number, in quotes since it is a key".into()
    } else {
        "no key but \"note\"".into()
    };
    StructureError::UnknownKey {
        at: at.address(),
        key: key.to_owned(),
        expected,
        nearest: near.map(str::to_owned),
    }
}
