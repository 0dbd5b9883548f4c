//! Errors of a workshop against closed forms, and systems built at random against first-order
//! statistics.

use driver::design_file::DesignFile;
use driver::tolerance::{Quantity, ToleranceSettings, Unwatched, tolerance};
use serde_json::json;
use surface_model::document::Document;
use surface_model::pose::Pose;
use surface_model::pupil::{Pupil, PupilWavefront};
use surface_model::spoilt::{SpoiltTrain, trace_spoilt};
use surface_model::surface::Surface;
use surface_model::train::Train;

fn plate(thickness: f64, index: f64) -> SpoiltTrain {
    let flats = vec![Surface::sphere(0.0, 20.0); 2];
    SpoiltTrain::of(&Train::new(flats, vec![thickness], vec![1.0, index, 1.0]).unwrap())
}

fn boresight(spoilt: &SpoiltTrain, radius_mm: f64) -> [f64; 2] {
    let pupil = Pupil::new(radius_mm, 1.5, 8, 12);
    let mut wavefront = PupilWavefront::new();
    pupil.trace(spoilt, &mut wavefront).unwrap();
    wavefront.boresight_rad()
}

/// A thin prism of angle α deviates by (n − 1)α; at normal incidence on its first face exactly by
/// arcsin(n sin α) − α (E. Hecht, *Optics*, §5.5.1).
#[test]
fn a_wedge_turns_the_beam() {
    for (index, angle) in [(1.5, 1e-4), (1.5168, 3e-3), (1.8, 0.02)] {
        let mut wedge = plate(4.0, index);
        let rear = &mut wedge.surfaces_mut()[1];
        rear.pose = rear.pose.turned_at_vertex([angle, 0.0]);
        let [x, y] = boresight(&wedge, 1.2);
        let exact = (index * f64::sin(angle)).asin() - angle;
        // Turned about x the normal leans to −y, and so does the thicker side's opposite: the beam
        // goes to the base, at +y.
        assert!((y.abs().asin() / exact - 1.0).abs() < 1e-9, "{y} {exact}");
        assert!(x.abs() < 1e-12);
        let thin = (index - 1.0) * angle;
        assert!((y.abs() / thin - 1.0).abs() < 2.0 * angle * angle + 1e-9, "{y} {thin}");
    }
}

/// A plane-parallel plate turned by θ shifts the beam by t sin θ (1 − cos θ/√(n² − sin²θ)) and
/// does not turn it (M. Born and E. Wolf, *Principles of Optics*; F. A. Jenkins and H. E. White,
/// *Fundamentals of Optics*, §2.2).
#[test]
fn a_turned_plate_shifts_the_beam_and_does_not_turn_it() {
    let (thickness, index, angle) = (6.0, 1.52, 0.1_f64);
    let mut turned = plate(thickness, index);
    for surface in turned.surfaces_mut() {
        surface.pose = surface.pose.turned([0.0, angle], 3.0);
    }
    let ray = trace_spoilt(&turned, [0.0, 0.0]).unwrap();
    let shift = thickness
        * angle.sin()
        * (1.0 - angle.cos() / (index * index - angle.sin().powi(2)).sqrt());
    assert!((ray.position_mm[0].abs() - shift).abs() < 1e-13, "{ray:?} {shift}");
    assert!(ray.direction.iter().all(|cosine| cosine.abs() < 1e-15));
    let [x, y] = boresight(&turned, 1.2);
    assert!(x.abs() < 1e-13 && y.abs() < 1e-13);
}

fn thin_lens(focal: f64, index: f64) -> [Surface; 2] {
    let curvature = 0.5 / (focal * (index - 1.0));
    [Surface::sphere(curvature, 12.0), Surface::sphere(-curvature, 12.0)]
}

/// A thin lens shifted by δ turns a parallel beam by δ/f, and turned it does nothing to first
/// order (any textbook: the ray through the centre of a thin lens goes straight on).
#[test]
fn a_shifted_lens_turns_the_beam_by_shift_over_focal_length() {
    let focal = 200.0;
    let surfaces = thin_lens(focal, 1.5).to_vec();
    let lens = Train::new(surfaces, vec![1e-6], vec![1.0, 1.5, 1.0]).unwrap();
    for shift in [0.01, -0.05, 0.2] {
        let mut shifted = SpoiltTrain::of(&lens);
        for surface in shifted.surfaces_mut() {
            surface.pose = surface.pose.decentred([0.0, shift]);
        }
        let [x, y] = boresight(&shifted, 0.5);
        assert!((y / (shift / focal) - 1.0).abs() < 1e-4, "{y}");
        assert!(x.abs() < 1e-12);
    }
    let mut turned = SpoiltTrain::of(&lens);
    for surface in turned.surfaces_mut() {
        surface.pose = Pose::on_axis(0.0).turned([1e-3, 0.0], 0.0);
    }
    assert!(boresight(&turned, 0.5)[1].abs() < 1e-8);
}

/// In a telescope of two thin lenses, ratio −f₂/f₁, a shift δ of either lens turns the beam behind
/// by δ/f₂: the first lens turns it by δ/f₁, which the telescope makes smaller by its ratio.
#[test]
fn either_lens_of_a_telescope_turns_the_beam_alike() {
    let (entry, exit) = (-40.0, 120.0);
    let [a, b] = thin_lens(entry, 1.5);
    let [c, d] = thin_lens(exit, 1.5);
    let media = vec![1.0, 1.5, 1.0, 1.5, 1.0];
    let telescope = Train::new(vec![a, b, c, d], vec![1e-6, 80.0, 1e-6], media).unwrap();
    for moved in [0..2, 2..4] {
        let mut shifted = SpoiltTrain::of(&telescope);
        for surface in &mut shifted.surfaces_mut()[moved] {
            surface.pose = surface.pose.decentred([0.02, 0.0]);
        }
        let [x, _] = boresight(&shifted, 0.3);
        assert!((x.abs() / (0.02 / exit) - 1.0).abs() < 1e-3, "{x}");
    }
}

/// The river-survey lidar after its optimisation (README), held at small errors.
fn river(tolerances: serde_json::Value) -> DesignFile {
    let singlet = |radii: [f64; 2], thickness: f64, diameter: f64| {
        json!([{ "radii_mm": radii, "glasses": ["fused-silica"], "thicknesses_mm": [thickness],
                 "diameter_mm": diameter }])
    };
    let state = |name: &str, ratio: f64, spacings: [f64; 2]| json!({ "name": name, "ratio": ratio, "spacings_mm": spacings });
    let document = json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [532.0], "diameter_mm": 2.4, "traced_to": 1.5 },
        "groups": [
            { "name": "entry", "elements": singlet([-91.575, -22.114], 3.0, 8.0) },
            { "name": "runner", "elements": singlet([-70.696, 9.363], 2.0, 8.0) },
            { "name": "exit", "elements": singlet([419.612, -84.462], 5.0, 26.0) }
        ],
        "housing": { "track_mm": 180.0, "fixed": ["exit"] },
        "states": [
            state("2x", 2.0, [29.545, 110.424]),
            state("4x", 4.0, [15.026, 121.362]),
            state("6x", 6.0, [0.5, 124.985])
        ],
        "goals": { "wavefront_rms_waves": { "within": 0.05 }, "ratio_percent": { "within": 0.2 },
                   "exit_slope_urad": { "within": 20.0 } },
        "tolerances": tolerances
    });
    DesignFile::read(Document::from_value("river", document)).unwrap()
}

fn settings(systems: u64) -> ToleranceSettings {
    ToleranceSettings { systems, seed: 3, grade: None, readjusted: None, balance_percent: None }
}

/// Where errors act linearly, the mean squares of independent ones add up (propagation of
/// uncertainty: JCGM 100:2008, §5.1.2). Nothing is re-adjusted, so that every error shows.
#[test]
fn built_systems_are_spread_as_their_sensitivities_say() {
    for spread in ["normal", "uniform"] {
        let file = river(json!({
            "grade": "finest", "spread": spread, "readjusted": [],
            "own": [ { "at": "/groups", "radius_percent": 0.002, "thickness_mm": 0.0005,
                       "index": 0.000005, "element_tilt_mrad": 0.05, "group_tilt_mrad": 0.05,
                       "element_decentre_mm": 0.002, "group_decentre_mm": 0.002 },
                     { "at": "/states", "spacing_mm": 0.0005 } ]
        }));
        let report = tolerance(&file, &settings(1500), &mut Unwatched).unwrap();
        for state in &report.monte_carlo.states {
            for quantity in &state.quantities {
                let ratio = quantity.sizes.rms / quantity.predicted_rms;
                // A root mean square of n normal numbers is off by 1/√(2n), here 1.8 %: three of
                // these, and what is not linear.
                assert!((ratio - 1.0).abs() < 0.06, "{spread} {} {quantity:?}", state.state);
            }
        }
    }
}

/// Re-adjustment takes out what two spacings can: ratio and collimation, in every system.
#[test]
fn two_spacings_bring_ratio_and_collimation_back() {
    let file = river(json!({ "own": [ { "at": "/states", "spacing_mm": 0.0 } ] }));
    let report = tolerance(&file, &settings(60), &mut Unwatched).unwrap();
    let held =
        river(json!({ "own": [ { "at": "/states", "spacing_mm": 0.0 } ], "readjusted": [] }));
    let as_built = tolerance(&held, &settings(60), &mut Unwatched).unwrap();
    let worst = |report: &driver::tolerance::ToleranceReport, quantity| {
        let all = report.monte_carlo.states.iter().take(2).flat_map(|state| &state.quantities);
        let mine = all.filter(|q| q.quantity == quantity);
        mine.filter_map(|q| q.sizes.largest).fold(0.0, f64::max)
    };
    assert!(worst(&as_built, Quantity::RatioPercent) > 0.2);
    assert!(worst(&as_built, Quantity::ExitSlopeUrad) > 20.0);
    // What is left is weighed against a wavefront that no spacing mends.
    assert!(worst(&report, Quantity::RatioPercent) < 0.02, "{report:#?}");
    assert!(worst(&report, Quantity::ExitSlopeUrad) < 10.0);
}

/// A mount that turns carries its decentre round: with all error in one group's decentre and a
/// half turn between two states, the beam ends on the other side of the axis; a sliding mount
/// leaves it where it was but for the ratio.
#[test]
fn a_rotating_mount_carries_its_decentre_round() {
    let rotating = |lead_mm: f64| {
        let file = river(json!({
            "grade": "finest", "readjusted": [],
            "own": [ { "at": "/groups", "radius_percent": 0.0, "irregularity_fringes": 0.0,
                       "thickness_mm": 0.0, "index": 0.0, "abbe_percent": 0.0, "wedge_mrad": 0.0,
                       "element_decentre_mm": 0.0, "element_tilt_mrad": 0.0,
                       "group_decentre_mm": 0.0, "group_tilt_mrad": 0.0 },
                     { "at": "/states", "spacing_mm": 0.0 },
                     { "at": "/groups/runner", "group_decentre_mm": 0.01 } ],
            "rotating": [ { "group": "runner", "lead_mm": lead_mm } ]
        }));
        tolerance(&file, &settings(40), &mut Unwatched).unwrap()
    };
    // The runner travels 14.561 mm from 2x to 6x: half a turn at twice that lead, none at a lead
    // far longer than the tube.
    let half = rotating(2.0 * 14.561);
    let still = rotating(1e6);
    let rms = |report: &driver::tolerance::ToleranceReport, state: usize| {
        report.monte_carlo.states[state].quantities[3].sizes.rms
    };
    let wander = half.monte_carlo.boresight_wander_urad.rms;
    let across = rms(&half, 0) + rms(&half, 2);
    assert!((wander / across - 1.0).abs() < 1e-3, "{wander} {across}");
    let sliding = still.monte_carlo.boresight_wander_urad.rms;
    let along = (rms(&still, 0) - rms(&still, 2)).abs();
    assert!((sliding / along - 1.0).abs() < 1e-3, "{sliding} {along}");
    let same = half.monte_carlo.boresight_wander_sliding_urad.unwrap().rms;
    assert!((same / sliding - 1.0).abs() < 1e-3, "{same} {sliding}");
}

/// The same sum of squares for the change of direction between two states: no larger one than
/// these tolerances foretell for the two furthest apart, and hardly a smaller one.
#[test]
fn the_beam_wanders_as_the_sensitivities_say() {
    let file = river(json!({
        "grade": "finest", "spread": "uniform", "readjusted": [],
        "own": [ { "at": "/groups", "radius_percent": 0.002, "thickness_mm": 0.0005,
                   "index": 0.000005, "irregularity_fringes": 0.0, "wedge_mrad": 0.02,
                   "element_tilt_mrad": 0.05, "group_tilt_mrad": 0.05,
                   "element_decentre_mm": 0.002, "group_decentre_mm": 0.002 },
                 { "at": "/states", "spacing_mm": 0.0005 } ]
    }));
    let report = tolerance(&file, &settings(1500), &mut Unwatched).unwrap();
    let squares = report.sensitivities.iter().map(|sensitivity| sensitivity.wander_urad.powi(2));
    let foretold = (0.5 * squares.sum::<f64>()).sqrt();
    let built = report.monte_carlo.boresight_wander_urad.rms;
    // The widest of three changes is that between the outer states but for a few systems.
    assert!((built / foretold - 1.0).abs() < 0.06, "{built} {foretold}");
}

/// Balanced tolerances never cost more than those given and yield less, and what is told of the
/// yield is what the same systems do with them.
#[test]
fn balancing_never_costs_more_for_less() {
    for (grade, wanted) in [("finest", 50.0), ("fine", 90.0), ("ordinary", 90.0)] {
        let file = river(json!({ "grade": grade }));
        let asked = ToleranceSettings { balance_percent: Some(wanted), ..settings(40) };
        let report = tolerance(&file, &asked, &mut Unwatched).unwrap();
        let balance = report.balance.unwrap();
        assert_eq!(balance.given_percent, report.monte_carlo.yield_percent);
        if balance.given_percent >= wanted {
            assert!(balance.reached && balance.relative_cost <= 1.0, "{grade}: {balance:?}");
        } else {
            assert!(balance.yield_percent > balance.given_percent, "{grade}: {balance:?}");
        }
        assert_eq!(balance.reached, balance.yield_percent >= wanted);
        let costs = balance.tolerances.iter().map(|each| each.from / each.to);
        let cost = costs.sum::<f64>() / balance.tolerances.len() as f64;
        assert!((balance.relative_cost - cost).abs() < 1e-12);
    }
}

/// The bits do not depend on the number of threads.
#[test]
fn any_number_of_threads_builds_the_same_systems() {
    let file = river(json!({ "grade": "ordinary" }));
    let asked = ToleranceSettings { balance_percent: Some(80.0), ..settings(40) };
    let on = |threads| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        let report = pool.install(|| tolerance(&file, &asked, &mut Unwatched).unwrap());
        serde_json::to_string(&report).unwrap()
    };
    let one = on(1);
    assert_eq!(one, on(3));
    let other = ToleranceSettings { seed: 4, ..asked.clone() };
    let report = tolerance(&file, &other, &mut Unwatched).unwrap();
    assert_ne!(one, serde_json::to_string(&report).unwrap());
}
