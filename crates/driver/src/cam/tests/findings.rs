//! What is told of a curve.

use super::*;

#[test]
fn collisions_limits_and_steepness_between_the_states_are_found() {
    let (f1, f2, f3) = (50.0, -10.0, 150.0);
    let state = |m: f64| (m, vec![f1 + f2 + f1 * f2 * m / f3, f2 + f3 + f2 * f3 / (f1 * m)]);
    // The runner's groove is 30/m² mm steep: 7.5 mm at 2x.
    let mut file = thin(&[f1, f2, f3], 170.0, &[2], &[state(2.0), state(6.0)]);
    let settings = CamSettings {
        barrel: Some(Barrel::new(10.0, 90.0).unwrap()),
        steepest_mm: Some(5.0),
        steepest_deg: Some(60.0),
        ..CamSettings::default()
    };
    let curve = movement_curve(&file.design, &file.wishes, &settings).unwrap();
    let steep: Vec<&Finding> =
        curve.findings.iter().filter(|f| f.kind == FindingKind::Steep).collect();
    // |dz/dm| of the entry is |3.33 − 30/m²|, of the runner 30/m²: 5 at m = √6.
    let runner = steep.iter().find(|f| f.what == "g1" && f.told.contains("mm a unit")).unwrap();
    assert!((runner.ratios[1] - 6.0_f64.sqrt()).abs() < 0.03, "{runner:?}");
    // tan α = 7.5 · 4/(π/2)/10 = 1.90986 at 2x: 62.36°.
    let point = &curve.points[0].groups[1];
    assert!((point.groove.unwrap().pressure_deg - 62.364).abs() < 2e-2, "{point:?}");
    // The closed form of the entry turns back where 30/m² = 10/3, at m = 3.
    let turn = curve.findings.iter().find(|f| f.kind == FindingKind::Reversal).unwrap();
    assert!(turn.what == "g0" && (turn.ratios[0] - 3.0).abs() < 1e-2, "{turn:?}");

    // With a weaker exit the entry would have to stand behind the runner at high ratios.
    file = thin(&[f1, f2, 80.0], 170.0, &[2], &[(2.0, vec![27.5, 62.0]), (6.0, vec![2.5, 67.3])]);
    let mut value = file.document().value().clone();
    value["states"][1]["ratio"] = json!(6.6);
    let curve = curve_of(value);
    let hit = curve.findings.iter().find(|f| f.kind == FindingKind::Collision).unwrap();
    assert!((hit.ratios[0] - 6.4).abs() < 0.03, "40 − 6.25 m is zero at 6.4: {hit:?}");
}

#[test]
fn a_state_that_should_leave_otherwise_is_told_and_left_out() {
    let curve = curve(&shipped("gorge-lidar-pulsed"));
    assert_eq!((curve.held, curve.exit_focus_m), (Hold::RatioAndCollimation, None));
    let names: Vec<&str> = curve.states.iter().map(|state| state.name.as_str()).collect();
    assert_eq!(names, ["2x", "3x", "5x"]);
    let told = curve.findings.iter().find(|f| f.kind == FindingKind::LeftOut).unwrap();
    assert!(!told.wrong && told.told.contains("state near") && told.told.contains("60 m"));
}
