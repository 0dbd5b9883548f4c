//! What a change of glass does, against first-order theory worked out another way.

use driver::change::{Change, apply};
use driver::design_file::DesignFile;
use driver::optimise::merit_of;
use driver::retune::{Moving, retune};
use driver::solve::{Settings, Unwatched};
use merit_function::block::BlockProblem;
use serde_json::{Value, json};
use surface_model::document::Document;
use surface_model::glass::find;

fn read(value: Value) -> DesignFile {
    DesignFile::read(Document::from_value("design.json", value)).unwrap()
}

fn changed(file: &DesignFile, text: &str) -> DesignFile {
    apply(file, &[Change::read("--change", text, file.document().value()).unwrap()]).unwrap().file
}

/// One lens in collimated light.
fn singlet(glass: &str, radii_mm: [f64; 2], thickness_mm: f64) -> Value {
    json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [587.5618], "diameter_mm": 2.0 },
        "groups": [{ "name": "lens", "elements": [{ "radii_mm": radii_mm, "glasses": [glass],
            "thicknesses_mm": [thickness_mm], "diameter_mm": 6.0 }] }],
        "housing": { "track_mm": 50.0 },
        "states": [{ "name": "only", "ratio": 1.0, "spacings_mm": [] }],
        "goals": { "exit_slope_urad": { "within": 1000.0 } },
        "free": []
    })
}

/// The lensmaker's equation of a thick lens, 1/f = (n − 1)[1/R₁ − 1/R₂ + (n − 1)d/(n R₁R₂)]
/// (E. Hecht, *Optics*, 4th ed., Addison-Wesley 2002, eq. 6.2; formula from memory), and its
/// derivative by n, 1/R₁ − 1/R₂ + d (n² − 1)/(n² R₁R₂).
fn power_and_derivative(n: f64, [r1, r2]: [f64; 2], d: f64) -> (f64, f64) {
    let bending = 1.0 / r1 - 1.0 / r2;
    let power = (n - 1.0) * (bending + (n - 1.0) * d / (n * r1 * r2));
    (power, bending + d * (n * n - 1.0) / (n * n * r1 * r2))
}

#[test]
fn a_melt_shifts_collimation_as_the_lensmakers_equation_says() {
    for (radii, thickness) in [([50.0, -80.0], 4.0), ([-30.0, 45.0], 2.0), ([25.0, 60.0], 6.0)] {
        let file = read(singlet("N-BK7", radii, thickness));
        let n = find("N-BK7").unwrap().index(587.5618).unwrap();
        let shift = 2e-4;
        let change = format!("/groups/lens/elements/0/glasses/0={}@587.5618", n + shift);
        let changes = [Change::read("--change", &change, file.document().value()).unwrap()];
        let told = retune(&file, &changes, &[], &Settings::default(), &mut Unwatched).unwrap();
        let slope_urad =
            |moving| told.stage(moving).unwrap().assessment.states[0].exit_slope_urad.unwrap();
        let (power, derivative) = power_and_derivative(n, radii, thickness);
        // A ray at the height of 1 mm leaves with the slope −1 mm/f.
        assert!((slope_urad(Moving::AsDesigned) + power * 1e6).abs() < 1e-6 * (power * 1e6).abs());
        let moved = slope_urad(Moving::Nothing) - slope_urad(Moving::AsDesigned);
        let predicted = -derivative * shift * 1e6;
        // The second order: half the second derivative, d/(n³R₁R₂), times the shift squared.
        let second = thickness / (n.powi(3) * radii[0] * radii[1]) * shift * shift * 1e6;
        let off = (moved - predicted).abs();
        assert!(off <= 1.1 * second.abs() + 1e-7, "{moved} µrad, {predicted} predicted");
        assert!(off < 1e-3 * moved.abs());
    }
}

/// Two makers print the same code, 517642, for N-BK7 and H-K9L. The merit after the swap is what
/// the index difference predicts to first order in the residuals, |r + δn ∂r/∂n|², with ∂r/∂n by
/// central differences of a melt.
#[test]
fn a_glass_of_the_same_code_costs_what_its_index_difference_says() {
    let value: Value =
        serde_json::from_slice(include_bytes!("../../configs/moving-collimator.json")).unwrap();
    let replaced = |value: &Value| {
        let mut value = value.clone();
        for group in value["groups"].as_array_mut().unwrap() {
            for element in group["elements"].as_array_mut().unwrap() {
                for glass in element["glasses"].as_array_mut().unwrap() {
                    *glass = json!("N-BK7");
                }
            }
        }
        value
    };
    let start = read(replaced(&value));
    let settings = Settings::default();
    let file = driver::optimise::optimise(&start, &settings, &mut Unwatched).unwrap().file;
    let residuals = |file: &DesignFile| {
        let mut merit = merit_of(file).unwrap();
        let start = merit.variables().start().to_vec();
        let mut residuals = vec![0.0; merit.shape().residuals()];
        merit.residuals(&start, &mut residuals).unwrap();
        residuals
    };
    let all = "/groups/*/elements/*/glasses/*";
    let melt = |shift: f64| {
        residuals(&changed(&file, &format!("{all}={{\"from\":\"N-BK7\",\"index_shift\":{shift}}}")))
    };
    let nm = file.design.states[0].wavelengths_nm[0];
    assert!(file.design.states.iter().all(|state| state.wavelengths_nm == [nm]));
    let index = |name: &str| find(name).unwrap().index(nm).unwrap();
    assert_eq!(find("H-K9L").unwrap().code(), find("N-BK7").unwrap().code());
    let difference = index("H-K9L") - index("N-BK7");
    let h = 1e-6;
    let (before, above, below) = (residuals(&file), melt(h), melt(-h));
    let sum = |list: &[f64]| list.iter().map(|r| r * r).sum::<f64>();
    let predicted: f64 = (0..before.len())
        .map(|i| before[i] + difference * (above[i] - below[i]) / (2.0 * h))
        .map(|r| r * r)
        .sum();
    let swapped = sum(&residuals(&changed(&file, &format!("{all}=H-K9L"))));
    let (cost, expected) = (swapped - sum(&before), predicted - sum(&before));
    assert!(difference.abs() > 1e-7, "the swap is one");
    assert!((cost - expected).abs() < 1e-2 * expected.abs(), "{cost:e}, {expected:e} predicted");

    // The program's own account of it, from the reverse sweep.
    let changes =
        [Change::read("--change", &format!("{all}=H-K9L"), file.document().value()).unwrap()];
    let told = retune(&file, &changes, &[], &settings, &mut Unwatched).unwrap();
    let by_derivatives = told.blame[0].by_derivatives.unwrap();
    assert!((by_derivatives / expected - 1.0).abs() < 1e-4, "{by_derivatives:e}, {expected:e}");
}
