//! What `assess` and `cam` tell of a whole expander, worked out by hand from textbook formulas.
//!
//! A Galilean expander of a plano-concave and a plano-convex lens, curved on the outside, of index
//! 1.5. By E. Hecht, *Optics*, §6.1, with a flat side the principal planes are at the curved vertex
//! and t/n from the flat one: f₁ = −80, f₂ = 320, and the principal planes stand 240 apart when the
//! air between the flats is 240 − 2/1.5 − 5/1.5.

use std::f64::consts::PI;

use driver::cam::{CamSettings, movement_curve};
use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, assess};
use merit_function::limits::LimitKind;
use serde_json::{Value, json};
use surface_model::document::Document;

/// Air between the flats at which the expander is afocal, mm.
const AFOCAL_MM: f64 = 240.0 - 7.0 / 1.5;
const NM: f64 = 532.0;

fn read(value: Value) -> DesignFile {
    DesignFile::read(Document::from_value("expander", value)).unwrap_or_else(|e| panic!("{e}"))
}

/// The expander with this air and these goals.
fn expander(air_mm: f64, goals: &Value) -> Assessment {
    let file = read(json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [NM], "diameter_mm": 3.0, "traced_to": 1.5 },
        "glasses": { "medium": { "index": 1.5, "density_g_cm3": 2.5 } },
        "groups": [
            { "name": "entry", "elements": [ { "radii_mm": [-40.0, "flat"], "glasses": ["medium"],
              "thicknesses_mm": [2.0], "diameter_mm": 10.0 } ] },
            { "name": "exit", "elements": [ { "radii_mm": ["flat", -160.0], "glasses": ["medium"],
              "thicknesses_mm": [5.0], "diameter_mm": 30.0 } ] } ],
        "housing": { "track_mm": 260.0, "fixed": ["exit"] },
        "states": [ { "name": "only", "ratio": 4.0, "spacings_mm": [air_mm] } ],
        "goals": goals,
        "limits": { "spacing_mm": { "min": 1.0 }, "edge_thickness_mm": { "min": 1.0 } }
    }));
    assess(&file.design, &file.wishes)
}

fn near(got: f64, by_hand: f64, within: f64) {
    assert!((got - by_hand).abs() <= within, "{got}, by hand {by_hand}");
}

/// Focal lengths and principal planes of lenses with a flat side, and where the parts stand.
#[test]
fn groups_and_their_places() {
    let told = expander(AFOCAL_MM, &json!({}));
    let [entry, exit] = &told.groups[..] else { panic!("two groups") };
    near(entry.focal_length_mm.unwrap(), -80.0, 1e-9);
    near(entry.front_principal_mm.unwrap(), 0.0, 1e-9);
    near(entry.rear_principal_mm.unwrap(), -2.0 / 1.5, 1e-9);
    near(exit.focal_length_mm.unwrap(), 320.0, 1e-9);
    near(exit.front_principal_mm.unwrap(), 5.0 / 1.5, 1e-9);
    near(exit.rear_principal_mm.unwrap(), 0.0, 1e-9);
    near(told.elements[1].focal_length_mm.unwrap(), 320.0, 1e-9);
    near(exit.length_mm, 5.0, 0.0);
    let state = &told.states[0];
    near(state.track_mm, 7.0 + AFOCAL_MM, 1e-12);
    near(state.spacings_mm[0], AFOCAL_MM, 1e-12);
    // The fixed group ends with the housing.
    near(state.positions_mm["exit"].as_f64().unwrap(), 255.0, 1e-9);
    near(state.positions_mm["entry"].as_f64().unwrap(), 260.0 - state.track_mm, 1e-9);
    let spacing = told.limits.iter().find(|limit| limit.limit == LimitKind::SpacingMm).unwrap();
    near(spacing.value.unwrap(), AFOCAL_MM, 1e-12);
}

/// Two lenses d apart have the power φ₁ + φ₂ − dφ₁φ₂; a collimated ray is 1 − dφ₁ times as high at
/// the second (Hecht, §5.2 and §6.1). A Gaussian beam diverges by 4λ/(πd), full angle (ISO 11146-1
/// with M² = 1), and by a fourth of that behind a fourfold expander.
#[test]
fn ratio_slope_and_diameter() {
    for off_mm in [0.0, 0.3, -2.0] {
        let told = expander(AFOCAL_MM + off_mm, &json!({}));
        let state = &told.states[0];
        let d = 240.0 + off_mm;
        let ratio = 1.0 + d / 80.0;
        let power = -1.0 / 80.0 + 1.0 / 320.0 + d / (80.0 * 320.0);
        near(state.ratio.unwrap(), ratio, 1e-12);
        near(state.ratio_error_percent.unwrap(), 100.0 * (ratio - 4.0) / 4.0, 1e-10);
        near(state.exit_slope_urad.unwrap(), -1.5e6 * power, 1e-7);
        near(state.exit_diameter_mm.unwrap(), 3.0 * ratio, 1e-11);
    }
    let afocal = expander(AFOCAL_MM, &json!({}));
    let divergence_mrad = 1e3 * 4.0 * NM * 1e-6 / (PI * 3.0) / 4.0;
    near(afocal.states[0].divergence_mrad.unwrap(), divergence_mrad, 1e-9);
}

/// A focus Δ beyond the front focus of a lens is imaged f²/Δ behind its rear focus (Newton's
/// equation, Hecht, §5.2): the air longer by Δ focuses the expander there. Missed is what the
/// vergences differ by.
#[test]
fn a_longer_air_focuses() {
    let at_m = 1e-3 * (320.0 + 320.0 * 320.0 / 2.0);
    let goals = json!({ "exit_focus_m": { "wanted": 50.0, "within": 1.0 } });
    let told = expander(AFOCAL_MM + 2.0, &goals);
    let state = &told.states[0];
    near(state.exit_focus_m.unwrap(), at_m, 1e-8);
    let miss_m = 50.0 * 50.0 * (1.0 / at_m - 1.0 / 50.0).abs();
    near(state.exit_focus_error_m.unwrap().abs(), miss_m, 1e-7);
    near(told.merit.goals.unwrap(), miss_m * miss_m, 1e-6);
}

/// The marginal ray by Snell's law: 2.25 mm high it meets the concave sphere at
/// sin I = 2.25/40, leaves it I − I′ from the axis, and so meets the flat at that angle.
#[test]
fn the_marginal_ray_at_the_first_lens() {
    let told = expander(AFOCAL_MM, &json!({}));
    let incidence = (2.25_f64 / 40.0).asin();
    let turned = incidence - (incidence.sin() / 1.5).asin();
    let surfaces = &told.states[0].surfaces;
    near(surfaces[0].incidence_deg.unwrap(), incidence.to_degrees(), 1e-9);
    near(surfaces[1].incidence_deg.unwrap(), turned.to_degrees(), 1e-9);
    let sag = 40.0 - (40.0_f64.powi(2) - 2.25 * 2.25).sqrt();
    let height = 2.25 + (2.0 + sag) * turned.tan();
    near(told.elements[0].footprint_mm.unwrap(), 2.0 * height, 1e-9);
}

/// Edges by the sagitta R − √(R² − r²), volumes as cylinders less or plus the cap πH²(3R − H)/3
/// (any handbook of mathematics).
#[test]
fn edges_and_masses() {
    let told = expander(AFOCAL_MM, &json!({}));
    let lens = |radius: f64, clear: f64| {
        let h = radius - (radius * radius - clear * clear).sqrt();
        (h, PI * h * h * (3.0 * radius - h) / 3.0)
    };
    let [entry, exit] = &told.elements[..] else { panic!("two elements") };
    let (h, cap) = lens(40.0, 5.0);
    near(entry.edge_thicknesses_mm[0].unwrap(), 2.0 + h, 1e-12);
    near(entry.centre_thicknesses_mm[0], 2.0, 0.0);
    near(entry.mass_g.unwrap(), 2.5e-3 * (PI * 25.0 * (2.0 + h) - cap), 1e-9);
    let (h, cap) = lens(160.0, 15.0);
    near(exit.edge_thicknesses_mm[0].unwrap(), 5.0 - h, 1e-12);
    near(exit.mass_g.unwrap(), 2.5e-3 * (PI * 225.0 * (5.0 - h) + cap), 1e-9);
    let edge = told.limits.iter().filter(|limit| limit.limit == LimitKind::EdgeThicknessMm);
    let least = edge.filter_map(|limit| limit.value).fold(f64::INFINITY, f64::min);
    near(least, 2.0 + lens(40.0, 5.0).0, 1e-12);
}

/// The merit is the sum of the squares of (miss/within), and every goal is met exactly when no
/// miss is above its `within`.
#[test]
fn the_merit_of_the_numbers_told() {
    let goals = json!({ "wavefront_rms_waves": { "within": 0.5 }, "ratio_percent": { "within": 0.2 },
                        "exit_slope_urad": { "within": 50.0 } });
    let told = expander(AFOCAL_MM + 0.3, &goals);
    let state = &told.states[0];
    let misses = [
        state.wavefront[0].rms_waves.unwrap() / 0.5,
        state.ratio_error_percent.unwrap() / 0.2,
        state.exit_slope_urad.unwrap() / 50.0,
    ];
    near(told.merit.total.unwrap(), misses.iter().map(|miss| miss * miss).sum(), 1e-9);
    near(state.merit.unwrap(), told.merit.goals.unwrap(), 1e-12);
    assert_eq!(told.meets, misses.iter().all(|miss| miss.abs() <= 1.0));
}

/// A lens of focal length f that takes a beam of radius h to collimation, moved by δ, leaves it
/// hδ/f² from it (both principal planes move along, and the cone before the lens has the slope
/// h/f). The beam is narrow, so that no aberration takes part.
#[test]
fn what_an_exit_lens_out_of_place_does() {
    let path = format!("{}/../configs/river-as-designed.json", env!("CARGO_MANIFEST_DIR"));
    let mut value: Value = serde_json::from_str(&std::fs::read_to_string(path).unwrap()).unwrap();
    value["beam"]["diameter_mm"] = json!(0.24);
    let file = read(value);
    let focal_mm = assess(&file.design, &file.wishes).groups[2].focal_length_mm.unwrap();
    let curve = movement_curve(&file.design, &file.wishes, &CamSettings::default()).unwrap();
    for point in &curve.points {
        let by_hand = 1e3 * 0.12 * point.ratio / (focal_mm * focal_mm);
        let told = point.groups[2].collimation_urad_per_um.abs();
        assert!((told / by_hand - 1.0).abs() < 1e-3, "{}x: {told}, {by_hand}", point.ratio);
    }
}
