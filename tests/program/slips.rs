//! Slips that newcomers made, and the words that put them right.

use serde_json::{Value, json};

use crate::designs::{RIVER, every_key, text};
use crate::program::{Ended, root, run, run_on};

const BRIEF: &str = "configs/river-brief.json";

/// Holds every word against what was said on standard error.
fn says(ended: &Ended, status: i32, words: &[&str]) {
    assert_eq!(ended.status, status, "{}{}", ended.out, ended.err);
    for word in words {
        assert!(ended.err.contains(word), "{word:?} is not in:\n{}", ended.err);
    }
    assert!(!ended.err.contains("os error"), "{}", ended.err);
}

fn on_design(change: impl FnOnce(&mut Value)) -> Ended {
    let mut design = every_key();
    change(&mut design);
    run_on("assess -", &text(&design))
}

fn on_brief(change: impl FnOnce(&mut Value)) -> Ended {
    run_on("start -", &brief_with(change))
}

fn brief_with(change: impl FnOnce(&mut Value)) -> String {
    let written = std::fs::read_to_string(root().join(BRIEF)).unwrap();
    let mut brief: Value = serde_json::from_str(&written).unwrap();
    change(&mut brief);
    serde_json::to_string_pretty(&brief).unwrap()
}

fn renamed(map: &mut Value, from: &str, to: &str) {
    let map = map.as_object_mut().unwrap();
    let value = map.shift_remove(from).unwrap();
    map.insert(to.to_owned(), value);
}

#[test]
fn values_with_their_unit_or_without_their_object() {
    let unit = "the unit is in the key: write 2.4";
    says(&on_design(|v| v["beam"]["diameter_mm"] = json!("2.4 mm")), 2, &[unit]);
    let other = "write the number alone; the key says its unit, mm";
    says(&on_design(|v| v["beam"]["diameter_mm"] = json!("2400 um")), 2, &[other]);
    let comma = "numbers take a point: 2.4";
    says(&on_design(|v| v["beam"]["diameter_mm"] = json!("2,4")), 2, &[comma]);
    says(&on_brief(|v| v["ratios"] = json!(["3x", 4])), 2, &["entry 0 of \"ratios\"", "write 3"]);
    let goal = r#"write { "within": 0.03 }"#;
    says(&on_design(|v| v["goals"]["wavefront_rms_waves"] = json!(0.03)), 2, &[goal]);
    let limit = r#"write { "min": 1.5 } or { "max": 1.5 }"#;
    says(&on_design(|v| v["limits"]["edge_thickness_mm"] = json!(1.5)), 2, &[limit]);
}

#[test]
fn a_decimal_comma_in_a_document() {
    let written = std::fs::read_to_string(root().join(RIVER)).unwrap();
    let slip = written.replacen("\"diameter_mm\": 2.4", "\"diameter_mm\": 2,4", 1);
    assert_ne!(slip, written);
    says(&run_on("assess -", &slip), 2, &["2,4 has a comma", "numbers take a point: 2.4"]);
}

#[test]
fn keys_are_known_by_their_words_and_units() {
    let told = on_design(|v| {
        renamed(&mut v["goals"], "wavefront_rms_waves", "rms_wavefront_waves");
        renamed(&mut v["goals"], "exit_slope_urad", "collimation_urad");
    });
    says(&told, 2, &["mean \"wavefront_rms_waves\"?", "mean \"exit_slope_urad\"?"]);
    let told = on_design(|v| renamed(&mut v["housing"], "track_mm", "length_mm"));
    says(&told, 2, &["did you mean \"track_mm\"?"]);
    assert!(!told.err.contains("is missing"), "one slip, one complaint: {}", told.err);
}

#[test]
fn a_document_of_another_kind_is_told_who_takes_it() {
    let told = run(&format!("optimise {BRIEF}"));
    says(&told, 2, &["this is a brief, not a design: start makes designs of it"]);
    let told = run(&format!("start {RIVER}"));
    says(&told, 2, &["this is a design, not a brief: assess and optimise take it"]);
    let told = run("assess configs/track-and-ratio.json");
    says(&told, 2, &["this is a sweep plan, not a design: sweep takes it"]);
}

#[test]
fn ratios_that_narrow_or_invert() {
    let narrow = on_brief(|v| v["ratios"] = json!([0.5, 3]));
    assert_eq!(narrow.status, 0, "{}", narrow.err);
    assert!(narrow.out.contains("A ratio below 1 narrows the beam"), "{}", narrow.out);
    let inverted = on_brief(|v| v["ratios"] = json!([2, -3]));
    says(&inverted, 2, &["standard input:", "at /ratios/1", "ask for a positive ratio"]);
    let folder = tempfile::tempdir().unwrap();
    let night = folder.path().join("night");
    let line = format!("overnight - --run {} --starts 1", night.display());
    let searched = run_on(&line, &brief_with(|v| v["ratios"] = json!([2, -3])));
    assert_eq!((searched.status, searched.err), (2, inverted.err), "as start tells it");
    assert!(!night.exists());
}

#[test]
fn a_tube_in_metres() {
    let told = on_brief(|v| v["housing"]["track_mm"] = json!(0.15));
    says(
        &told,
        1,
        &["A tube of 0.15 mm is shorter than the beam is wide", "lengths are mm, 150 for"],
    );
}

#[test]
fn numbers_in_messages_have_no_endless_digits() {
    let told = on_design(|v| {
        v["beam"]["m_squared"] = json!(1.1);
        v["beam"]["divergence_mrad"] = json!(0.1);
    });
    says(&told, 2, &["M² 1.1 and a divergence of 0.1 mrad contradict", "a waist of 7.451 mm"]);
}

#[test]
fn changes_that_are_not_quite_changes() {
    let on =
        |change: &str| run(&format!("retune configs/river-as-designed.json --change {change}"));
    let glass = on("/groups/entry/elements/0/glasses/0=1.46095");
    says(&glass, 2, &["write 1.46095@532", "at /groups/entry/elements/0/glasses/0"]);
    let thickness = on("thickness=2");
    says(&thickness, 2, &["such as /groups/entry/elements/0/thicknesses_mm/0, /groups/runner"]);
    let comma = on("/groups/entry/elements/0/thicknesses_mm/0=2,03");
    says(&comma, 2, &["numbers take a point: 2.03"]);
}

#[test]
fn an_index_measured_at_so_many_micrometres() {
    let at = "/groups/entry/elements/0/glasses/0=1.4607@0.532";
    let told = run(&format!("retune configs/river-as-designed.json --change {at}"));
    says(&told, 2, &["0.532 nm is outside", "wavelengths are in nanometres"]);
}

#[test]
fn nothing_changed_is_nothing_moved() {
    let folder = tempfile::tempdir().unwrap();
    let better = folder.path().join("better.json");
    let better = better.to_str().unwrap();
    assert_eq!(run(&format!("optimise {RIVER} -o {better} -q")).status, 0);
    let told = run(&format!("retune {better}"));
    assert_eq!(told.status, 0, "{}", told.err);
    assert!(!told.out.contains("e-1"), "moved by rounding: {}", told.out);
}

/// A surface is told by the address it has in the file, whoever tells of it.
#[test]
fn rays_that_fail_are_told_with_the_surface_s_address() {
    let written = std::fs::read_to_string(root().join(RIVER)).unwrap();
    let mut design: Value = serde_json::from_str(&written).unwrap();
    design["groups"][0]["elements"][0]["radii_mm"] = json!([75.0, 4.2]);
    design["groups"][1]["elements"][0]["radii_mm"] = json!([-4.2, 4.2]);
    for command in ["cam -", "tolerance - --systems 2"] {
        let told = run_on(command, &text(&design));
        says(&told, 1, &[" at /groups/", "/radii_mm/"]);
        assert!(!told.err.contains("surface "), "{}", told.err);
    }
}

#[test]
fn values_of_options() {
    let comma = run(&format!("trace {RIVER} --state 6x --height-mm 1,2"));
    says(&comma, 2, &["--height-mm: \"1,2\" is not a number", "decimals take a point: 1.2"]);
    let span = run(&format!("assess {RIVER} --temperatures-c 0-40"));
    says(&span, 2, &["several stand with commas between: 0,40"]);
    says(&run(&format!("cam {RIVER} --ratios 3,5")), 2, &["--step sets the way"]);
    let range = run(&format!("assess {RIVER} --ranges-m -5"));
    says(&range, 2, &["--ranges-m", "a range is a number of metres"]);
    for told in [range, run(&format!("assess {RIVER} --foo"))] {
        assert!(!told.err.contains("-- -"), "no way round: {}", told.err);
    }
    says(&run("evaluate x"), 2, &["there is no command \"evaluate\"", "did you mean \"assess\"?"]);
}

#[test]
fn glasses_by_the_names_of_workshops() {
    says(&run("glass nd=1.8..1.7"), 2, &["runs downwards", "write 1.7..1.8"]);
    says(&run("glass N-BK7 --at-nm 1.064"), 2, &["--at-nm: 1.064", "nanometres"]);
    for (name, known) in
        [("SiO2", "fused-silica"), ("ZnSe", "zinc-selenide"), ("CaF2", "LITHOTEC-CAF2")]
    {
        assert!(run(&format!("glass {name}")).out.contains(known), "{name}");
        says(&on_brief(|v| v["glasses_allowed"] = json!([name])), 2, &[known]);
    }
    let cold = run_on("assess - --temperatures-c 0", &text(&every_key()));
    says(&cold, 2, &["\"my-fused-silica\"", "index_per_k", "expansion_per_k", "density_g_cm3"]);
}

#[test]
fn places_that_take_no_result() {
    let told = run(&format!("optimise {RIVER} -o /no-such-folder/better.json"));
    says(&told, 7, &["there is no folder /no-such-folder"]);
    assert!(!told.err.contains("tmp"), "{}", told.err);
    says(&run("assess no-such-file.json"), 2, &["cannot be opened: No such file or directory"]);
    let picture = run(&format!("assess {RIVER} --picture /no-such-folder/x.png"));
    says(&picture, 2, &["--picture: /no-such-folder/x.png", "SVG", "name it .svg"]);
    let page = run(&format!("report {RIVER} -o /no-such-folder/x.pdf"));
    says(&page, 2, &["-o: /no-such-folder/x.pdf", "name it .html", "prints it as PDF"]);
}

#[test]
fn json_holds_everything_that_tables_show_apart() {
    let all = run(&format!("assess {RIVER} --json")).out;
    for apart in ["--all", "--hazards"] {
        assert_eq!(run(&format!("assess {RIVER} --json {apart}")).out, all, "{apart}");
    }
    let beam = run("assess configs/gorge-lidar-pulsed.json --json --beam --ranges-m 100").json();
    assert_eq!(beam["real_beam"][0]["ranges"][0]["range_m"], 100.0, "{}", beam["real_beam"][0]);
}

#[test]
fn curves_on_standard_output_leave_the_table_to_standard_error() {
    let ended = run(&format!("cam {RIVER} --ratios 3 --csv -"));
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(ended.out.starts_with("ratio"), "{}", ended.out);
    assert!(ended.out.lines().all(|line| line.contains(',')), "{}", ended.out);
    assert!(ended.err.contains("Movement from 2x to 6x"), "{}", ended.err);
}

#[test]
fn a_rank_without_a_place_is_told_not_to_be_kept() {
    let ended = run(&format!("start {BRIEF} --rank 7"));
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(ended.out.contains("Layout 7 was not kept: give -o OUT"), "{}", ended.out);
    assert!(ended.out.contains("\n 7  entry"), "it is told: {}", ended.out);
}

#[test]
fn an_impossible_brief_says_what_would_not_be_enough() {
    let short = on_brief(|v| v["housing"]["track_mm"] = json!(40));
    says(&short, 1, &["a layout was found with the track", "not enough by itself: "]);
    assert!(short.err.lines().all(|line| line.chars().count() <= 80), "{}", short.err);
    let strong = on_brief(|v| {
        v["beam"]["pulse_energy_mj"] = json!(7.2);
        v["limits"]["fluence_j_cm2"] = json!({ "max": 0.1 });
    });
    let told = "a pulse has 0.31831 J/cm² already at the first surface, beyond the limit of 0.1";
    says(&strong, 2, &["at /limits/fluence_j_cm2", told]);
}

#[test]
fn a_table_tells_what_is_reached_and_where() {
    let ended = run("assess configs/river-as-designed.json");
    assert_eq!(ended.status, 0, "{}", ended.err);
    for word in ["ratio ×", "entry 0", " reached ("] {
        assert!(ended.out.contains(word), "{word}: {}", ended.out);
    }
    assert!(!ended.out.contains("/groups/"), "{}", ended.out);
    let focused = run("assess configs/gorge-lidar-pulsed.json");
    assert!(focused.out.lines().any(|line| line.starts_with("goal ")), "{}", focused.out);
}
