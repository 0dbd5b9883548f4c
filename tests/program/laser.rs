//! The real beam and its hazards, as `assess` and `optimise` tell them.

use serde_json::{Value, json};

use crate::designs::text;
use crate::program::{root, run, run_on};

const GORGE: &str = "configs/gorge-lidar-pulsed.json";

fn gorge() -> Value {
    serde_json::from_str(&std::fs::read_to_string(root().join(GORGE)).unwrap()).unwrap()
}

/// The design with one key of the beam set, or taken away by null.
fn with(changes: &[(&str, Value)]) -> String {
    let mut design = gorge();
    for (pointer, value) in changes {
        let (parent, key) = pointer.rsplit_once('/').unwrap();
        let parent = design.pointer_mut(parent).unwrap().as_object_mut().unwrap();
        match value {
            Value::Null => drop(parent.shift_remove(key)),
            value => drop(parent.insert(key.to_owned(), value.clone())),
        }
    }
    text(&design)
}

/// Every line fits a terminal.
fn fits(told: &str) {
    assert_eq!(told.lines().find(|line| line.chars().count() > 80), None);
}

#[test]
fn the_summary() {
    let ended = run(&format!("assess {GORGE}"));
    fits(&ended.out);
    insta::assert_snapshot!(ended.told());
}

#[test]
fn everything_about_the_beam() {
    let ended = run(&format!("assess {GORGE} --beam --ranges-m 60,2000"));
    fits(&ended.out);
    insta::assert_snapshot!(ended.told());
}

#[test]
fn everything_about_hazards() {
    let ended = run(&format!("assess {GORGE} --hazards"));
    fits(&ended.out);
    insta::assert_snapshot!(ended.told());
}

#[test]
fn a_design_without_a_laser_has_no_cautions_but_a_beam() {
    let river = "configs/river-lidar-2x-6x.json";
    let plain = run(&format!("assess {river}")).out;
    assert!(!plain.contains("caution") && !plain.contains("Real beam"), "{plain}");
    let beam = run(&format!("assess {river} --beam")).out;
    assert!(beam.contains("M² 1.00, waist 2.400 mm at the first surface"), "{beam}");
    let hazards = run(&format!("assess {river} --hazards")).out;
    assert!(hazards.contains("neither power_w nor pulse_energy_mj"), "{hazards}");
    let document = run(&format!("assess {river} --json")).json();
    assert!(document.get("real_beam").is_none() && document.get("hazards").is_none());
    let ranged = run(&format!("assess {river} --json --ranges-m 0,250")).json();
    let ranges = ranged["real_beam"][0]["ranges"].as_array().unwrap();
    assert_eq!(ranges.len(), 2);
    assert_eq!(ranges[1]["range_m"], 250.0);
}

#[test]
fn the_document_tells_all_of_it() {
    let document = run(&format!("assess {GORGE} --json")).json();
    let beam = &document["real_beam"][3];
    for pointer in [
        "/entrance/m_squared",
        "/exit/waist_at_m",
        "/surfaces/0/clipped_percent",
        "/far_field/on_axis_refocused",
        "/readjust/0/to_least_divergence_mm",
        "/pointing/rms_waves",
    ] {
        assert!(beam.pointer(pointer).is_some_and(Value::is_number), "{pointer} of {beam}");
    }
    let hazards = &document["hazards"][0];
    for pointer in [
        "/surfaces/0/exposure/fluence_j_cm2",
        "/surfaces/0/exposure/of_threshold",
        "/ghosts/0/share",
        "/ghosts/0/into_laser",
        "/ghosts/6/hardest_on_glass/fluence_j_cm2",
    ] {
        assert!(hazards.pointer(pointer).is_some_and(Value::is_number), "{pointer} of {hazards}");
    }
    assert_eq!(hazards["ghosts"].as_array().unwrap().len(), 6 + 15);
    assert_eq!(document["cautions"].as_array().unwrap().len(), 3);
    assert!(document["states"][3]["exit_focus_m"].is_number());
    // 2E/(πw²): 2 · 20 mJ/(π · (1.5 mm)²).
    let fluence = hazards["surfaces"][0]["exposure"]["fluence_j_cm2"].as_f64().unwrap();
    assert!((fluence - 0.04 / (std::f64::consts::PI * 0.0225)).abs() < 1e-12);
}

#[test]
fn an_uncoated_design_reflects_what_bare_glass_does_and_says_so() {
    let ended = run_on("assess - --json", &with(&[("/coating", Value::Null)]));
    let document = ended.json();
    let share = document["hazards"][0]["ghosts"][0]["share"].as_f64().unwrap();
    // Fused silica at 1064 nm, n = 1.4496 (I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965)).
    let expected = (0.4496_f64 / 2.4496).powi(2);
    assert!((share / expected - 1.0).abs() < 1e-3, "{share}");
    assert!(document["cautions"].to_string().contains("Fresnel"));
}

#[test]
fn thresholds_that_are_passed_and_not_scaled_are_told() {
    let changed = with(&[
        ("/damage_thresholds/coating/fluence_j_cm2", json!(1.0)),
        ("/damage_thresholds/coating/scaling", Value::Null),
    ]);
    let told = run_on("assess -", &changed).out;
    let flat = told.split_whitespace().collect::<Vec<_>>().join(" ");
    let warned =
        "the beam at /groups/runner/elements/0/radii_mm/1 reaches 1.88 times the threshold";
    assert!(flat.contains(warned), "{told}");
    assert!(
        flat.contains("measured at 10 ns and is held against pulses of 8 ns as it is"),
        "{told}"
    );
    let none = run_on("assess -", &with(&[("/damage_thresholds", Value::Null)])).out;
    assert!(none.contains("nothing is judged"), "{none}");
}

#[test]
fn an_inverted_beam_tells_how_hard_its_focus_is() {
    let lens = |radius: f64| {
        json!([{ "radii_mm": [radius, -radius], "glasses": ["N-BK7"],
                 "thicknesses_mm": [3.0], "diameter_mm": 10.0 }])
    };
    let design = json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [633.0], "diameter_mm": 1.0, "power_w": 5.0 },
        "groups": [{ "name": "a", "elements": lens(20.0) }, { "name": "b", "elements": lens(60.0) }],
        "housing": { "track_mm": 120.0 },
        "states": [{ "name": "s", "ratio": -3.0, "spacings_mm": [77.0] }]
    });
    let document = run_on("assess - --json", &text(&design)).json();
    let focus = &document["hazards"][0]["internal_foci"][0];
    assert_eq!(
        (&focus["in_glass"], &focus["behind"]),
        (&json!(false), &json!("/groups/0/elements/0/radii_mm/1"))
    );
    // A focus of f/diameter about 19.3: w₀ ≈ λf/(πw), P peaks at 2P/(πw₀²).
    let irradiance = focus["exposure"]["irradiance_w_cm2"].as_f64().unwrap();
    let waist_cm = 633e-7 * 19.9 / (std::f64::consts::PI * 0.5);
    let expected = 10.0 / (std::f64::consts::PI * waist_cm * waist_cm);
    assert!((irradiance / expected - 1.0).abs() < 0.1, "{irradiance} {expected}");
    let told = run_on("assess -", &text(&design)).out;
    assert!(told.contains("focus behind") && told.contains("safety"), "{told}");
}

#[test]
fn what_is_wrong_about_a_laser_is_put_right() {
    let changes: [&[(&str, Value)]; 14] = [
        &[("/beam/waist_diameter_mm", json!(2.0))],
        &[("/beam/m_squared", json!(0.9))],
        &[("/beam/m_squared", Value::Null), ("/beam/divergence_mrad", json!(0.3))],
        &[("/beam/divergence_mrad", Value::Null), ("/beam/waist_diameter_mm", json!(3.5))],
        &[("/beam/divergence_mrad", Value::Null), ("/beam/waist_distance_mm", json!(90_000.0))],
        &[("/beam/pulse_energy_mj", Value::Null)],
        &[("/beam/pulse_lenght_ns", json!(8.0))],
        &[("/beam/pointing_mrad", json!(-1.0))],
        &[("/coating/reflectance_percent", json!(101.0))],
        &[("/damage_thresholds/coating/pulse_length_ns", json!(500.0))],
        &[("/damage_thresholds/coating/scaling", json!("cube-root"))],
        &[("/goals/exit_focus_m", json!({ "wanted": 0.0, "within": 1.0 }))],
        &[("/goals/diameter_at_range_mm", json!({ "range_m": -3.0, "within": 1.0 }))],
        &[("/limits/ghost_clearance_mm", json!({ "max": 1.0 }))],
    ];
    let told: Vec<String> = changes
        .iter()
        .map(|changes| {
            let ended = run_on("assess -", &with(changes));
            assert_eq!((ended.status, ended.out.as_str()), (2, ""), "{changes:?}");
            ended.err
        })
        .collect();
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn goals_about_the_real_beam_are_reached() {
    let changed = with(
        &[
            ("/goals", json!({ "ratio_percent": { "within": 1.0 } })),
            ("/states/0/goals", json!({ "divergence_mrad": { "within": 0.31 } })),
            (
                "/states/1/goals",
                json!({ "diameter_at_range_mm":
            { "range_m": 300.0, "wanted": 90.0, "within": 1.0 } }),
            ),
            ("/states/2/goals", json!({ "exit_focus_m": { "wanted": -25.0, "within": 0.5 } })),
        ]
        .map(|(pointer, value)| (pointer, value)),
    );
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("out.json");
    let ended = run_on(&format!("optimise - -o {}", out.display()), &changed);
    assert_eq!(ended.status, 0, "{}", ended.err);
    let document = run(&format!("assess {} --json", out.display())).json();
    assert_eq!(document["meets"], true, "{}", ended.out);
    let states = document["states"].as_array().unwrap();
    assert!(states[0]["divergence_mrad"].as_f64().unwrap() <= 0.31);
    assert!((states[1]["diameter_at_range_mm"].as_f64().unwrap() - 90.0).abs() <= 1.0);
    assert!((states[2]["exit_focus_m"].as_f64().unwrap() + 25.0).abs() <= 0.6);
    assert!((states[3]["exit_focus_m"].as_f64().unwrap() - 60.0).abs() <= 1.1);
}

#[test]
fn ranges_are_checked_before_anything_is_computed() {
    for range in ["-1", "nan", "1e12", "far"] {
        let ended = run(&format!("assess {GORGE} --beam --ranges-m=5,{range}"));
        assert_eq!((ended.status, ended.out.as_str()), (2, ""), "{range}");
        assert!(ended.err.contains("a range is a number of metres"), "{}", ended.err);
    }
}

/// Where the keys about the laser stand, in a design that has them all but for what contradicts
/// another.
fn laser_keys() -> (Value, Vec<String>) {
    let mut design: Value = serde_json::from_str(&with(&[
        ("/goals/divergence_mrad", json!({ "within": 0.5 })),
        ("/goals/diameter_at_range_mm", json!({ "range_m": 50.0, "wanted": 20.0, "within": 9.0 })),
        ("/limits/double_ghost_clearance_mm", json!({ "min": 0.5 })),
    ]))
    .unwrap();
    for name in ["coating", "glass"] {
        design["damage_thresholds"][name].as_object_mut().unwrap().shift_remove("note");
    }
    let ours = [
        "/beam/m_squared",
        "/beam/divergence_mrad",
        "/beam/p",
        "/coating/",
        "/damage_thresholds/",
        "/goals/divergence_mrad",
        "/goals/diameter_at_range_mm",
        "/states/3/goals/exit_focus_m",
        "/limits/fluence_j_cm2",
        "/limits/ghost_clearance_mm",
        "/limits/double_ghost_clearance_mm",
    ];
    let pointers = crate::designs::pointers(&design).into_iter();
    let pointers = pointers.filter(|at| ours.iter().any(|ours| at.starts_with(ours)));
    (design, pointers.collect())
}

#[test]
fn every_key_misspelt_is_recognised() {
    let (whole, pointers) = laser_keys();
    assert!(pointers.len() > 20);
    for pointer in pointers {
        let (parent, key) = pointer.rsplit_once('/').unwrap();
        let (front, last) = key.split_at(key.len() - 2);
        let slip: String = front.chars().chain(last.chars().rev()).collect();
        if slip == key {
            continue;
        }
        let mut design = whole.clone();
        let map = design.pointer_mut(parent).unwrap().as_object_mut().unwrap();
        let value = map.shift_remove(key).unwrap();
        map.insert(slip, value);
        let ended = run_on("assess -", &text(&design));
        assert_eq!((ended.status, ended.out.as_str()), (2, ""), "{pointer}");
        assert!(
            ended.err.contains(&format!("did you mean \"{key}\"?")),
            "{pointer}: {}",
            ended.err
        );
    }
}

#[test]
fn extreme_numbers_are_answered_or_refused() {
    let (whole, pointers) = laser_keys();
    for pointer in pointers {
        if !whole.pointer(&pointer).is_some_and(Value::is_number) {
            continue;
        }
        let mut design = whole.clone();
        *design.pointer_mut(&pointer).unwrap() = json!("@@");
        let written = text(&design);
        for token in ["1e308", "5e-324", "-0.0", "-1e308"] {
            let ended = run_on("assess - --json", &written.replace("\"@@\"", token));
            assert!([0, 2].contains(&ended.status), "{pointer} = {token}: {}", ended.err);
            assert!(ended.status == 2 || ended.json().is_object(), "{pointer} = {token}");
            for word in ["NaN", "inf,"] {
                assert!(!ended.out.contains(word), "{pointer} = {token}");
            }
        }
    }
}

/// Reflected light that comes to a focus in glass is warned of whether or not a limit asks for it.
#[test]
fn a_ghost_in_glass_is_never_passed_over() {
    let mut seen = [false; 2];
    for radius in [-118.8063, -14.0, -9.0] {
        let entry = json!([162.2499, radius]);
        let changes = [("/groups/0/elements/0/radii_mm", entry), ("/limits", Value::Null)];
        let document = run_on("assess - --json", &with(&changes)).json();
        let states = document["hazards"].as_array().unwrap();
        let ghosts = states.iter().flat_map(|state| state["ghosts"].as_array().unwrap());
        let deep = ghosts
            .filter_map(|ghost| ghost["clearance_mm"].as_f64())
            .any(|clearance| clearance < 0.0);
        let warnings = document["warnings"].to_string();
        assert_eq!(warnings.contains("focus inside glass"), deep, "{radius}: {warnings}");
        seen[usize::from(deep)] = true;
    }
    assert!(seen[1], "no ghost of these has its focus in glass");
}

/// A laser that gives no pulses is told by irradiance.
#[test]
fn a_steady_laser_is_told_by_irradiance() {
    let steady = with(&[
        ("/beam/pulse_energy_mj", Value::Null),
        ("/beam/pulse_length_ns", Value::Null),
        ("/damage_thresholds", Value::Null),
        ("/limits", Value::Null),
    ]);
    let told = run_on("assess -", &steady).out;
    let ghosts = told.split("ghost reflected").nth(1).unwrap();
    assert!(ghosts.contains("W/cm²") && !ghosts.contains("J/cm²"), "{ghosts}");
}
