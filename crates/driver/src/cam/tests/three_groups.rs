//! Three thin groups, the last one fixed.

use merit_function::assessment::LimitAssessment;
use merit_function::limits::LimitKind;

use super::*;

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
