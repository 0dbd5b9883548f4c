//! A layout as a design file: what the brief says is carried over, what it leaves open filled in,
//! what is usual among its limits.

use serde_json::{Map, Value, json};
use surface_model::design::{Design, Element};
use surface_model::document::{Complaints, Document};
use surface_model::ranges::LARGEST_RADIUS_MM;

use crate::brief::{BriefFile, RatioDocument, complete_written};
use crate::design_file::DesignFile;

use super::begun::GlassesOfGroups;

/// What a design file has of its brief as it stands there, remarks included.
const CARRIED_OVER: [&str; 8] = [
    "beam",
    "coating",
    "damage_thresholds",
    "glasses",
    "housing",
    "goals",
    "limits",
    "temperatures_c",
];

/// The design file of lenses of these glasses, with the numbers of `design` (a layout's own, or
/// what an optimiser made of them).
pub(super) fn design_file(
    brief: &BriefFile,
    glasses: &GlassesOfGroups,
    design: &Design,
    note: &str,
) -> Result<DesignFile, Complaints> {
    let mut carried: Map<String, Value> = Map::new();
    for key in CARRIED_OVER {
        if let Some(value) = brief.document().value().get(key) {
            carried.insert(key.to_owned(), value.clone());
        }
    }
    let airs = design.groups.iter().any(|group| !group.airs_mm.is_empty());
    let mut limits = carried.get("limits").and_then(Value::as_object).cloned().unwrap_or_default();
    complete_written(&mut limits, airs);
    carried.insert("limits".into(), Value::Object(limits));
    let mut file = Map::new();
    file.insert("format".into(), "drawtube/1".into());
    file.insert("title".into(), design.title.clone().into());
    file.insert("note".into(), note.into());
    for key in ["beam", "coating", "damage_thresholds", "glasses"] {
        file.extend(carried.shift_remove(key).map(|value| (key.to_owned(), value)));
    }
    file.insert("groups".into(), groups(brief, glasses, design));
    file.extend(carried.shift_remove("housing").map(|value| ("housing".to_owned(), value)));
    file.insert("states".into(), states(brief, design));
    file.extend(carried);
    file.insert("free".into(), json!(["radii", "spacings"]));
    DesignFile::read(Document::from_value(brief.label(), Value::Object(file)))
}

fn groups(brief: &BriefFile, glasses: &GlassesOfGroups, design: &Design) -> Value {
    let groups = design.groups.iter().zip(glasses).map(|(group, glasses)| {
        let elements = group.elements.iter().zip(glasses);
        let elements: Vec<Value> =
            elements.map(|(element, glasses)| part(brief, element, glasses)).collect();
        let mut value = json!({ "name": group.name, "elements": elements });
        if !group.airs_mm.is_empty() {
            value["airs_mm"] = json!(group.airs_mm);
        }
        value
    });
    groups.collect()
}

fn part(brief: &BriefFile, element: &Element, glasses: &[usize]) -> Value {
    let radius = |curvature: f64| {
        let radius_mm = 1.0 / curvature;
        if radius_mm.abs() > LARGEST_RADIUS_MM { json!("flat") } else { json!(radius_mm) }
    };
    let radii: Vec<Value> =
        element.surfaces.iter().map(|surface| radius(surface.curvature)).collect();
    let names: Vec<&str> =
        glasses.iter().map(|&glass| brief.glasses_allowed[glass].name.as_str()).collect();
    json!({
        "radii_mm": radii,
        "glasses": names,
        "thicknesses_mm": element.thicknesses_mm,
        "diameter_mm": element.diameter_mm,
    })
}

fn states(brief: &BriefFile, design: &Design) -> Value {
    let written = brief.document().value().get("ratios").and_then(Value::as_array);
    let states = design.states.iter().enumerate().map(|(k, state)| {
        let mut value = Map::new();
        value.insert("name".into(), state.name.clone().into());
        value.insert("ratio".into(), state.ratio.into());
        value.insert("spacings_mm".into(), json!(state.spacings_mm));
        let own = matches!(brief.written().ratios.get(k), Some(RatioDocument::Own(_)));
        let entry = written.and_then(|list| list.get(k)).and_then(Value::as_object);
        for (key, wish) in entry.filter(|_| own).into_iter().flatten() {
            if !value.contains_key(key) {
                value.insert(key.clone(), wish.clone());
            }
        }
        Value::Object(value)
    });
    states.collect()
}
