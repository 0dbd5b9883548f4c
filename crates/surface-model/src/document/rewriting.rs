//! How a value would have to be written to be allowed: without quotes, without its unit, in
//! brackets, in an object.

use serde_json::{Number, Value, json};

use super::problems::Problems;
use super::shape::Shape;
use super::structure::check_node;
use super::trail::Trail;

/// How to write the value so that it is allowed there, if that is easily told.
pub(super) fn differently_written(value: &Value, shape: Shape, at: Trail) -> Option<String> {
    let allowed = |value: &Value| {
        let mut problems = Problems::none(0);
        check_node(value, shape, Trail::Root, &mut problems);
        problems.count() == 0
    };
    match value {
        Value::String(text) => unquoted(text.trim(), at, allowed),
        Value::Number(_) | Value::Bool(_) => wrapped(value, shape, allowed),
        _ => None,
    }
}

/// A number or a truth value that was written as a text.
fn unquoted(text: &str, at: Trail, allowed: impl Fn(&Value) -> bool) -> Option<String> {
    if let Ok(bare @ (Value::Number(_) | Value::Bool(_))) = serde_json::from_str(text) {
        return allowed(&bare).then(|| format!("write it without quotes: {bare}"));
    }
    if let Some(number) = number(&text.replacen(',', ".", 1)) {
        return allowed(&number).then(|| format!("numbers take a point: {number}"));
    }
    let end = text.find(|c: char| !(c.is_ascii_digit() || matches!(c, '.' | '-' | '+')))?;
    let (front, unit) = text.split_at(end);
    let number = number(front).filter(allowed)?;
    let unit = unit.trim();
    let own = at.last_key().and_then(|key| key.rsplit_once('_')).map(|(_, last)| last);
    Some(match own.filter(|own| UNITS.contains(own)) {
        Some(own) if own == unit => format!("the unit is in the key: write {number}"),
        Some(own) => format!("write the number alone; the key says its unit, {own}"),
        None => format!("write {number}"),
    })
}

/// Units that keys end with.
const UNITS: [&str; 10] = ["mm", "nm", "m", "urad", "mrad", "deg", "waves", "percent", "mj", "ns"];

fn number(text: &str) -> Option<Value> {
    let whole = text.parse::<i64>().ok().map(Number::from);
    whole.or_else(|| Number::from_f64(text.parse().ok()?)).map(Value::Number)
}

/// A value that belongs into quotes, brackets or an object.
fn wrapped(value: &Value, shape: Shape, allowed: impl Fn(&Value) -> bool) -> Option<String> {
    if allowed(&Value::String(value.to_string())) {
        return Some(format!("put it in quotes: \"{value}\""));
    }
    if allowed(&Value::Array(vec![value.clone()])) {
        return Some(format!("a list stands in brackets: [{value}]"));
    }
    let forms: Vec<String> = keys_for_one_number(shape)
        .into_iter()
        .filter(|key| value.is_number() && allowed(&json!({ *key: value })))
        .map(|key| format!("{{ \"{key}\": {value} }}"))
        .collect();
    (!forms.is_empty()).then(|| format!("write {}", forms.join(" or ")))
}

/// Ends of a range.
const ENDS: [&str; 2] = ["min", "max"];

/// The keys under which an object may hold one number and nothing else.
fn keys_for_one_number(shape: Shape<'_>) -> Vec<&str> {
    let alternatives = shape.alternatives();
    let shapes = if alternatives.is_empty() { vec![shape] } else { alternatives };
    for object in shapes {
        let required: Vec<&str> = object.required().collect();
        match required.as_slice() {
            [] => {
                let keys = object.keys().map(|(key, _)| key);
                let ends: Vec<&str> = keys.filter(|key| ENDS.contains(key)).collect();
                if !ends.is_empty() {
                    return ends;
                }
            }
            [only] => return vec![only],
            _ => {}
        }
    }
    Vec::new()
}
