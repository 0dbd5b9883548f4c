//! A sample design and types like those of its three owners.

use std::collections::BTreeMap;

use schemars::{JsonSchema, Schema, generate::SchemaSettings};
use serde::Deserialize;

use crate::document::union;

/// A design with every kind of key.
pub(in crate::document) const SAMPLE: &str = r#"{
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
pub(super) struct Lenses {
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
pub(super) struct Wanted {
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
pub(super) struct Freedom {
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

pub(super) fn inline<T: JsonSchema>() -> Schema {
    let settings =
        SchemaSettings::draft2020_12().with(|settings| settings.inline_subschemas = true);
    settings.into_generator().into_root_schema_for::<T>()
}

pub(super) fn design_schema() -> Schema {
    union("Design", &[inline::<Lenses>(), inline::<Wanted>(), inline::<Freedom>()])
}
