//! Movement curves against the closed form for thin groups, and against themselves.
//!
//! The closed forms are the thin-lens conjugate relations of any textbook (W. J. Smith, *Modern
//! Optical Engineering*, ch. 2): a thin lens of focal length f and magnification μ has its object
//! at s = f(1/μ − 1) and its image at s′ = f(1 − μ) from it, and an afocal train of ends f₁ and
//! f_k has the ratio m = −f_k/(f₁ Π μ). What differs between a lens 0.2 µm thick in a beam of
//! 20 µm and a thin one is far below what the tests ask for.

use serde_json::{Value, json};
use surface_model::document::Document;

use merit_function::assessment::LimitAssessment;
use merit_function::limits::LimitKind;
use merit_function::movement::Gauge;

use super::*;
use crate::design_file::DesignFile;

const THICKNESS_MM: f64 = 2e-4;

/// A train of thin groups of these focal lengths, mm.
fn thin(
    focal_mm: &[f64],
    track_mm: f64,
    fixed: &[usize],
    states: &[(f64, Vec<f64>)],
) -> DesignFile {
    let name = |g: &usize| format!("g{g}");
    let group = |(g, f): (usize, &f64)| {
        json!({ "name": name(&g), "elements": [ { "radii_mm": [f, -f], "glasses": ["medium"],
                "thicknesses_mm": [THICKNESS_MM], "diameter_mm": 0.1 } ] })
    };
    let states = states.iter().map(|(ratio, spacings)| {
        json!({ "name": format!("{ratio}x"), "ratio": ratio, "spacings_mm": spacings })
    });
    read(json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [500.0], "diameter_mm": 0.02 },
        "glasses": { "medium": { "index": 1.5 } },
        "groups": focal_mm.iter().enumerate().map(group).collect::<Vec<_>>(),
        "housing": { "track_mm": track_mm, "fixed": fixed.iter().map(name).collect::<Vec<_>>() },
        "states": states.collect::<Vec<_>>(),
    }))
}

fn read(value: Value) -> DesignFile {
    DesignFile::read(Document::from_value("test", value)).unwrap_or_else(|e| panic!("{e}"))
}

fn curve(file: &DesignFile) -> MovementCurve {
    movement_curve(&file.design, &file.wishes, &CamSettings::default()).unwrap()
}

fn shipped(name: &str) -> DesignFile {
    let path = format!("{}/../../configs/{name}.json", env!("CARGO_MANIFEST_DIR"));
    read(serde_json::from_str(&std::fs::read_to_string(path).unwrap()).unwrap())
}

#[test]
fn three_thin_groups_move_as_the_closed_form_says() {
    // μ₂ = −f₃/(f₁ m): the first distance is linear in m, the second in 1/m.
    let (f1, f2, f3) = (50.0, -10.0, 150.0);
    let first = |m: f64| f1 + f2 + f1 * f2 * m / f3;
    let second = |m: f64| f2 + f3 + f2 * f3 / (f1 * m);
    // Designed states a little off, so that Newton's method has something to do.
    let states: Vec<(f64, Vec<f64>)> =
        [2.0, 4.0, 6.0].map(|m| (m, vec![first(m) + 0.3, second(m) - 0.5])).into();
    let curve = curve(&thin(&[f1, f2, f3], 170.0, &[2], &states));
    assert_eq!((curve.held, curve.points.len()), (Hold::RatioAndCollimation, 21));
    for point in &curve.fine {
        let m = point.ratio;
        let expected = [first(m), second(m)];
        for (spacing, expected) in point.spacings_mm.iter().zip(expected) {
            assert!((spacing - expected).abs() < 5e-4, "{m}: {spacing} {expected}");
        }
        // The exit stands still, so the runner's slope is that of −d₂, the entry's of −(d₁ + d₂).
        let runner = f2 * f3 / (f1 * m * m);
        let slopes = [runner - f1 * f2 / f3, runner, 0.0];
        for (group, expected) in point.groups.iter().zip(slopes) {
            assert!((group.slope_mm_per_ratio - expected).abs() < 1e-4, "{m}: {group:?}");
        }
        assert!(point.collimation_urad.abs() < 1e-3 && point.ratio_error_percent.unwrap() < 1e-6);
    }
    // The entry's slope f₂f₃/(f₁ m²) − f₁f₂/f₃ vanishes at m = f₃/f₁: there, and only there, it
    // turns back.
    let [turning] = curve.findings.as_slice() else { panic!("{:?}", curve.findings) };
    assert_eq!(
        (turning.kind, turning.what.as_str(), turning.wrong),
        (FindingKind::Reversal, "g0", false)
    );
    assert!((turning.ratios[0] - f3 / f1).abs() < 1e-4, "{turning:?}");
}

/// Three thin groups that bring a parallel beam to a focus at the distance q behind the last one, at
/// the ratio m. A ray at the height 1 has the height y₂ = 1 − d₁/f₁ at the runner, falls by
/// u = 1/f₁ + y₂/f₂ a mm behind it, and meets the exit at m = y₂ − d₂ u; behind that it falls by
/// u + m/f₃ = m/q.
fn focused(f: [f64; 3], q: f64, m: f64) -> Vec<f64> {
    let [f1, f2, f3] = f;
    let u = m * (1.0 / q - 1.0 / f3);
    let y2 = f2 * (u - 1.0 / f1);
    vec![f1 * (1.0 - y2), (y2 - m) / u]
}

#[test]
fn a_focus_is_held_where_it_is_wanted() {
    let f = [50.0, -10.0, 150.0];
    // The same closed form collimates: q is infinite.
    let collimated = focused(f, f64::INFINITY, 4.0);
    assert!((collimated[0] - (40.0 - 500.0 * 4.0 / 150.0)).abs() < 1e-9, "{collimated:?}");
    for q_m in [3.0, -8.0] {
        let q = 1e3 * q_m;
        let states: Vec<(f64, Vec<f64>)> =
            [2.0, 4.0, 6.0].map(|m| (m, focused(f, q, m).iter().map(|d| d + 0.2).collect())).into();
        let mut value = thin(&f, 180.0, &[2], &states).document().value().clone();
        value["goals"] = json!({ "exit_focus_m": { "wanted": q_m, "within": 0.01 } });
        let curve = curve_of(value);
        assert_eq!((curve.held, curve.exit_focus_m), (Hold::RatioAndFocus, Some(q_m)));
        for point in &curve.fine {
            let expected = focused(f, q, point.ratio);
            for (spacing, expected) in point.spacings_mm.iter().zip(expected) {
                let ratio = point.ratio;
                assert!((spacing - expected).abs() < 1e-3, "{ratio}: {spacing} {expected}");
            }
            assert!(point.collimation_urad.abs() < 1e-3, "{point:?}");
            assert!(point.paraxial_off_urad.unwrap().abs() < 1e-2, "{point:?}");
            assert!((point.exit_focus_m.unwrap() / q_m - 1.0).abs() < 1e-4, "{point:?}");
            // The wavefront is told about the focus, where it is that of thin lenses in 10 µm.
            assert!(point.wavefront[0].rms_waves.unwrap() < 1e-4, "{point:?}");
        }
        // The slopes are those of the closed form: d d₁/dm and d d₂/dm by differences.
        let middle = &curve.fine[curve.fine.len() / 2];
        let [a, b] = [-1e-4, 1e-4].map(|by| focused(f, q, middle.ratio + by));
        let runner = -(b[1] - a[1]) / 2e-4;
        assert!((middle.groups[1].slope_mm_per_ratio - runner).abs() < 1e-3, "{middle:?}");
    }
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

#[test]
fn a_focus_is_held_through_the_sphere_around_it() {
    // W + S by the ray's own numbers against the whole beam's spacing derivatives by differences.
    let file = shipped("river-lidar-2x-6x");
    let state = &file.design.states[2];
    let mut gauge = Gauge::new(&file.design, state, 532.0).unwrap();
    gauge.want_vergence(1e-3 / 40.0);
    let mut at = |by: [f64; 2]| {
        let spacings: Vec<f64> = state.spacings_mm.iter().zip(by).map(|(d, by)| d + by).collect();
        gauge.measure(&spacings).unwrap()
    };
    let told = at([0.0; 2]).collimation_by_spacing;
    for (k, told) in told.iter().enumerate() {
        let by = |h: f64| if k == 0 { [h, 0.0] } else { [0.0, h] };
        let difference = at(by(1e-4)).collimation_rad - at(by(-1e-4)).collimation_rad;
        assert!((difference / 2e-4 / told - 1.0).abs() < 1e-6, "{difference} {told}");
    }
    // A flat sphere is none.
    let collimated = {
        let mut gauge = Gauge::new(&file.design, state, 532.0).unwrap();
        gauge.measure(&state.spacings_mm).unwrap().collimation_rad
    };
    gauge.want_vergence(1e-15);
    let nearly = gauge.measure(&state.spacings_mm).unwrap().collimation_rad;
    assert!((nearly - collimated).abs() < 1e-12, "{nearly} {collimated}");
}

#[test]
fn limits_along_the_way_have_the_values_of_the_closed_form() {
    // f₃/f₁ = 3: with the exit at rest the entry's slope is 30/m² − 10/3, the runner's 30/m².
    let (f1, f2, f3) = (50.0, -10.0, 150.0);
    let state = |m: f64| (m, vec![f1 + f2 + f1 * f2 * m / f3, f2 + f3 + f2 * f3 / (f1 * m)]);
    let mut value =
        thin(&[f1, f2, f3], 170.0, &[2], &[2.0, 4.0, 6.0].map(state)).document().value().clone();
    value["limits"] = json!({ "monotonic": ["/groups/*"], "slope_mm_per_ratio": { "max": 8.0 },
        "travel_mm": { "max": 3.0 }, "spacing_mm": { "max": 130.0 }, "between_states": "keep" });
    let file = read(value);
    let assessment = merit_function::assessment::assess(&file.design, &file.wishes);
    let told = |limit: LimitKind, at: &str| {
        let same = |other: &&LimitAssessment| {
            other.limit == limit && other.at_ratio.is_some() && other.at.to_string() == at
        };
        let limit = assessment.limits.iter().find(same).unwrap();
        (limit.value.unwrap(), limit.at_ratio.unwrap())
    };
    let exit = 170.0 - THICKNESS_MM;
    let entry = |m: f64| exit - state(m).1.iter().sum::<f64>() - 2.0 * THICKNESS_MM;
    for (kind, at, value, ratio) in [
        // On the whole the entry goes to the rear, so that its way from 2x to 3x is against it.
        (LimitKind::Monotonic, "/groups/0", -(30.0 / 4.0 - 10.0 / 3.0), 2.0),
        (LimitKind::Monotonic, "/groups/1", 30.0 / 36.0, 6.0),
        (LimitKind::SlopeMmPerRatio, "/groups/0", 30.0 / 4.0 - 10.0 / 3.0, 2.0),
        (LimitKind::SlopeMmPerRatio, "/groups/1", 7.5, 2.0),
        (LimitKind::TravelMm, "/groups/0", entry(6.0) - entry(3.0), 6.0),
        (LimitKind::TravelMm, "/groups/1", 10.0, 2.0),
        (LimitKind::SpacingMm, "/states/*/spacings_mm/1", 135.0, 6.0),
        (LimitKind::SpacingMm, "/states/*/spacings_mm/0", 40.0 - 20.0 / 3.0, 2.0),
        (LimitKind::HousingMm, "/states/*", entry(3.0), 3.0),
    ] {
        let found = told(kind, at);
        assert!((found.0 - value).abs() < 1e-3, "{kind:?} {at}: {found:?} {value}");
        assert!((found.1 - ratio).abs() < 1e-2, "{kind:?} {at}: {found:?} {ratio}");
    }
}

/// Distances of four thin groups with both ends fixed: with μ₂μ₃ = P = −f₄/(f₁ m) the track asks
/// f₂(2 − μ − 1/μ) + f₃(2 − P/μ − μ/P) = D − f₁ − f₄, a quadratic in μ = μ₂.
fn four_groups(f: [f64; 4], track: f64, m: f64, sign: f64) -> Option<Vec<f64>> {
    let [f1, f2, f3, f4] = f;
    let p = -f4 / (f1 * m);
    let (a, b, c) = (-f2 - f3 / p, 2.0 * (f2 + f3) - (track - f1 - f4), -f2 - f3 * p);
    let root = (b * b - 4.0 * a * c).sqrt();
    let mu = (-b + sign * root) / (2.0 * a);
    let mu3 = p / mu;
    let first = f1 - f2 * (1.0 / mu - 1.0);
    let second = f2 * (1.0 - mu) - f3 * (1.0 / mu3 - 1.0);
    root.is_finite().then(|| vec![first, second, track - first - second])
}

const FOUR: [f64; 4] = [-60.0, 60.0, -20.0, 100.0];
const TRACK: f64 = 200.0;

fn four(track: f64, states: &[(f64, f64)]) -> DesignFile {
    let states: Vec<(f64, Vec<f64>)> =
        states.iter().map(|&(m, sign)| (m, four_groups(FOUR, track, m, sign).unwrap())).collect();
    thin(&FOUR, track + 4.0 * THICKNESS_MM, &[0, 3], &states)
}

#[test]
fn either_solution_of_four_groups_is_followed() {
    for sign in [1.0, -1.0] {
        let curve = curve(&four(TRACK, &[(2.0, sign), (3.0, sign)]));
        assert!(curve.findings.iter().all(|f| f.kind != FindingKind::BranchChange));
        for point in &curve.points {
            let expected = four_groups(FOUR, TRACK, point.ratio, sign).unwrap();
            for (spacing, expected) in point.spacings_mm.iter().zip(&expected) {
                assert!((spacing - expected).abs() < 2e-3, "{} {spacing} {expected}", point.ratio);
            }
        }
    }
}

#[test]
fn states_on_different_branches_are_told() {
    let curve = curve(&four(TRACK, &[(2.0, 1.0), (3.0, -1.0)]));
    let told: Vec<&Finding> =
        curve.findings.iter().filter(|f| f.kind == FindingKind::BranchChange).collect();
    assert_eq!(told.len(), 1, "{:?}", curve.findings);
    assert!(told[0].told.contains("no continuous movement leads from 2x to 3x"), "{told:?}");
    assert!(!curve.sound);
}

#[test]
fn a_curve_that_turns_back_is_followed_from_both_ends() {
    // In a tube a little shorter the quadratic has no real root between the two ratios.
    const SHORTER: f64 = 199.9;
    let gap: Vec<f64> = (0..400)
        .map(|i| 1.5 + 0.5 * f64::from(i) / 399.0)
        .filter(|&m| four_groups(FOUR, SHORTER, m, 1.0).is_none())
        .collect();
    let (first, last) = (gap[0], gap[gap.len() - 1]);
    let curve = curve(&four(SHORTER, &[(1.5, 1.0), (2.0, 1.0)]));
    let told = curve.findings.iter().find(|f| f.kind == FindingKind::BranchChange).unwrap();
    assert!((told.ratios[0] - first).abs() < 3e-3, "{told:?} {first}");
    assert!((told.ratios[1] - last).abs() < 3e-3, "{told:?} {last}");
    assert!(curve.fine.iter().all(|p| p.ratio <= told.ratios[0] || p.ratio >= told.ratios[1]));
}

#[test]
fn slopes_are_those_of_the_positions() {
    for name in ["river-lidar-2x-6x", "four-groups-asphere"] {
        let file = shipped(name);
        let curve = curve(&file);
        for five in curve.fine.windows(5).step_by(17) {
            let even = five[4].ratio - 2.0 * five[2].ratio + five[0].ratio;
            if even.abs() > 1e-9 {
                continue;
            }
            let h = five[1].ratio - five[0].ratio;
            for g in curve.moving() {
                // The five-point rule for a derivative (Abramowitz and Stegun, 25.3.6).
                let z = |i: usize| five[i].groups[g].position_mm;
                let slope = (8.0 * (z(3) - z(1)) - (z(4) - z(0))) / (12.0 * h);
                let told = five[2].groups[g].slope_mm_per_ratio;
                assert!((slope - told).abs() < 1e-5 * told.abs().max(1.0), "{name} {slope} {told}");
            }
        }
    }
}

#[test]
fn with_more_freedom_than_conditions_the_rest_goes_through_the_states() {
    let mut value = four(TRACK, &[(2.0, 1.0), (2.5, 1.0), (3.0, 1.0)]).document().value().clone();
    value["housing"] = json!({ "track_mm": 220.0, "fixed": [] });
    let file = read(value);
    let curve = curve(&file);
    let parts: Vec<Part> = curve.groups.iter().map(|group| group.part).collect();
    assert_eq!(parts[0], Part::Still, "distances alone matter: the first group is the datum");
    assert_eq!(parts.iter().filter(|part| **part == Part::Guided).count(), 1);
    let guided = parts.iter().position(|part| *part == Part::Guided).unwrap();
    for state in &curve.states {
        assert!(state.curve_less_design_mm[guided].abs() < 1e-9, "{state:?}");
    }
    assert!(curve.points.iter().all(|point| point.collimation_urad.abs() < 1e-3));
}

#[test]
fn one_moving_group_holds_the_ratio_and_the_rest_is_told() {
    let file = shipped("moving-collimator");
    let curve = curve(&file);
    assert_eq!(curve.held, Hold::Ratio);
    assert!(curve.points.iter().all(|point| point.ratio_error_percent.unwrap().abs() < 1e-6));
    let missed = curve.findings.iter().any(|finding| finding.kind == FindingKind::Goal);
    assert!(missed, "one lens collimates at two positions only: {:?}", curve.findings);
}

#[test]
fn collimation_is_what_a_displaced_group_changes_it_by() {
    let file = shipped("river-lidar-2x-6x");
    let design = &file.design;
    let mut gauge = Gauge::new(design, &design.states[0], 532.0).unwrap();
    let at = curve(&file).points[3].clone();
    let mut collimation = |group: usize, by_mm: f64| {
        let mut spacings = at.spacings_mm.clone();
        if group > 0 {
            spacings[group - 1] += by_mm;
        }
        if group < spacings.len() {
            spacings[group] -= by_mm;
        }
        gauge.measure(&spacings).unwrap().collimation_rad * 1e6
    };
    for group in 0..3 {
        let difference = (collimation(group, 1e-3) - collimation(group, -1e-3)) / 2.0;
        let told = at.groups[group].collimation_urad_per_um;
        assert!((difference - told).abs() < 1e-5 * told.abs().max(1.0), "{difference} {told}");
    }
}

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

fn curve_of(value: Value) -> MovementCurve {
    curve(&read(value))
}

#[test]
fn what_has_no_curve_says_why() {
    let (states, focal) =
        ([(2.0, vec![33.0, 125.0]), (6.0, vec![20.0, 138.0])], [50.0, -10.0, 150.0]);
    let refused = |file: &DesignFile, settings| {
        movement_curve(&file.design, &file.wishes, &settings)
            .err()
            .map_or_else(|| "not refused".to_owned(), |error| error.to_string())
    };
    let usual = CamSettings::default;
    let one = thin(&focal, 170.0, &[2], &states[..1]);
    assert!(refused(&one, usual()).contains("has only one"));
    let both = thin(&focal, 170.0, &[2], &[(-2.0, vec![33.0, 125.0]), states[1].clone()]);
    assert!(refused(&both, usual()).contains("inverted"));
    let still = vec![(2.0, vec![40.0, 110.0]), (3.0, vec![40.0, 110.0])];
    let still = thin(&focal, 150.0 + 3.0 * THICKNESS_MM, &[0, 1, 2], &still);
    assert!(refused(&still, usual()).contains("no group moves"));
    let two = thin(&focal, 170.0, &[2], &states);
    let steps = CamSettings { ratios: Ratios::Count(1), ..usual() };
    assert!(refused(&two, steps).contains("--ratios"));
    // Two groups have one afocal distance; here their rays cross the axis and spread for ever.
    let lone =
        thin(&[50.0, -10.0, -10.0], 170.0, &[2], &[(2.0, vec![9.0, 9.0]), states[1].clone()]);
    assert!(refused(&lone, usual()).contains("no positions hold"), "{}", refused(&lone, usual()));
}
