//! Temperature against a maker's tables and closed forms.

use surface_model::glass::find;
use surface_model::paraxial::ParaxialRay;
use surface_model::surface::Surface;
use surface_model::train::Train;

/// N-BK7, Δn_rel/ΔT in 1e-6/K at 1060.0, 546.1 and 435.8 nm, from 20 to 40 °C and from 60 to
/// 80 °C: Schott's data sheet of the glass; values from memory, printed to one decimal.
#[test]
fn the_makers_table_of_n_bk7() {
    let glass = find("N-BK7").unwrap();
    let table = [
        ((20.0, 40.0), [(1060.0, 2.4), (546.074, 3.0), (435.835, 3.5)]),
        ((60.0, 80.0), [(1060.0, 2.5), (546.074, 3.1), (435.835, 3.7)]),
        ((-40.0, -20.0), [(1060.0, 2.4), (546.074, 2.9), (435.835, 3.3)]),
    ];
    for ((from, to), row) in table {
        let (cold, warm) = (glass.at_temperature(from).unwrap(), glass.at_temperature(to).unwrap());
        for (nm, printed) in row {
            let change = warm.index(nm).unwrap() - cold.index(nm).unwrap();
            let per_k = change / (to - from) * 1e6;
            assert!(
                (per_k - printed).abs() < 0.06,
                "{from} to {to} °C, {nm} nm: {per_k} {printed}"
            );
        }
    }
}

/// A thin lens warms by dφ/dT = φ((dn/dT)/(n − 1) − α) (T. H. Jamieson, Opt. Eng. 20, 156 (1981)):
/// a whole design at two temperatures against it.
#[test]
fn the_power_of_a_thin_lens() {
    use driver::design_file::DesignFile;
    use surface_model::document::Document;
    for name in ["N-BK7", "N-SF6", "N-FK51A"] {
        let document = serde_json::json!({
            "format": "drawtube/1",
            "beam": { "wavelengths_nm": [587.56], "diameter_mm": 2.0 },
            "groups": [ { "name": "lens", "elements": [ { "radii_mm": [80.0, -120.0],
                "glasses": [name], "thicknesses_mm": [1e-4], "diameter_mm": 4.0 } ] } ],
            "housing": { "track_mm": 10.0, "expansion_per_k": 2.3e-5 },
            "states": [ { "name": "one", "ratio": 1.0, "spacings_mm": [] } ]
        });
        let design = DesignFile::read(Document::from_value("lens", document)).unwrap().design;
        let power = |at: f64| {
            let warm = design.at_temperature(at).unwrap();
            let train = warm.train(&warm.states[0], 587.56).unwrap();
            let mut ray = ParaxialRay::new();
            ray.trace(&train, 1.0, 0.0).unwrap();
            -ray.exit_slope().unwrap()
        };
        let glass = find(name).unwrap();
        let index = |at: f64| glass.at_temperature(at).unwrap().index(587.56).unwrap();
        let (alpha, n) = (glass.expansion_per_k().unwrap(), index(20.0));
        let by_index = (index(21.0) - index(19.0)) / 2.0;
        let expected = power(20.0) * (by_index / (n - 1.0) - alpha);
        let got = (power(21.0) - power(19.0)) / 2.0;
        assert!((got / expected - 1.0).abs() < 1e-3, "{name}: {got} {expected}");
    }
}

/// A lens that warms evenly, its index unchanged, is the same lens enlarged: focal length times
/// 1 + αΔT (any textbook).
#[test]
fn a_lens_of_constant_index_grows_as_a_whole() {
    let lens = |by: f64| {
        let surfaces = [50.0, -70.0].map(|r| Surface::sphere(1.0 / (r * by), 5.0)).to_vec();
        let train = Train::new(surfaces, vec![6.0 * by], vec![1.0, 1.6, 1.0]).unwrap();
        let mut ray = ParaxialRay::new();
        ray.trace(&train, 1.0, 0.0).unwrap();
        -1.0 / ray.exit_slope().unwrap()
    };
    let document = serde_json::json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [587.56], "diameter_mm": 2.0 },
        "glasses": { "still": { "index": 1.6, "index_per_k": 0.0, "expansion_per_k": 9e-6 } },
        "groups": [ { "name": "lens", "elements": [ { "radii_mm": [50.0, -70.0],
            "glasses": ["still"], "thicknesses_mm": [6.0], "diameter_mm": 10.0 } ] } ],
        "housing": { "track_mm": 10.0, "expansion_per_k": 0.0 },
        "states": [ { "name": "one", "ratio": 1.0, "spacings_mm": [] } ]
    });
    let document = surface_model::document::Document::from_value("lens", document);
    let design = driver::design_file::DesignFile::read(document).unwrap().design;
    let warm = design.at_temperature(70.0).unwrap();
    let mut ray = ParaxialRay::new();
    ray.trace(&warm.train(&warm.states[0], 587.56).unwrap(), 1.0, 0.0).unwrap();
    let (focal, expected) = (-1.0 / ray.exit_slope().unwrap(), lens(1.0 + 50.0 * 9e-6));
    assert!((focal / expected - 1.0).abs() < 1e-13);
}

/// Two groups with air inside, a cemented interface and an asphere, both ends of the tube fixed
/// but for a middle group, wanted at three temperatures.
fn wanted_warm_and_cold() -> driver::design_file::DesignFile {
    let document = serde_json::json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [532.0, 633.0], "diameter_mm": 2.0 },
        "groups": [
            { "name": "entry", "elements": [ { "radii_mm": [60.0, -30.0, -200.0],
                "glasses": ["N-BK7", "N-SF6"], "thicknesses_mm": [4.0, 2.0], "diameter_mm": 9.0 },
                { "radii_mm": ["flat", 300.0], "glasses": ["N-BK7"], "thicknesses_mm": [2.0],
                  "diameter_mm": 9.0, "shapes": [null, { "asphere": { "4": 1e-6 } }] } ],
              "airs_mm": [1.5], "mount_expansion_per_k": 1.2e-5 },
            { "name": "runner", "elements": [ { "radii_mm": [-40.0, 30.0], "glasses": ["N-SF6"],
                "thicknesses_mm": [2.0], "diameter_mm": 9.0 } ] },
            { "name": "exit", "elements": [ { "radii_mm": [300.0, -90.0], "glasses": ["N-BK7"],
                "thicknesses_mm": [5.0], "diameter_mm": 25.0 } ] }
        ],
        "housing": { "track_mm": 120.0, "fixed": ["entry", "exit"], "expansion_per_k": 2.3e-5 },
        "states": [
            { "name": "low", "ratio": 2.0, "spacings_mm": [20.0, 83.5] },
            { "name": "high", "ratio": 3.0, "spacings_mm": [10.0, 93.5] }
        ],
        "temperatures_c": [-20.0, 20.0, 60.0],
        "goals": { "wavefront_rms_waves": { "within": 0.05 }, "ratio_percent": { "within": 0.2 },
                   "exit_slope_urad": { "within": 20.0 } },
        "free": ["radii", "thicknesses", "airs", "spacings", "aspheres"]
    });
    let document = surface_model::document::Document::from_value("warm", document);
    driver::design_file::DesignFile::read(document).unwrap()
}

/// The merit over several temperatures is the sum of the merits of the design at each, and its
/// derivatives are those of central differences.
#[test]
fn goals_at_several_temperatures() {
    use driver::optimise::merit_of;
    use merit_function::assessment::assess;
    use merit_function::block::{BlockProblem, Linearisation};
    let file = wanted_warm_and_cold();
    let mut merit = merit_of(&file).unwrap();
    let at = merit.variables().start().to_vec();
    let mut residuals = vec![0.0; merit.shape().residuals()];
    merit.residuals(&at, &mut residuals).unwrap();
    let sum: f64 = residuals.iter().map(|r| r * r).sum();
    let whole = assess(&file.design, &file.wishes);
    assert_eq!(whole.at_temperatures.len(), 2);
    assert!((sum / whole.merit.goals.unwrap() - 1.0).abs() < 1e-4, "{sum} {:?}", whole.merit);
    let alone = |temperature_c: f64| {
        let mut wishes = file.wishes.clone();
        wishes.temperatures_c.clear();
        let design = file.design.at_temperature(temperature_c).unwrap();
        assess(&design, &wishes).merit.goals.unwrap()
    };
    let each: f64 = [-20.0, 20.0, 60.0].into_iter().map(alone).sum();
    assert!((each / whole.merit.goals.unwrap() - 1.0).abs() < 1e-12);

    let shape = merit.shape().clone();
    let mut linear = Linearisation::zeros(&shape);
    merit.linearise(&at, &mut linear).unwrap();
    for (j, &x) in at.iter().enumerate() {
        let step = 1e-5 * x.abs().max(1e-3);
        let mut moved = |to: f64| {
            let mut there = at.clone();
            there[j] = to;
            let mut out = vec![0.0; residuals.len()];
            merit.residuals(&there, &mut out).unwrap();
            out
        };
        let (above, below) = (moved(x + step), moved(x - step));
        let mut row = 0;
        for (k, block) in linear.states.iter().enumerate() {
            let own = shape.own_range(k);
            for i in 0..shape.rows[k] {
                let by = match (j < shape.shared, own.contains(&j)) {
                    (true, _) => block.by_shared[(i, j)],
                    (_, true) => block.by_own[(i, j - own.start)],
                    _ => 0.0,
                };
                assert!((block.residuals[i] - residuals[row]).abs() < 1e-9);
                let difference = (above[row] - below[row]) / (2.0 * step);
                let size = by.abs().max(1e-6 * residuals[row].abs() / step);
                assert!(
                    (difference - by).abs() < 5e-5 * size.max(1.0),
                    "variable {j}, state {k}, row {i}: {by} {difference}"
                );
                row += 1;
            }
        }
    }
}

/// What has not been told is not taken for nothing.
#[test]
fn goals_at_temperatures_need_to_know_how_everything_changes() {
    let file = wanted_warm_and_cold();
    let mut value = file.document().value().clone();
    value["groups"][1]["elements"][0]["glasses"][0] = "fused-silica".into();
    let document = surface_model::document::Document::from_value("warm", value);
    let told = driver::design_file::DesignFile::read(document).unwrap_err().to_string();
    assert!(told.contains("nothing is known of how fused-silica expands"), "{told}");
    assert!(told.contains("/temperatures_c/0"), "{told}");
}
