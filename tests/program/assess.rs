//! `assess`.

use crate::designs::{RIVER, every_key, text};
use crate::program::{run, run_on};

#[test]
fn a_shipped_design_as_a_table() {
    insta::assert_snapshot!(run(&format!("assess {RIVER}")).told());
}

#[test]
fn two_wavelengths_and_cemented_pairs_as_a_table() {
    insta::assert_snapshot!(run("assess configs/two-colour-pairs.json").told());
}

#[test]
fn every_limit_when_asked() {
    let few = run(&format!("assess {RIVER}")).out.lines().count();
    let all = run(&format!("assess {RIVER} --all"));
    assert!(all.out.lines().count() > few);
    assert!(all.out.contains("2x runner to exit"));
}

#[test]
fn the_document_has_the_fields_that_are_promised() {
    let ended = run_on("assess - --json", &text(&every_key()));
    assert_eq!((ended.status, ended.err.as_str()), (0, ""));
    let document = ended.json();
    assert_eq!(document["format"], "drawtube-assessment/1");
    assert_eq!(document["title"], "Every key");
    assert_eq!(document["meets"], false);
    for key in ["total", "goals", "limits"] {
        assert!(document["merit"][key].is_number(), "{key}");
    }
    let state = &document["states"][1];
    assert_eq!(state["name"], "6x");
    for key in [
        "ratio_wanted",
        "ratio",
        "ratio_error_percent",
        "exit_slope_urad",
        "track_mm",
        "exit_diameter_mm",
    ] {
        assert!(state[key].is_number(), "{key}");
    }
    assert_eq!(state["spacings_mm"], serde_json::json!([1.0, 128.0]));
    assert_eq!(state["positions_mm"].as_object().unwrap().len(), 3);
    for key in ["wavelength_nm", "rms_waves", "pv_waves"] {
        assert!(state["wavefront"][0][key].is_number(), "{key}");
    }
    for key in ["at", "edge_thicknesses_mm", "centre_thicknesses_mm", "focal_length_mm"] {
        assert!(!document["elements"][2][key].is_null(), "{key}");
    }
    for key in ["limit", "at", "value", "min", "met"] {
        assert!(!document["limits"][0][key].is_null(), "{key}");
    }
}

#[test]
fn a_missed_goal_is_a_status_only_when_asked() {
    assert_eq!(run(&format!("assess {RIVER}")).status, 0);
    assert_eq!(run(&format!("assess {RIVER} --require")).status, 3);
    assert_eq!(run(&format!("assess {RIVER} --require --json")).status, 3);
}

#[test]
fn failing_rays_are_told_by_state_and_surface() {
    let mut design = every_key();
    design["beam"]["diameter_mm"] = 14.0.into();
    let ended = run_on("assess -", &text(&design));
    insta::assert_snapshot!(ended.told());
    let state = &run_on("assess - --json", &text(&design)).json()["states"][1];
    assert!(state["fault"].is_string() && state["wavefront"][0]["rms_waves"].is_null());
}
