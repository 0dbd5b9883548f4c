//! One published schema for a document whose parts belong to several owners.

use schemars::Schema;
use serde_json::{Map, Value, json};

use super::address::Address;
use super::shape::PATTERNS;
use super::{NOTE, SCHEMA};

/// The dialect of the published schemas.
const DIALECT: &str = "https://json-schema.org/draft/2020-12/schema";

/// Keywords whose value is a schema.
const ONE_SCHEMA: [&str; 2] = ["items", "additionalProperties"];

/// Keywords whose value is a list of schemas.
const SCHEMA_LIST: [&str; 4] = ["anyOf", "oneOf", "allOf", "prefixItems"];

/// Keywords whose value is an object of schemas.
const SCHEMA_MAP: [&str; 3] = ["properties", "patternProperties", "$defs"];

/// The schema of a document of which each owner has described the keys that it owns (inline, save
/// for types that contain themselves).
///
/// Objects that several owners describe are joined: all their keys, `required` of each; a key that
/// two describe is joined in turn, lists by their entries. Two descriptions of a value that is not
/// an object or a list have both to be fulfilled. Then the rules by which documents are checked are
/// written in: an object with listed keys is closed unless its owner opened it, `note` may stand in
/// every object of a known kind and `$schema` at the root. The result is of draft 2020-12 and has
/// the title `title`.
pub fn union(title: &str, schemas: &[Schema]) -> Schema {
    let mut whole = json!({});
    for schema in schemas {
        whole = merge(&whole, schema.as_value());
    }
    close(&mut whole);
    if let Some(properties) = whole.get_mut("properties").and_then(Value::as_object_mut) {
        let about = "Where this schema lies, for editors.";
        properties.shift_insert(
            0,
            SCHEMA.into(),
            json!({ "description": about, "type": "string" }),
        );
    }
    let mut out = Map::new();
    out.insert(SCHEMA.into(), DIALECT.into());
    out.insert("title".into(), title.into());
    if let Value::Object(map) = whole {
        let rest = map.into_iter().filter(|(key, _)| !["$id", SCHEMA, "title"].contains(&&**key));
        out.extend(rest);
    }
    Schema::from(out)
}

/// What fulfils both schemas, where each tells only of its own keys.
fn merge(one: &Value, other: &Value) -> Value {
    if one == other || is_anything(other) {
        return one.clone();
    }
    if is_anything(one) {
        return other.clone();
    }
    let ((one, one_null), (other, other_null)) = (without_null(one), without_null(other));
    let joined = match (kind(&one), kind(&other)) {
        (Some("object"), Some("object")) => merge_maps(&one, &other),
        (Some("array"), Some("array")) => merge_maps(&one, &other),
        _ => json!({ "allOf": [one, other] }),
    };
    if one_null && other_null { json!({ "anyOf": [joined, { "type": "null" }] }) } else { joined }
}

fn is_anything(schema: &Value) -> bool {
    schema == &Value::Bool(true) || schema.as_object().is_some_and(Map::is_empty)
}

fn kind(schema: &Value) -> Option<&str> {
    let alternatives = ["anyOf", "oneOf", "allOf", "$ref", "enum", "const"];
    let plain = alternatives.iter().all(|keyword| schema.get(keyword).is_none());
    schema.get("type").filter(|_| plain)?.as_str()
}

/// A schema apart from null, and whether it allows null as well.
fn without_null(schema: &Value) -> (Value, bool) {
    let mut out = schema.clone();
    if let Some(Value::Array(types)) = schema.get("type")
        && let [Value::String(one), Value::String(other)] = types.as_slice()
        && [one, other].iter().any(|name| *name == "null")
    {
        out["type"] = json!(if one == "null" { other } else { one });
        return (out, true);
    }
    if let Some(Value::Array(alternatives)) = schema.get("anyOf") {
        let null = json!({ "type": "null" });
        let rest: Vec<&Value> = alternatives.iter().filter(|schema| **schema != null).collect();
        if let ([only @ Value::Object(_)], true) = (rest.as_slice(), alternatives.len() == 2) {
            let mut only = (*only).clone();
            if let (None, Some(about)) = (only.get("description"), schema.get("description")) {
                only["description"] = about.clone();
            }
            return (only, true);
        }
    }
    (out, false)
}

/// Two objects of keywords into one.
fn merge_maps(one: &Value, other: &Value) -> Value {
    let mut out = one.clone();
    for (keyword, theirs) in other.as_object().into_iter().flatten() {
        let Some(ours) = one.get(keyword) else {
            out[keyword] = theirs.clone();
            continue;
        };
        out[keyword] = match keyword.as_str() {
            "required" => merge_lists(ours, theirs),
            map if SCHEMA_MAP.contains(&map) => merge_entries(ours, theirs),
            "additionalProperties" if ours == &Value::Bool(false) => theirs.clone(),
            "additionalProperties" if theirs == &Value::Bool(false) => ours.clone(),
            single if ONE_SCHEMA.contains(&single) => merge(ours, theirs),
            low if low.starts_with("min") => larger(ours, theirs).clone(),
            high if high.starts_with("max") => smaller(ours, theirs).clone(),
            _ => ours.clone(),
        };
    }
    out
}

fn larger<'v>(one: &'v Value, other: &'v Value) -> &'v Value {
    if one.as_f64() >= other.as_f64() { one } else { other }
}

fn smaller<'v>(one: &'v Value, other: &'v Value) -> &'v Value {
    if one.as_f64() <= other.as_f64() { one } else { other }
}

fn merge_lists(one: &Value, other: &Value) -> Value {
    let mut out = one.as_array().cloned().unwrap_or_default();
    for entry in other.as_array().into_iter().flatten() {
        if !out.contains(entry) {
            out.push(entry.clone());
        }
    }
    Value::Array(out)
}

fn merge_entries(one: &Value, other: &Value) -> Value {
    let mut out = one.clone();
    for (key, theirs) in other.as_object().into_iter().flatten() {
        out[key] = one.get(key).map_or_else(|| theirs.clone(), |ours| merge(ours, theirs));
    }
    out
}

/// Writes the rules of the check into a schema and all within it.
fn close(schema: &mut Value) {
    let Value::Object(map) = schema else { return };
    for keyword in SCHEMA_MAP {
        if let Some(Value::Object(entries)) = map.get_mut(keyword) {
            entries.values_mut().for_each(close);
        }
    }
    for keyword in SCHEMA_LIST {
        if let Some(Value::Array(entries)) = map.get_mut(keyword) {
            entries.iter_mut().for_each(close);
        }
    }
    for keyword in ONE_SCHEMA {
        if let Some(inner) = map.get_mut(keyword) {
            close(inner);
        }
    }
    // serde keeps whole numbers of 32 bits to their range; schemars writes it for shorter ones only.
    let range = match map.get("format").and_then(Value::as_str) {
        Some("uint32") => Some((0, i64::from(u32::MAX))),
        Some("int32") => Some((i64::from(i32::MIN), i64::from(i32::MAX))),
        _ => None,
    };
    if let Some((least, most)) = range {
        map.entry("minimum").or_insert(least.into());
        map.entry("maximum").or_insert(most.into());
    }
    // What is read as anyOf is printed as anyOf.
    if let (Some(alternatives), false) = (map.get("oneOf").cloned(), map.contains_key("anyOf")) {
        map.shift_remove("oneOf");
        map.insert("anyOf".into(), alternatives);
    }
    let lists_keys = map.contains_key("properties") || map.contains_key("patternProperties");
    let kept = map.get("additionalProperties").is_some_and(|rest| rest != &Value::Bool(true));
    if lists_keys && !map.contains_key("additionalProperties") {
        map.insert("additionalProperties".into(), false.into());
    }
    if (lists_keys || kept) && !map.contains_key("allOf") {
        let properties = map.entry("properties").or_insert_with(|| json!({}));
        if let Value::Object(properties) = properties {
            let note = json!({ "description": "A remark.", "type": "string" });
            properties.entry(NOTE).or_insert(note);
        }
    }
}

/// Keywords that the check understands, or that ask nothing of a document.
const UNDERSTOOD: [&str; 31] = [
    "$defs",
    "$ref",
    "$schema",
    "additionalProperties",
    "allOf",
    "anyOf",
    "const",
    "default",
    "deprecated",
    "description",
    "enum",
    "examples",
    "exclusiveMaximum",
    "exclusiveMinimum",
    "format",
    "items",
    "maxItems",
    "maxLength",
    "maximum",
    "minItems",
    "minLength",
    "minimum",
    "oneOf",
    "patternProperties",
    "prefixItems",
    "properties",
    "readOnly",
    "required",
    "title",
    "type",
    "writeOnly",
];

/// The places of a schema that [`super::Document::check`] would pass over. Owners hold in a test
/// that their schemas have none.
pub fn unchecked_keywords(schema: &Schema) -> Vec<Address> {
    let mut out = Vec::new();
    find_unchecked(schema.as_value(), &Address::root(), &mut out);
    out
}

fn find_unchecked(schema: &Value, at: &Address, out: &mut Vec<Address>) {
    for (keyword, inner) in schema.as_object().into_iter().flatten() {
        let here = at.clone().key(keyword.as_str());
        match (keyword.as_str(), inner) {
            (map, Value::Object(entries)) if SCHEMA_MAP.contains(&map) => {
                for (key, entry) in entries {
                    let there = here.clone().key(key.as_str());
                    if map == "patternProperties" && !PATTERNS.contains(&key.as_str()) {
                        out.push(there.clone());
                    }
                    find_unchecked(entry, &there, out);
                }
            }
            (list, Value::Array(entries)) if SCHEMA_LIST.contains(&list) => {
                for (index, entry) in entries.iter().enumerate() {
                    find_unchecked(entry, &here.clone().index(index), out);
                }
            }
            (one, _) if ONE_SCHEMA.contains(&one) => find_unchecked(inner, &here, out),
            (known, _) if UNDERSTOOD.contains(&known) => {}
            _ => out.push(here),
        }
    }
}
