//! Inputs that were once answered badly, each cut down to what did it.

use std::time::{Duration, Instant};

use checks::judges::brief::{self, BRIEFS};
use checks::judges::design::{Came, judge};
use checks::judges::shipped::{DESIGNS, changed};
use checks::judges::{plan, retune, run_folder};
use driver::retune::table::Table;
use driver::sweep::{PlanFile, PointResult, SweepResults};
use report::picture::sweep_picture;
use report::text;
use serde_json::{Value, json};
use surface_model::document::Document;

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

#[test]
fn lines_that_end_with_a_carriage_return_are_counted_in_time() {
    let table = format!("radius_mm\r{}", "10\r".repeat(300_000));
    let table = soon(|| Table::read("tools.csv", table.as_bytes())).unwrap();
    let last = table.rows().last().and_then(|row| row.first()).unwrap();
    assert_eq!((last.position.line, last.position.column), (300_001, 1));
}

#[test]
fn a_journal_with_the_points_of_another_sweep_is_damaged() {
    let whole = include_str!("../fuzz/seeds/run_folder/sweep");
    let scratch = tempfile::tempdir().unwrap();
    let judge = |text: &str| run_folder::judge(text.as_bytes(), scratch.path());
    assert_eq!(judge(whole), Ok(true), "the folder as it was");
    assert_eq!(judge(include_str!("../fuzz/seeds/run_folder/overnight")), Ok(true), "the other");
    for (from, to) in [
        ("[\"fused-silica\",4.0]", "[\"fused-silica\",4.5]"),
        ("[\"fused-silica\",4.0]", "[\"fused-silica\"]"),
        ("{\"unit\":{\"number\":3", "{\"unit\":{\"number\":1"),
        ("{\"unit\":{\"number\":3", "{\"unit\":{\"number\":9"),
    ] {
        let text = whole.replacen(from, to, 1);
        assert_ne!(text, whole);
        assert_eq!(judge(&text), Ok(false), "{to}");
    }
}

#[test]
fn a_journal_with_the_result_of_another_start_is_damaged() {
    use driver::overnight::Gathering;
    use driver::run::Survey;

    let whole = include_str!("../fuzz/seeds/run_folder/overnight");
    let scratch = tempfile::tempdir().unwrap();
    let text = whole.replacen("\"done\":{\"number\":1,", "\"done\":{\"number\":4,", 1);
    assert_ne!(text, whole);
    assert_eq!(run_folder::judge(text.as_bytes(), scratch.path()), Ok(false));
    let folder = scratch.path().join("run");
    let error = Gathering::of(&[Survey::of(&folder).unwrap()], 1).unwrap_err();
    assert!(error.to_string().contains("start 1 is the result of something else"), "{error}");
}

/// Results of a plan over track and top ratio, as if every point had been optimised.
fn swept(points: Value) -> SweepResults {
    let range = |from: f64, to: f64, steps: &Value| {
        let mut range = json!({ "from": from, "to": to });
        if steps.is_number() {
            range["steps"] = steps.clone();
        }
        range
    };
    let mut plan = json!({
        "format": "drawtube-plan/1",
        "design": "design.json",
        "axes": [
            { "at": "/housing/track_mm", "range": range(150.0, 190.0, &points["steps"]) },
            { "at": "/states/6x/ratio", "range": range(5.0, 7.0, &points["steps"]) },
        ],
        "front": ["track_mm", "merit"],
    });
    if points["steps"].is_null() {
        plan["sample"] = points;
    }
    let file = PlanFile::read(Document::from_value("plan.json", plan)).unwrap();
    let design = Document::parse("design.json", DESIGNS[0].1.as_bytes()).unwrap();
    let plan = file.resolve(&file.read_subject(design).unwrap()).unwrap();
    let count = plan.points.len();
    let point = |(number, values): (usize, &Vec<Value>)| {
        // Each longer and better than the one before, so that none beats another.
        let (merit, track_mm) = ((count - number) as f64, number as f64);
        let reached = json!({ "merit": merit, "meets": false, "limits_crossed": 0,
            "track_mm": track_mm, "iterations": 1, "design": {} });
        let reached = serde_json::from_value(reached).unwrap();
        let (number, values) = (number as u64, values.clone());
        PointResult { number, values, reached: Some(reached), fault: None, no_layout: None }
    };
    let points = plan.points.iter().enumerate().map(point).collect();
    SweepResults::new(&plan, points)
}

#[test]
fn as_many_points_as_can_be_are_told_and_drawn_in_time() {
    for points in [json!({ "kind": "sobol", "points": 100_000 }), json!({ "steps": 316 })] {
        let results = swept(points);
        let count = results.points.len();
        assert_eq!(results.front.len(), count);
        soon(|| {
            let table = String::from_utf8(results.table().unwrap()).unwrap();
            assert_eq!(table.lines().filter(|line| line.contains(",yes,")).count(), count);
            assert!(text::sweep::results(&results).contains("Listed are 40 of them"));
            assert!(sweep_picture(&results).is_some());
        });
    }
}

#[test]
fn a_brief_with_next_to_no_beam_is_told_what_stands_against_it() {
    let mut brief: Value = serde_json::from_str(BRIEFS[0].1).unwrap();
    brief["beam"]["diameter_mm"] = json!(5e-324);
    brief["ratios"] = json!([2, 3, 4, 50, 6]);
    assert_eq!(soon(|| brief::judge(brief.to_string().as_bytes())), Ok(Some(0)));
}
