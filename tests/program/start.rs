//! `start`.

use serde_json::{Value, json};

use crate::program::{Ended, root, run, run_on};

const BRIEF: &str = "configs/river-brief.json";

/// Runs `start` on the river brief with something changed.
fn on_changed(arguments: &str, change: impl FnOnce(&mut Value)) -> Ended {
    let text = std::fs::read_to_string(root().join(BRIEF)).unwrap();
    let mut brief: Value = serde_json::from_str(&text).unwrap();
    change(&mut brief);
    run_on(&format!("start - {arguments}"), &serde_json::to_string_pretty(&brief).unwrap())
}

#[test]
fn a_table_of_layouts() {
    insta::assert_snapshot!(run(&format!("start {BRIEF} --most 3")).told());
}

#[test]
fn tables_of_the_shipped_briefs_fit_eighty_columns() {
    for brief in ["river-brief", "two-colour-brief", "quay-brief"] {
        let ended = run(&format!("start configs/{brief}.json"));
        assert_eq!(ended.status, 0, "{}", ended.err);
        assert!(ended.out.lines().all(|line| line.chars().count() <= 80), "{}", ended.out);
    }
}

#[test]
fn the_layout_that_is_written_is_collimated_and_can_be_optimised() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("second.json");
    let ended = run(&format!("start {BRIEF} --rank 2 --json -o {}", path.display()));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let document = ended.json();
    assert_eq!(document["format"], "drawtube-start/1");
    let told = &document["layouts"][1];
    let assessed = run(&format!("assess --json {}", path.display())).json();
    for (group, focal) in told["focal_lengths_mm"].as_array().unwrap().iter().enumerate() {
        let is = assessed["groups"][group]["focal_length_mm"].as_f64().unwrap();
        assert!((is / focal.as_f64().unwrap() - 1.0).abs() < 1e-9);
    }
    for state in assessed["states"].as_array().unwrap() {
        assert!(state["exit_slope_urad"].as_f64().unwrap().abs() < 1e-6, "{state}");
        assert!(state["ratio_error_percent"].as_f64().unwrap().abs() < 1e-9, "{state}");
    }
    assert!(assessed["limits"].as_array().unwrap().iter().all(|limit| limit["met"] == true));
    let again = run(&format!("start {BRIEF} -o {}", path.display()));
    assert_eq!(again.status, 7, "nothing is replaced without --force");
    let better = run(&format!("optimise {} --require", path.display()));
    assert_eq!(better.status, 0, "{}", better.out);
}

#[test]
fn a_design_on_standard_output_leaves_the_table_to_standard_error() {
    let ended = on_changed("-o - --most 2", |brief| {
        brief["ratios"][4] = json!({ "ratio": 5.5, "weight": 2.0 })
    });
    assert_eq!(ended.status, 0, "{}", ended.err);
    let design: Value = serde_json::from_str(&ended.out).unwrap();
    assert_eq!(design["format"], "drawtube/1");
    assert_eq!(design["states"][4]["weight"], 2.0);
    assert_eq!(design["goals"]["wavefront_rms_waves"]["within"], 0.05);
    assert!(design["note"].as_str().unwrap().contains("First-order layout 1"));
    assert!(ended.err.contains("Layout 1 was written to standard output."));
}

#[test]
fn what_cannot_be_is_told_with_what_would_have_to_give() {
    let short = on_changed("", |brief| brief["housing"]["track_mm"] = json!(50));
    let both = on_changed("", |brief| brief["housing"]["fixed"] = json!(["entry", "exit"]));
    let inverted = on_changed("--errors json", |brief| brief["ratios"][0] = json!(-2));
    let rank = run(&format!("start {BRIEF} --rank 1000"));
    let list = [short, both, inverted, rank];
    assert!(list.iter().map(|ended| ended.status).eq([1, 2, 2, 1]));
    assert!(list.iter().all(|ended| ended.out.is_empty()));
    insta::assert_snapshot!(list.map(|ended| ended.told()).join("\n"));
}

#[test]
fn a_mistake_in_a_brief_has_line_and_suggestion() {
    let ended = on_changed("", |brief| {
        let map = brief.as_object_mut().unwrap();
        let ratios = map.remove("ratios").unwrap();
        map.insert("ratois".to_owned(), ratios);
    });
    assert_eq!(ended.status, 2);
    assert!(ended.err.contains("did you mean \"ratios\"?"), "{}", ended.err);
    let schema = run("schema brief").json();
    assert!(schema["properties"]["glasses_allowed"].is_object());
}
