//! Limits between the states: what the optimiser keeps there is what the movement curve shows.

use driver::cam::{CamSettings, FindingKind, MovementCurve, movement_curve};
use driver::design_file::DesignFile;
use driver::optimise::optimise;
use driver::solve::{Settings, Unwatched};
use serde_json::{Value, json};

use checks::judges::shipped::{changed, read, told};

/// The river design with these limits beside its own, optimised.
fn river(limits: &[(&str, Value)]) -> DesignFile {
    let mut root = changed("river", &[]);
    for (limit, value) in limits {
        root["limits"][*limit] = value.clone();
    }
    let settings = Settings::default().with_max_iterations(400).unwrap();
    let optimised = optimise(&read(root).unwrap(), &settings, &mut Unwatched).unwrap();
    let end = &optimised.report.end;
    assert!(end.meets, "{limits:?}: {:?} ({})", end.limits, optimised.stopped);
    optimised.file
}

fn curve(file: &DesignFile) -> MovementCurve {
    movement_curve(&file.design, &file.wishes, &CamSettings::default()).unwrap()
}

fn turning(curve: &MovementCurve) -> Vec<&str> {
    let turns = curve.findings.iter().filter(|finding| finding.kind == FindingKind::Reversal);
    turns.map(|finding| finding.what.as_str()).collect()
}

#[test]
fn nonsense_is_told_at_its_place() {
    let keep = || ("/limits/between_states", json!("keep"));
    let lone = read(changed("river", &[])).unwrap().document().value()["states"][0].clone();
    for (name, changes, place, words) in [
        (
            "river",
            vec![("/limits/monotonic", json!(["/groups/exit"]))],
            "/limits/monotonic/0",
            "does not move",
        ),
        (
            "river",
            vec![("/limits/monotonic", json!(["/groups/none"]))],
            "/limits/monotonic/0",
            "is no group",
        ),
        (
            "river",
            vec![("/limits/monotonic", json!(["runner"]))],
            "/limits/monotonic/0",
            "does not begin with",
        ),
        (
            "river",
            vec![("/limits/slope_mm_per_ratio", json!({ "max": -1.0 }))],
            "/limits/slope_mm_per_ratio",
            "a limit is -1",
        ),
        (
            "river",
            vec![("/limits/between_states", json!("kept"))],
            "/limits/between_states",
            "keep",
        ),
        (
            "river",
            vec![("/states", json!([lone])), keep()],
            "/limits/between_states",
            "has only one",
        ),
        ("gorge", vec![keep()], "/limits/between_states", "wanted focused"),
        (
            "asphere",
            vec![("/housing/fixed", json!([])), keep()],
            "/limits/between_states",
            "3 groups move",
        ),
    ] {
        let told = told(changed(name, &changes));
        assert!(told.contains(place) && told.contains(words), "{changes:?}: {told}");
    }
}

#[test]
fn without_limits_between_the_states_the_curve_breaks_them() {
    let curve = curve(&river(&[]));
    assert_eq!(turning(&curve), ["entry"]);
    let outside = |finding: &driver::cam::Finding| finding.what == "housing_mm the whole";
    assert!(curve.findings.iter().any(outside), "{:?}", curve.findings);
    assert!(curve.groups[1].steepest_mm_per_ratio > 8.0);
}

#[test]
fn a_design_kept_between_its_states_has_a_sound_curve() {
    let curve = curve(&river(&[("between_states", json!("keep"))]));
    assert!(curve.sound, "{:?}", curve.findings);
}

#[test]
fn a_group_that_must_not_turn_back_does_not() {
    let curve = curve(&river(&[("monotonic", json!(["/groups/*"]))]));
    assert_eq!(turning(&curve), [""; 0], "{:?}", curve.findings);
}

#[test]
fn no_slope_is_steeper_than_the_limit() {
    let curve = curve(&river(&[("slope_mm_per_ratio", json!({ "max": 8.0 }))]));
    for group in &curve.groups {
        assert!(group.steepest_mm_per_ratio < 8.001, "{group:?}");
    }
    assert!(
        curve.findings.iter().all(|finding| finding.kind != FindingKind::Limit
            || finding.what != "slope_mm_per_ratio runner")
    );
}

#[test]
fn travel_is_kept_between_the_states_too() {
    let limits = [("travel_mm", json!({ "max": 13.0 })), ("between_states", json!("keep"))];
    let curve = curve(&river(&limits));
    for group in &curve.groups {
        assert!(group.travel_mm < 13.001, "{group:?}");
    }
}
