//! What every lens keeps where a brief's limits say nothing: an edge to hold it by, a middle that
//! does not break, air between neighbours. Without them a search ends at glass of no thickness,
//! which costs no merit. A brief that wants less says so in its own limits.

use merit_function::limits::{LimitsDocument, RangeDocument};
use serde_json::{Map, Value, json};

/// A limit of `limits`, by its key, and the least that is usual, mm: common practice, no published
/// source.
const USUAL: [(&str, f64); 4] = [
    ("edge_thickness_mm", 0.8),
    ("centre_thickness_mm", 1.0),
    ("spacing_mm", 0.5),
    ("air_mm", 0.3),
];

/// The limits of a brief with what is usual where they say nothing. `airs`: whether there can be
/// air inside a group at all.
pub(super) fn completed(limits: &LimitsDocument, airs: bool) -> LimitsDocument {
    let mut limits = limits.clone();
    let LimitsDocument { edge_thickness_mm, centre_thickness_mm, spacing_mm, air_mm, .. } =
        &mut limits;
    let ranges = [edge_thickness_mm, centre_thickness_mm, spacing_mm, air_mm];
    for (range, (key, usual)) in ranges.into_iter().zip(USUAL) {
        if is_silent(*range, usual) && (airs || key != "air_mm") {
            let max = range.and_then(|range| range.max);
            *range = Some(RangeDocument { min: Some(usual), max });
        }
    }
    limits
}

/// No least is given, and what may be at most leaves room for what is usual.
fn is_silent(range: Option<RangeDocument>, usual: f64) -> bool {
    range.is_none_or(|range| range.min.is_none() && range.max.is_none_or(|max| max >= usual))
}

/// The same for the `limits` of a design file that comes of the brief, which keep all else that
/// stands there. `airs`: whether the design has air inside a group at all.
pub(crate) fn complete_written(limits: &mut Map<String, Value>, airs: bool) {
    for (key, usual) in USUAL {
        let range = limits.get(key).cloned();
        let range = range.and_then(|range| serde_json::from_value(range).ok()).flatten();
        if is_silent(range, usual) && (airs || key != "air_mm") {
            let entry = limits.entry(key).or_insert(Value::Null);
            if entry.is_null() {
                *entry = json!({});
            }
            entry["min"] = json!(usual);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn both(limits: &Value) -> (Value, Value) {
        let document: LimitsDocument = serde_json::from_value(limits.clone()).unwrap();
        let mut written = limits.as_object().unwrap().clone();
        complete_written(&mut written, true);
        (serde_json::to_value(completed(&document, true)).unwrap(), Value::Object(written))
    }

    #[test]
    fn what_is_usual_stands_where_nothing_is_said() {
        let limits = json!({
            "edge_thickness_mm": { "min": 0 },
            "centre_thickness_mm": { "max": 9 },
            "air_mm": { "max": 0.2 },
        });
        let expected = json!({
            "edge_thickness_mm": { "min": 0 },
            "centre_thickness_mm": { "min": 1.0, "max": 9 },
            "air_mm": { "max": 0.2 },
            "spacing_mm": { "min": 0.5 },
        });
        let (read, written) = both(&limits);
        assert_eq!(written, expected);
        let again: LimitsDocument = serde_json::from_value(expected).unwrap();
        assert_eq!(read, serde_json::to_value(again).unwrap());
    }

    #[test]
    fn no_limit_on_air_where_there_is_none() {
        let mut limits = Map::new();
        complete_written(&mut limits, false);
        assert!(!limits.contains_key("air_mm") && limits.contains_key("edge_thickness_mm"));
    }
}
