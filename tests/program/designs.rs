//! Designs the tests are about.

use serde_json::{Value, json};

/// A shipped design.
pub const RIVER: &str = "configs/river-lidar-2x-6x.json";

/// A design in which every key that a design file knows stands once, but for those about the laser:
/// the shipped design of `laser.rs` has them.
pub fn every_key() -> Value {
    json!({
        "$schema": "drawtube.schema.json",
        "format": "drawtube/1",
        "title": "Every key",
        "note": "for tests",
        "beam": { "wavelengths_nm": [532.0], "diameter_mm": 2.4, "traced_to": 1.5 },
        "glasses": {
            "melt": { "from": "N-BK7", "index_shift": 0.00021 },
            "medium": { "index": 1.62, "density_g_cm3": 3.0, "expansion_per_k": 8e-6,
                        "index_per_k": 2e-6 }
        },
        "groups": [
            { "name": "entry", "elements": [ { "radii_mm": [75.0, -20.0],
                "glasses": ["fused-silica"], "thicknesses_mm": [3.0], "diameter_mm": 8.0 } ] },
            { "name": "runner", "elements": [ { "radii_mm": [-24.0, 9.0],
                "glasses": ["fused-silica"], "thicknesses_mm": [2.0], "diameter_mm": 8.0 } ] },
            { "name": "exit", "elements": [
                { "name": "pair", "radii_mm": [426.0, -60.0, -85.6], "glasses": ["melt", "medium"],
                  "thicknesses_mm": [5.0, 2.0], "diameter_mm": 26.0 },
                { "radii_mm": ["flat", -300.0], "glasses": ["fused-silica"],
                  "thicknesses_mm": [4.0], "diameter_mm": 26.0,
                  "shapes": [ null, { "conic": -1.2, "asphere": { "4": 1.1e-7 } } ] } ],
              "airs_mm": [1.0], "mount_expansion_per_k": 1.2e-5 }
        ],
        "housing": { "track_mm": 160.0, "fixed": ["exit"], "expansion_per_k": 2.3e-5 },
        "states": [
            { "name": "2x", "ratio": 2.0, "spacings_mm": [13.0, 107.0], "weight": 1.0 },
            { "name": "6x", "ratio": 6.0, "spacings_mm": [1.0, 128.0],
              "wavelengths_nm": [532.0], "goals": { "ratio_percent": { "within": 0.5 } } }
        ],
        "temperatures_c": [20.0],
        "goals": { "wavefront_rms_waves": { "within": 0.05 }, "ratio_percent": { "within": 0.2 },
                   "exit_slope_urad": { "within": 20.0 } },
        "limits": {
            "edge_thickness_mm": { "min": 1.0 }, "centre_thickness_mm": { "min": 1.5, "max": 9.0 },
            "spacing_mm": { "min": 0.5 }, "radius_mm": { "min": 8.0 }, "internal_focus": "forbid"
        },
        "free": ["radii", "spacings",
                 { "at": "/groups/exit/elements/pair/thicknesses_mm/0", "min": 3.0, "max": 8.0 }],
        "held": ["/groups/entry/elements/0/radii_mm/1"],
        "tolerances": {
            "grade": "fine", "spread": "uniform",
            "own": [
                { "at": "/groups/exit", "radius_percent": 0.05, "irregularity_fringes": 0.4,
                  "thickness_mm": 0.03, "air_mm": 0.02, "index": 0.0003, "abbe_percent": 0.3,
                  "wedge_mrad": 0.2, "element_decentre_mm": 0.01, "element_tilt_mrad": 0.2,
                  "group_decentre_mm": 0.01, "group_tilt_mrad": 0.2 },
                { "at": "/groups/entry", "radius_fringes": 2.0 },
                { "at": "/states/6x", "spacing_mm": 0.01 }
            ],
            "shop": [
                { "at": "/groups/exit", "outer_diameter_mm": 28.0,
                  "outer_diameter_off_mm": [-0.05, 0.0], "chamfer_mm": { "min": 0.2, "max": 0.4 },
                  "imperfections": { "count": 3, "grade_mm": 0.1 },
                  "scratches": { "count": 1, "width_mm": 0.006 }, "edge_chips_mm": 0.3,
                  "coating": "as agreed", "stress_birefringence_nm_cm": 10.0,
                  "bubbles": { "count": 2, "grade_mm": 0.1 }, "inhomogeneity_class": 2,
                  "striae_class": 3 }
            ],
            "readjusted": ["/states/*/spacings_mm/1"],
            "rotating": [ { "group": "runner", "lead_mm": 40.0 } ],
            "require": { "wavefront_rms_waves": { "within": 0.07 },
                         "ratio_percent": { "within": 0.5 },
                         "exit_slope_urad": { "within": 50.0 },
                         "boresight_urad": { "within": 400.0 },
                         "boresight_wander_urad": { "within": 300.0 } }
        }
    })
}

/// A design as a file would hold it.
pub fn text(design: &Value) -> String {
    serde_json::to_string_pretty(design).unwrap()
}

/// The river design with so many states that a simplex is busy for hours.
pub fn long_job() -> String {
    let path = super::program::root().join(RIVER);
    let mut design: Value = serde_json::from_str(&std::fs::read_to_string(path).unwrap()).unwrap();
    let states = (0..200).map(|i| {
        let share = f64::from(i) / 199.0;
        json!({
            "name": format!("s{i}"),
            "ratio": 2.0 + 4.0 * share,
            "spacings_mm": [13.0 - 12.0 * share, 107.0 + 20.0 * share]
        })
    });
    design["states"] = states.collect();
    text(&design)
}

/// Addresses of everything inside a value, in order, as JSON Pointers.
pub fn pointers(value: &Value) -> Vec<String> {
    let mut found = Vec::new();
    collect(value, String::new(), &mut found);
    found
}

fn collect(value: &Value, at: String, found: &mut Vec<String>) {
    let inner: Vec<(String, &Value)> = match value {
        Value::Object(map) => map.iter().map(|(key, value)| (key.clone(), value)).collect(),
        Value::Array(list) => list.iter().enumerate().map(|(i, v)| (i.to_string(), v)).collect(),
        _ => Vec::new(),
    };
    for (step, value) in inner {
        let at = format!("{at}/{}", step.replace('~', "~0").replace('/', "~1"));
        found.push(at.clone());
        collect(value, at, found);
    }
}
