//! Whole documents, read, checked and complained about as a user meets it.

use std::collections::BTreeMap;
use std::time::{Duration, Instant};

use proptest::prelude::*;
use schemars::{JsonSchema, Schema, generate::SchemaSettings};
use serde::Deserialize;
use serde_json::{Value, json};

use super::*;

/// A design with every kind of key.
pub(super) const SAMPLE: &str = r#"{
  "format": "drawtube/1",
  "title": "River-survey lidar transmitter, 2x to 6x",
  "beam": { "wavelengths_nm": [532.0], "diameter_mm": 2.4, "traced_to": 1.5 },
  "glasses": {
    "melt-4471": { "from": "N-BK7", "index_shift": 0.00021 },
    "bench-medium": { "index": 1.62 }
  },
  "groups": [
    { "name": "entry",  "elements": [ { "radii_mm": [74.76, -20.16], "glasses": ["fused-silica"], "thicknesses_mm": [3.0], "diameter_mm": 8.0 } ] },
    { "name": "runner", "elements": [ { "radii_mm": [-23.63, 8.94], "glasses": ["fused-silica"], "thicknesses_mm": [2.0], "diameter_mm": 8.0 } ] },
    { "name": "exit",
      "elements": [ { "name": "pair", "radii_mm": [426.0, -60.0, -85.6], "glasses": ["N-BK7", "N-SF6"], "thicknesses_mm": [5.0, 2.0], "diameter_mm": 26.0 },
                    { "radii_mm": ["flat", -300.0], "glasses": ["fused-silica"], "thicknesses_mm": [4.0], "diameter_mm": 26.0,
                      "shapes": [ null, { "conic": -1.2, "asphere": { "4": 1.1e-7 } } ] } ],
      "airs_mm": [1.0] }
  ],
  "housing": { "track_mm": 150.0, "fixed": ["exit"] },
  "states": [
    { "name": "2x", "ratio": 2.0, "spacings_mm": [13.39, 107.22] },
    { "name": "6x", "ratio": 6.0, "spacings_mm": [1.00, 127.88], "weight": 1.0 }
  ],
  "free": ["radii", "spacings", { "at": "/groups/exit/elements/pair/thicknesses_mm/0", "min": 3.0, "max": 8.0 }],
  "held": ["/groups/entry/elements/0/radii_mm/1"]
}
"#;

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct Lenses {
    format: Format,
    /// What the file is about.
    title: Option<String>,
    beam: Beam,
    #[serde(default)]
    glasses: BTreeMap<String, Glass>,
    #[schemars(length(min = 1))]
    groups: Vec<Group>,
    housing: Housing,
    states: Vec<State>,
}

#[derive(Debug, Deserialize, JsonSchema)]
enum Format {
    #[serde(rename = "drawtube/1")]
    One,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct Beam {
    #[schemars(length(min = 1), inner(range(min = 1.0)))]
    wavelengths_nm: Vec<f64>,
    /// Diameter at 1/e² of the peak, in mm.
    #[schemars(extend("exclusiveMinimum" = 0.0))]
    diameter_mm: f64,
    #[schemars(range(min = 0.5, max = 4.0))]
    traced_to: Option<f64>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[serde(untagged)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
enum Glass {
    Melt { from: String, index_shift: f64 },
    Constant { index: f64 },
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct Group {
    name: Option<String>,
    elements: Vec<Element>,
    airs_mm: Option<Vec<f64>>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct Element {
    name: Option<String>,
    radii_mm: Vec<Radius>,
    glasses: Vec<String>,
    thicknesses_mm: Vec<f64>,
    diameter_mm: f64,
    shapes: Option<Vec<Option<Form>>>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[serde(untagged)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
enum Radius {
    Curved(f64),
    Flat(Flat),
}

#[derive(Debug, Deserialize, JsonSchema)]
#[serde(rename_all = "lowercase")]
enum Flat {
    Flat,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct Form {
    conic: Option<f64>,
    asphere: Option<BTreeMap<u32, f64>>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct Housing {
    track_mm: f64,
    fixed: Option<Vec<String>>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema and its reading matter")]
struct State {
    name: String,
    ratio: f64,
    spacings_mm: Vec<f64>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema matters")]
struct Wanted {
    states: Vec<Weighted>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema matters")]
struct Weighted {
    weight: Option<f64>,
    rounds: Option<u32>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[expect(dead_code, reason = "only its schema matters")]
struct Freedom {
    free: Option<Vec<Free>>,
    held: Option<Vec<String>>,
}

#[derive(Debug, Deserialize, JsonSchema)]
#[serde(untagged)]
#[expect(dead_code, reason = "only its schema matters")]
enum Free {
    Kind(Kind),
    Range { at: String, min: Option<f64>, max: Option<f64> },
}

#[derive(Debug, Deserialize, JsonSchema)]
#[serde(rename_all = "lowercase")]
enum Kind {
    /// The radii.
    Radii,
    /// The spacings.
    Spacings,
    Thicknesses,
}

fn inline<T: JsonSchema>() -> Schema {
    let settings =
        SchemaSettings::draft2020_12().with(|settings| settings.inline_subschemas = true);
    settings.into_generator().into_root_schema_for::<T>()
}

fn design_schema() -> Schema {
    union("Design", &[inline::<Lenses>(), inline::<Wanted>(), inline::<Freedom>()])
}

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

/// All that is said about the sample after `from` has become `to`, up to the typed reading.
fn told(from: &str, to: &str) -> String {
    assert!(SAMPLE.contains(from), "{from}");
    let text = SAMPLE.replacen(from, to, 1);
    match read(text.as_bytes()) {
        Ok(()) => "fine".into(),
        Err(complaints) => complaints.to_string(),
    }
}

fn read(bytes: &[u8]) -> Result<(), Complaints> {
    let document = Document::parse("design.json", bytes)?;
    document.check(&design_schema())?;
    document.read::<Lenses>()?;
    document.read::<Wanted>()?;
    document.read::<Freedom>().map(drop)
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
fn typical_mistakes_are_told_well() {
    insta::assert_snapshot!(told(r#""wavelengths_nm""#, r#""wavelength_nm""#), @r#"
    design.json:4:13: the key "wavelength_nm" is not known here
      at /beam/wavelength_nm
      expected: one of "wavelengths_nm", "diameter_mm", "traced_to"
      did you mean "wavelengths_nm"?
    "#);
    insta::assert_snapshot!(told(r#", "diameter_mm": 2.4"#, ""), @r#"
    design.json:4:11: the key "diameter_mm" is missing
      at /beam
      expected: "diameter_mm": a number above 0 (Diameter at 1/e² of the peak, in mm)
    "#);
    insta::assert_snapshot!(told("2.4", "\"2.4\""), @r#"
    design.json:4:55: "diameter_mm" is the text "2.4"
      at /beam/diameter_mm
      expected: a number above 0
      write it without quotes: 2.4
    "#);
    insta::assert_snapshot!(told("2.4", "-0.0"), @r#"
    design.json:4:55: "diameter_mm" is -0.0
      at /beam/diameter_mm
      expected: a number above 0
    "#);
    insta::assert_snapshot!(told("\"traced_to\": 1.5", "\"traced_to\": 9"), @r#"
    design.json:4:73: "traced_to" is 9
      at /beam/traced_to
      expected: a number from 0.5 to 4
    "#);
    insta::assert_snapshot!(told("[532.0]", "532.0"), @r#"
    design.json:4:31: "wavelengths_nm" is the number 532.0
      at /beam/wavelengths_nm
      expected: a list of numbers
      a list stands in brackets: [532.0]
    "#);
    insta::assert_snapshot!(told("[532.0]", "[]"), @r#"
    design.json:4:31: "wavelengths_nm" has no entries
      at /beam/wavelengths_nm
      expected: at least 1 entry
    "#);
    insta::assert_snapshot!(told("\"flat\"", "\"Flat\""), @r#"
    design.json:14:36: entry 0 of "radii_mm" is the text "Flat"
      at /groups/exit/elements/1/radii_mm/0
      expected: a number or "flat"
      did you mean "flat"?
    "#);
    insta::assert_snapshot!(told("\"flat\"", "\"-85.5\""), @r#"
    design.json:14:36: entry 0 of "radii_mm" is the text "-85.5"
      at /groups/exit/elements/1/radii_mm/0
      expected: a number or "flat"
      write it without quotes: -85.5
    "#);
    insta::assert_snapshot!(told("\"flat\"", "null"), @r#"
    design.json:14:36: entry 0 of "radii_mm" is null
      at /groups/exit/elements/1/radii_mm/0
      expected: a number or "flat"
    "#);
    insta::assert_snapshot!(told("\"spacings\"", "\"spacing\""), @r#"
    design.json:23:21: entry 1 of "free" is the text "spacing"
      at /free/1
      expected: "thicknesses", "radii", "spacings" or an object with "at"
      did you mean "spacings"?
    "#);
    insta::assert_snapshot!(told("\"spacings\"", "7"), @r#"
    design.json:23:21: entry 1 of "free" is the number 7
      at /free/1
      expected: "thicknesses", "radii", "spacings" or an object with "at"
    "#);
    insta::assert_snapshot!(told("\"index_shift\": 0.00021", "\"index_shft\": 0.00021"), @r#"
    design.json:6:37: the key "index_shft" is not known here
      at /glasses/melt-4471/index_shft
      expected: "from" or "index_shift"
      did you mean "index_shift"?
    "#);
    insta::assert_snapshot!(told("{ \"index\": 1.62 }", "{ \"index\": \"high\" }"), @r#"
    design.json:7:32: "index" is the text "high"
      at /glasses/bench-medium/index
      expected: a number
    "#);
    insta::assert_snapshot!(told("\"4\": 1.1e-7", "\"four\": 1.1e-7"), @r#"
    design.json:15:71: the key "four" is not known here
      at /groups/exit/elements/1/shapes/1/asphere/four
      expected: a whole number, in quotes since it is a key
    "#);
    insta::assert_snapshot!(told("drawtube/1", "drawtube/2"), @r#"
    design.json:2:13: "format" is the text "drawtube/2"
      at /format
      expected: "drawtube/1"
      did you mean "drawtube/1"?
    "#);
    insta::assert_snapshot!(told("\"weight\": 1.0", "\"rounds\": 3.0"), @r#"
    design.json:21:76: "rounds" is the number 3.0
      at /states/6x/rounds
      expected: a whole number from 0 to 4294967295
      write it without a point: 3
    "#);
    insta::assert_snapshot!(told("\"weight\": 1.0", "\"rounds\": 5000000000"), @r#"
    design.json:21:76: "rounds" is 5000000000
      at /states/6x/rounds
      expected: a whole number from 0 to 4294967295
    "#);
    insta::assert_snapshot!(told("\"weight\": 1.0", "\"ratio\": 3"), @r#"
    design.json:21:66: the key "ratio" occurs twice in the same object
      expected: every key once
      it is first given at line 21, column 21
    "#);
    insta::assert_snapshot!(told("\"airs_mm\": [1.0]", "\"\\u001b[31m\\n\u{202e}\": [1.0]"), @r#"
    design.json:16:7: the key "\u{1b}[31m\n\u{202e}" is not known here
      at /groups/exit/\u{1b}[31m\n\u{202e}
      expected: one of "name", "elements", "airs_mm"
    "#);
    insta::assert_snapshot!(told("[1.00, 127.88]", "[1.00, 1e999]"), @r#"
    design.json:21:57: the number 1e999 is beyond ±1.8e308
      expected: a finite number
    "#);
}

#[test]
fn several_mistakes_come_in_the_order_of_the_text() {
    let text = SAMPLE.replace("\"track_mm\"", "\"trak_mm\"").replace("\"beam\"", "\"baem\"");
    insta::assert_snapshot!(read(text.as_bytes()).unwrap_err(), @r#"
    design.json:4:3: the key "baem" is not known here
      at /baem
      expected: one of "format", "title", "beam", "glasses", "groups", "housing", "states", "free", "held"
      did you mean "beam"?
    design.json:18:16: the key "trak_mm" is not known here
      at /housing/trak_mm
      expected: "track_mm" or "fixed"
      did you mean "track_mm"?
    "#);
}

#[test]
fn more_than_twenty_mistakes_are_counted() {
    let mut value = sample().value().clone();
    value["states"] = json!(vec![json!({ "name": "2x", "ratio": null, "spacings_mm": [] }); 45]);
    let complaints = Document::from_value("d", value).check(&design_schema()).unwrap_err();
    assert_eq!(complaints.count(), 45);
    assert_eq!(complaints.iter().count(), MOST_COMPLAINTS);
    assert!(complaints.to_string().ends_with("\nd: and 25 more"));
    assert_eq!(complaints.to_json()["more"], 25);
}

#[test]
fn complaints_are_told_to_machines_as_well() {
    let text = SAMPLE.replace("\"flat\"", "\"flt\"");
    let json = read(text.as_bytes()).unwrap_err().to_json();
    insta::assert_snapshot!(layout(&json), @r#"
    {
      "problems": [
        {
          "file": "design.json",
          "line": 14,
          "column": 36,
          "at": "/groups/exit/elements/1/radii_mm/0",
          "found": "entry 0 of \"radii_mm\" is the text \"flt\"",
          "expected": "a number or \"flat\"",
          "advice": "did you mean \"flat\"?"
        }
      ],
      "more": 0
    }
    "#);
}

#[test]
fn typed_errors_of_an_owner_are_placed() {
    #[derive(Debug, thiserror::Error)]
    #[error("no glass is called {}", quoted(.name))]
    struct UnknownGlass {
        at: Address,
        name: String,
    }
    impl Complain for UnknownGlass {
        fn place(&self) -> Place {
            Place::Value(self.at.clone())
        }
        fn expected(&self) -> Option<String> {
            Some("a catalogue glass or one defined under \"glasses\"".into())
        }
        fn advice(&self) -> Option<String> {
            nearest(&self.name, ["N-BK7", "N-SF6"]).map(did_you_mean)
        }
    }
    let text = SAMPLE.replace("[\"N-BK7\",", "[\"N-BK8\",");
    let document = Document::parse("configs/river-lidar.json", text.as_bytes()).unwrap();
    let elements = Address::root().key("groups").index(2).key("elements");
    let at = elements.index(0).key("glasses").index(0);
    let verdict = document.verdict([UnknownGlass { at, name: "N-BK8".into() }]);
    insta::assert_snapshot!(verdict.unwrap_err(), @r#"
    configs/river-lidar.json:13:86: no glass is called "N-BK8"
      at /groups/exit/elements/pair/glasses/0
      expected: a catalogue glass or one defined under "glasses"
      did you mean "N-BK7"?
    "#);
    assert_eq!(document.verdict(Vec::<UnknownGlass>::new()), Ok(()));

    let held: Address = "/groups/entri/elements".parse().unwrap();
    let astray = held.resolve(document.value()).unwrap_err();
    let place = Place::Value(Address::root().key("held").index(0));
    insta::assert_snapshot!(document.verdict([astray.complaint(place)]).unwrap_err(), @r#"
    configs/river-lidar.json:24:12: nothing is at /groups/entri/elements: there is no "entri" in /groups
      at /held/0
      expected: one of "entry", "runner", "exit", or an index from 0 to 2
      did you mean "entry"?
    "#);
}

#[test]
fn a_file_that_is_no_document_is_told() {
    let told = |bytes: &[u8]| Document::parse("d.json", bytes).unwrap_err().to_string();
    let utf16: Vec<u8> = SAMPLE.encode_utf16().flat_map(u16::to_le_bytes).collect();
    insta::assert_snapshot!(told(&utf16), @r#"
    d.json: the text is in UTF-16
      expected: a JSON document in UTF-8
      save the file again as UTF-8
    "#);
    insta::assert_snapshot!(told(b"{\"title\": \"caf\xE9\"}"), @r#"
    d.json:1:15: byte 14 (counted from 0) is not UTF-8 text
      expected: a JSON document in UTF-8
      save the file again as UTF-8
    "#);
    insta::assert_snapshot!(told(b" \n"), @r#"
    d.json: the file is empty
      expected: a JSON document
    "#);
    insta::assert_snapshot!(told(b"{\"a\": 1,\n\"a\": 2}"), @r#"
    d.json:2:1: the key "a" occurs twice in the same object
      expected: every key once
      it is first given at line 1, column 2
    "#);
}

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
fn a_type_that_refuses_more_than_its_schema_is_told_in_place() {
    #[derive(Debug, Deserialize)]
    #[expect(dead_code, reason = "only its reading matters")]
    struct Counted {
        counts: Vec<u8>,
    }
    let document = Document::parse("d", br#"{"counts": [1, 2, 300], "note": "x"}"#).unwrap();
    insta::assert_snapshot!(document.read::<Counted>().unwrap_err(), @r#"
    d:1:19: invalid value: integer `300`
      at /counts/2
      expected: u8
    "#);
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

#[test]
fn every_key_misspelt_or_removed_is_told_at_its_place() {
    let schema = design_schema();
    let mut addresses = Vec::new();
    keys(sample().value(), &Address::root(), &mut addresses);
    assert!(addresses.len() > 50);
    for at in addresses {
        let (parent, key) = (at.parent().unwrap(), at.last().unwrap().to_owned());
        let free_names = ["/glasses", "/groups/2/elements/1/shapes/1/asphere"];
        if free_names.contains(&parent.to_string().as_str()) {
            continue;
        }
        let mut value = sample().value().clone();
        let object = parent.get_mut(&mut value).and_then(Value::as_object_mut).unwrap();
        let entry = object.shift_remove(&key).unwrap();
        let removed = Document::from_value("d", value.clone()).check(&schema);
        if let Err(complaints) = removed {
            assert!(
                complaints.to_string().contains(&format!("the key \"{key}\" is missing")),
                "{at}"
            );
        }
        let object = parent.get_mut(&mut value).and_then(Value::as_object_mut).unwrap();
        let misspelt = format!("{key}x");
        object.insert(misspelt.clone(), entry);
        let document = Document::from_value("d", value);
        let complaints = document.check(&schema).unwrap_err();
        let told: Vec<_> = complaints.iter().collect();
        assert_eq!(told.len(), 1, "{at}: {complaints}");
        assert_eq!(told[0].place, Place::Key(parent.key(misspelt)));
        assert_eq!(told[0].advice, Some(did_you_mean(&key)), "{complaints}");
    }
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
fn every_value_of_a_wrong_type_is_told_at_its_place() {
    let schema = design_schema();
    let mut addresses = Vec::new();
    keys(sample().value(), &Address::root(), &mut addresses);
    for at in addresses {
        let wrong =
            if at.get(sample().value()).unwrap().is_boolean() { json!("yes") } else { json!(true) };
        let mut value = sample().value().clone();
        *at.get_mut(&mut value).unwrap() = wrong;
        let complaints = Document::from_value("d", value).check(&schema).unwrap_err();
        let places: Vec<_> = complaints.iter().map(|told| told.place.clone()).collect();
        assert_eq!(places, [Place::Value(at)], "{complaints}");
    }
}

/// Reading ends in a verdict whose places lie within the text.
fn survives(bytes: &[u8]) {
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
