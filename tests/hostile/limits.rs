//! Every kind of limit, from a start that crosses it.

use driver::optimise::{Optimisation, optimise};
use driver::solve::{Settings, Unwatched};
use merit_function::assessment::assess;
use serde_json::{Value, json};

use checks::judges::shipped::{changed, read};

/// A shipped design with nothing limited but this, everything free that may be.
fn limited(name: &str, kind: &str, range: &Value) -> Value {
    let free = json!(["radii", "spacings", "thicknesses", "airs"]);
    let limits = json!({ kind: range, "centre_thickness_mm": { "min": 0.5, "max": 30.0 } });
    let mut root = changed(name, &[("/free", free), ("/limits", limits)]);
    root["limits"][kind] = range.clone();
    root
}

fn optimised(value: Value) -> Optimisation {
    let settings = Settings::default().with_max_iterations(300).unwrap();
    optimise(&read(value).unwrap(), &settings, &mut Unwatched).unwrap()
}

#[test]
fn every_limit_is_kept_from_a_start_that_crosses_it() {
    let mut failures = Vec::new();
    for (name, kind, range) in [
        ("river", "edge_thickness_mm", json!({ "min": 3.0 })),
        ("river", "edge_thickness_mm", json!({ "max": 2.0 })),
        ("river", "edge_thickness_mm", json!({ "min": 2.5, "max": 2.6 })),
        ("river", "centre_thickness_mm", json!({ "min": 6.0 })),
        ("river", "centre_thickness_mm", json!({ "max": 1.9 })),
        ("river", "centre_thickness_mm", json!({ "min": 4.0, "max": 4.0 })),
        ("river", "spacing_mm", json!({ "min": 4.0 })),
        ("river", "spacing_mm", json!({ "max": 126.0 })),
        ("asphere", "spacing_mm", json!({ "min": 12.0 })),
        ("asphere", "spacing_mm", json!({ "max": 85.0 })),
        ("collimator", "air_mm", json!({ "min": 3.0 })),
        ("collimator", "air_mm", json!({ "max": 0.4 })),
        ("river", "edge_gap_mm", json!({ "min": 3.0 })),
        ("collimator", "edge_gap_mm", json!({ "min": 2.0 })),
        ("river", "edge_gap_mm", json!({ "max": 120.0 })),
        ("river", "radius_mm", json!({ "min": 25.0 })),
        ("river", "radius_mm", json!({ "max": 100.0 })),
        ("river", "steepness", json!({ "max": 0.1 })),
        ("river", "steepness", json!({ "min": 0.05 })),
        ("river", "travel_mm", json!({ "max": 5.0 })),
        ("river", "travel_mm", json!({ "min": 15.0 })),
        ("asphere", "travel_mm", json!({ "max": 30.0 })),
        ("asphere", "travel_mm", json!({ "min": 60.0 })),
        ("river", "slope_mm_per_ratio", json!({ "max": 7.0 })),
        ("river", "monotonic", json!(["/groups/entry"])),
        ("river", "monotonic", json!(["/groups/*"])),
        ("asphere", "slope_mm_per_ratio", json!({ "max": 12.0 })),
        ("river", "incidence_deg", json!({ "max": 4.0 })),
        ("river", "track_mm", json!({ "max": 125.0 })),
        ("river", "track_mm", json!({ "min": 140.0 })),
        ("river", "track_mm", json!({ "min": 140.0, "max": 141.0 })),
    ] {
        let root = limited(name, kind, &range);
        let file = read(root.clone()).unwrap();
        let start = assess(&file.design, &file.wishes);
        let crossed = start.limits.iter().any(|limit| !limit.met);
        assert!(crossed, "the start of {name} keeps {kind} {range}");
        let optimised = optimised(root);
        let end = &optimised.report.end;
        for limit in end.limits.iter().filter(|limit| !limit.met) {
            failures.push(format!("{name}, {kind} {range}: {limit:?} ({})", optimised.stopped));
        }
    }
    assert!(failures.is_empty(), "{}", failures.join("\n"));
}

/// Limits on what a pulse may damage, from a start that crosses them.
#[test]
fn fluence_and_ghosts_are_kept_off_glass() {
    for (kind, limit) in [
        ("fluence_j_cm2", json!({ "max": 1.2 })),
        ("ghost_clearance_mm", json!({ "min": 4.0 })),
        ("double_ghost_clearance_mm", json!({ "min": 3.0 })),
    ] {
        let root = limited("gorge", kind, &limit);
        let file = read(root.clone()).unwrap();
        let start = assess(&file.design, &file.wishes);
        assert!(start.limits.iter().any(|limit| !limit.met), "the start keeps {kind} {limit}");
        let optimised = optimised(root);
        let end = &optimised.report.end;
        let crossed: Vec<_> = end.limits.iter().filter(|limit| !limit.met).collect();
        assert!(crossed.is_empty(), "{kind} {limit}: {crossed:?} ({})", optimised.stopped);
        assert!(end.meets, "{kind} {limit}: {:?} ({})", end.merit, optimised.stopped);
    }
}

#[test]
fn a_focus_that_is_forbidden_goes_away() {
    let mut root = changed("river", &[("/limits", json!({ "internal_focus": "forbid" }))]);
    root["groups"][0]["elements"][0]["radii_mm"] = json!([12.0, -20.0]);
    for state in 0..5 {
        root["states"][state]["spacings_mm"][0] = json!(16.0);
    }
    let optimised = optimised(root);
    let unmet: Vec<_> = optimised.report.end.limits.iter().filter(|limit| !limit.met).collect();
    assert!(unmet.is_empty(), "{unmet:?} ({})", optimised.stopped);
}

#[test]
fn limits_that_contradict_each_other_are_told() {
    // Ten millimetres of air between groups that fill the tube but for two.
    for (name, limits) in [
        ("river", json!({ "track_mm": { "min": 200.0 } })),
        (
            "river",
            json!({ "edge_thickness_mm": { "min": 5.0 }, "centre_thickness_mm": { "max": 1.0 }, "radius_mm": { "min": 1e6 } }),
        ),
        (
            "asphere",
            json!({ "travel_mm": { "min": 50.0, "max": 60.0 }, "spacing_mm": { "min": 49.0 } }),
        ),
    ] {
        let free = json!(["radii", "spacings", "thicknesses"]);
        let optimised = optimised(changed(name, &[("/limits", limits.clone()), ("/free", free)]));
        let end = &optimised.report.end;
        assert!(!end.meets, "{limits}");
        let told = end.limits.iter().any(|limit| !limit.met);
        assert!(told, "{limits}: {:?}", optimised.stopped);
        assert!(!optimised.stopped.was_successful(), "{limits}: {}", optimised.stopped);
    }
    let contradiction = changed(
        "river",
        &[
            ("/limits", json!({ "spacing_mm": { "min": 5.0 } })),
            ("/free", json!(["radii", { "at": "/states/0/spacings_mm/0", "max": 4.0 }])),
        ],
    );
    let error = optimise(&read(contradiction).unwrap(), &Settings::default(), &mut Unwatched);
    assert_eq!(
        error.unwrap_err().to_string(),
        "its own range and the limits leave no value for it"
    );
}
