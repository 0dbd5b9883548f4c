//! The schema that is published, and that it is the one that is checked.

use schemars::{JsonSchema, Schema};
use serde_json::{Value, json};

use super::design::inline;
use super::*;

#[test]
fn remarks_may_stand_in_every_object() {
    fn remark(value: &mut Value) {
        match value {
            Value::Array(list) => list.iter_mut().for_each(remark),
            Value::Object(map) => {
                map.values_mut().for_each(remark);
                map.insert("note".into(), "as measured".into());
            }
            _ => {}
        }
    }
    let mut value = sample().value().clone();
    remark(&mut value);
    value["$schema"] = "drawtube.schema.json".into();
    assert_eq!(read(layout(&value).as_bytes()).map_err(|e| e.to_string()), Ok(()));
    value["beam"]["$schema"] = "no".into();
    value["beam"]["note"] = 3.into();
    assert_eq!(read(layout(&value).as_bytes()).unwrap_err().count(), 2);
}

#[test]
fn the_published_schema_is_one_with_the_check() {
    let schema = design_schema();
    assert_eq!(unchecked_keywords(&schema), []);
    let root = schema.as_value();
    assert_eq!(root["$schema"], "https://json-schema.org/draft/2020-12/schema");
    assert_eq!(root["title"], "Design");
    assert_eq!(root["additionalProperties"], false);
    assert_eq!(root.get("$id"), None);
    let state = &root["properties"]["states"]["items"];
    let known: Vec<_> = state["properties"].as_object().unwrap().keys().collect();
    assert_eq!(known, ["name", "ratio", "spacings_mm", "weight", "rounds", "note"]);
    assert_eq!(state["required"], json!(["name", "ratio", "spacings_mm"]));
    assert_eq!(state["additionalProperties"], false);
    let beam = &root["properties"]["beam"]["properties"];
    assert_eq!(beam["diameter_mm"]["description"], "Diameter at 1/e² of the peak, in mm.");
    insta::assert_snapshot!(layout(&root["properties"]["glasses"]), @r#"
    {
      "type": "object",
      "additionalProperties": {
        "anyOf": [
          {
            "type": "object",
            "properties": {
              "from": { "type": "string" },
              "index_shift": { "type": "number", "format": "double" },
              "note": { "description": "A remark.", "type": "string" }
            },
            "required": ["from", "index_shift"],
            "additionalProperties": false
          },
          {
            "type": "object",
            "properties": {
              "index": { "type": "number", "format": "double" },
              "note": { "description": "A remark.", "type": "string" }
            },
            "required": ["index"],
            "additionalProperties": false
          }
        ]
      },
      "properties": { "note": { "description": "A remark.", "type": "string" } }
    }
    "#);
}

#[test]
fn a_keyword_the_check_does_not_know_is_found() {
    let schema = Schema::try_from(json!({ "properties": { "a": { "pattern": "^x" } } })).unwrap();
    assert_eq!(unchecked_keywords(&schema), ["/properties/a/pattern".parse().unwrap()]);
}

#[test]
fn parts_of_optional_objects_are_joined() {
    let part = |key: &str, wrap: fn(Value) -> Value| {
        let object = json!({ "type": "object", "properties": { key: { "type": "number" } } });
        let root = json!({ "type": "object", "properties": { "goals": wrap(object) } });
        Schema::try_from(root).unwrap()
    };
    let by_alternatives = |object| json!({ "anyOf": [object, { "type": "null" }] });
    let by_type = |mut object: Value| {
        object["type"] = json!(["object", "null"]);
        object
    };
    let schema = union("Goals", &[part("one", by_alternatives), part("two", by_type)]);
    let fits = |value| Document::from_value("d", value).check(&schema).is_ok();
    assert!(fits(json!({ "goals": { "one": 1, "two": 2 } })));
    assert!(fits(json!({ "goals": null })));
    assert!(!fits(json!({ "goals": { "three": 3 } })));
    let schema = union("Goals", &[part("one", by_alternatives), part("two", |object| object)]);
    let fits = |value| Document::from_value("d", value).check(&schema).is_ok();
    assert!(!fits(json!({ "goals": null })), "one of the two owners needs it");
}

#[test]
fn a_schema_that_refers_to_itself_is_followed() {
    #[derive(JsonSchema)]
    #[expect(dead_code, reason = "only its schema matters")]
    struct Branch {
        leaves: u8,
        branches: Vec<Branch>,
    }
    let schema = union("Branch", &[inline::<Branch>()]);
    let check = |value| Document::from_value("d", value).check(&schema);
    let twig = json!({ "leaves": 2, "branches": [] });
    assert_eq!(check(json!({ "leaves": 1, "branches": [twig] })), Ok(()));
    let twig = json!({ "leaves": 300, "branches": [] });
    let told = check(json!({ "leaves": 1, "branches": [{ "leaves": 0, "branches": [twig] }] }));
    insta::assert_snapshot!(told.unwrap_err(), @r#"
    d:1:69: "leaves" is 300
      at /branches/0/branches/0/leaves
      expected: a whole number from 0 to 255
    "#);
}

#[test]
fn what_two_owners_require_is_required() {
    let part = |key: &str| {
        let entry = json!({
            "type": "object", "properties": { key: { "type": "number" } }, "required": [key]
        });
        Schema::try_from(json!({
            "type": "object",
            "properties": { "states": { "type": "array", "items": entry, "minItems": 1 } },
            "required": ["states"]
        }))
        .unwrap()
    };
    let schema = union("States", &[part("ratio"), part("weight")]);
    assert_eq!(schema.as_value()["required"], json!(["states"]));
    let count = |value| match Document::from_value("d", value).check(&schema) {
        Ok(()) => 0,
        Err(complaints) => complaints.count(),
    };
    assert_eq!(count(json!({ "states": [{ "ratio": 1, "weight": 2 }] })), 0);
    assert_eq!(count(json!({ "states": [{}] })), 2);
    assert_eq!(count(json!({ "states": [] })), 1);
}

#[test]
fn alternatives_that_look_alike_are_all_tried() {
    let list = |kind: &str| json!({ "type": "array", "items": { "type": kind } });
    let schema = json!({ "anyOf": [list("number"), list("string"), { "type": "null" }] });
    let schema = Schema::try_from(schema).unwrap();
    let check = |value| Document::from_value("d", value).check(&schema);
    assert_eq!(check(json!(["a", "b"])), Ok(()));
    assert_eq!(check(json!([1, 2])), Ok(()));
    insta::assert_snapshot!(check(json!(["a", "b", 3])).unwrap_err(), @r#"
    d:1:12: entry 2 is the number 3
      at /2
      expected: a text in quotes
      put it in quotes: "3"
    "#);
}
