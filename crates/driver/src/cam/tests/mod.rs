//! Movement curves against the closed form for thin groups, and against themselves.
//!
//! The closed forms are the thin-lens conjugate relations of any textbook (W. J. Smith, *Modern
//! Optical Engineering*, ch. 2): a thin lens of focal length f and magnification μ has its object
//! at s = f(1/μ − 1) and its image at s′ = f(1 − μ) from it, and an afocal train of ends f₁ and
//! f_k has the ratio m = −f_k/(f₁ Π μ). What differs between a lens 0.2 µm thick in a beam of
//! 20 µm and a thin one is far below what the tests ask for.

mod derivatives;
mod findings;
mod four_groups;
mod three_groups;

use merit_function::movement::Gauge;
use serde_json::{Value, json};
use surface_model::document::Document;

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

fn curve_of(value: Value) -> MovementCurve {
    curve(&read(value))
}

fn shipped(name: &str) -> DesignFile {
    let path = format!("{}/../../configs/{name}.json", env!("CARGO_MANIFEST_DIR"));
    read(serde_json::from_str(&std::fs::read_to_string(path).unwrap()).unwrap())
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
