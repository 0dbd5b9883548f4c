//! Inputs that were once answered badly, each cut down to what did it.

use std::time::{Duration, Instant};

use checks::judges::{plan, retune, run_folder};
use serde_json::{Value, json};

use checks::judges::design::{Came, judge};
use checks::judges::shipped::changed;

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

/// Judges within the time that somebody waits for an answer, with room for a busy machine.
fn soon<T>(judge: impl FnOnce() -> T) -> T {
    let began = Instant::now();
    let verdict = judge();
    assert!(began.elapsed() < Duration::from_secs(60), "{:?}", began.elapsed());
    verdict
}

fn planned(axes: Value, sample: Value) -> Result<Option<usize>, String> {
    let mut plan = json!({ "format": "drawtube-plan/1", "design": "design.json", "axes": axes });
    if sample.is_object() {
        plan["sample"] = sample;
    }
    soon(|| plan::judge(plan.to_string().as_bytes()))
}

#[test]
fn many_points_drawn_are_listed_in_time() {
    let axes = json!([{ "at": "/housing/track_mm", "range": { "from": 150, "to": 160 } }]);
    for kind in ["sobol", "latin-hypercube"] {
        let sample = json!({ "kind": kind, "points": 100_000 });
        assert_eq!(planned(axes.clone(), sample), Ok(Some(100_000)));
    }
}

#[test]
fn a_range_as_wide_as_numbers_go_is_told() {
    for scale in ["linear", "logarithmic"] {
        let range = json!({ "from": -1e308, "to": 1e308, "steps": 3, "scale": scale });
        let axes = json!([{ "at": "/housing/track_mm", "range": range }]);
        assert_eq!(planned(axes, Value::Null), Ok(None));
    }
    let range = json!({ "from": 1e-300, "to": 1e300, "steps": 3, "scale": "logarithmic" });
    let axes = json!([{ "at": "/housing/track_mm", "range": range }]);
    assert_eq!(planned(axes, Value::Null), Ok(None));
}

#[test]
fn more_axes_and_steps_than_anyone_sweeps_are_told_in_time() {
    let range = json!({ "from": 150, "to": 160, "steps": 100_000 });
    let axis = json!({ "at": "/housing/track_mm", "range": range });
    assert_eq!(planned(json!(vec![axis.clone(); 60]), Value::Null), Ok(None));
    assert_eq!(planned(json!(vec![axis; 100_000]), Value::Null), Ok(None));
    let range = json!({ "from": 150, "to": 160 });
    let axes = json!(vec![json!({ "at": "/limits/new", "range": range }); 60]);
    let sample = json!({ "kind": "latin-hypercube", "points": 100_000 });
    assert_eq!(planned(axes, sample), Ok(None));
}

#[test]
fn a_run_of_more_parts_than_there_are_is_damaged() {
    let whole = String::from_utf8(run_folder::sample("{}", &[])).unwrap();
    let scratch = tempfile::tempdir().unwrap();
    for parts in ["0", "100001", "18446744073709551615"] {
        let text = whole.replacen("\"parts\": 1", &format!("\"parts\": {parts}"), 1);
        assert_ne!(text, whole);
        assert_eq!(soon(|| run_folder::judge(text.as_bytes(), scratch.path())), Ok(false));
    }
}

#[test]
fn a_journal_of_one_endless_line_is_damaged() {
    use driver::overnight::Gathering;
    use driver::run::Survey;

    let scratch = tempfile::tempdir().unwrap();
    let text = run_folder::sample("{}", &[]);
    assert_eq!(run_folder::judge(&text, scratch.path()), Ok(true));
    let folder = scratch.path().join("run");
    let journal = std::fs::OpenOptions::new().write(true).open(folder.join("journal.jsonl"));
    journal.unwrap().set_len(1 << 34).unwrap();
    let error = soon(|| Gathering::of(&[Survey::of(&folder).unwrap()], 1)).unwrap_err();
    assert!(error.to_string().contains("line 3 is damaged"), "{error}");
}

#[test]
fn tables_without_end_are_told_in_time() {
    let refused = |table: String| {
        let text = format!("river\n--batch\n{table}");
        assert_eq!(soon(|| retune::judge(text.as_bytes())), Ok(false));
    };
    refused(",".repeat(1_100_000));
    refused(format!("serial\n{}", "1\n".repeat(1_100_000)));
    refused(format!("serial\n{}", "1,2\n".repeat(20_000)));
    let rows: String = (0..10_001).map(|row| format!("{row}\n")).collect();
    refused(format!("serial\n{rows}"));
}
