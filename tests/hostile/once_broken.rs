//! Files that were once answered badly, each cut down to what did it.

use serde_json::{Value, json};

use super::judge::{Came, judge};
use super::shipped::changed;

fn is_optimised(name: &str, changes: &[(&str, Value)]) {
    let text = changed(name, changes).to_string();
    assert_eq!(judge(text.as_bytes(), 30), Ok(Came::Optimised), "{changes:?}");
}

#[test]
fn radii_beyond_what_a_file_holds_are_written_as_flat() {
    is_optimised("river", &[("/limits/radius_mm", json!({ "min": 1e9 }))]);
    is_optimised("collimator", &[("/limits/radius_mm", json!({ "min": 1e9 }))]);
    is_optimised("asphere", &[("/limits/steepness", json!({ "max": 1e-308 }))]);
}

#[test]
fn a_glass_that_nothing_limits_keeps_some_thickness() {
    is_optimised("collimator", &[("/limits", json!({}))]);
}

#[test]
fn conic_constants_stay_within_what_a_file_holds() {
    let shapes = json!([{ "conic": -0.5 }, { "conic": -0.5 }]);
    is_optimised(
        "collimator",
        &[
            ("/groups/2/elements/1/shapes", shapes.clone()),
            ("/groups/2/elements/0/shapes", shapes),
            ("/free", json!(["conics", "spacings", "radii"])),
        ],
    );
}

#[test]
fn a_conic_constant_that_ends_a_surface_inside_its_clear_diameter_is_told() {
    let conic = json!({ "at": "/groups/exit/elements/0/shapes/1/conic", "min": 30, "max": 40 });
    let changes = [("/free", json!(["spacings", conic])), ("/limits", json!({}))];
    let text = changed("asphere", &changes).to_string();
    assert_eq!(judge(text.as_bytes(), 30), Ok(Came::Assessed));
}
