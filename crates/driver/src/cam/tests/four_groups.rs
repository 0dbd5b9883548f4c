//! Four thin groups with both ends fixed: two movements for the same ratios.

use super::*;

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
