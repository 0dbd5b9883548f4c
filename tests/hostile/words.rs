//! What may change: every word and form of address, ranges, housings, states with wishes of their
//! own.

use driver::optimise::{Optimisation, OptimiseError, optimise};
use driver::solve::{Settings, Unwatched};
use merit_function::assessment::assess;
use serde_json::{Value, json};
use surface_model::place::Place;

use checks::judges::shipped::{changed, read, told, value};

fn optimised(value: Value, iterations: u64) -> Result<Optimisation, OptimiseError> {
    let settings = Settings::default().with_max_iterations(iterations).unwrap();
    optimise(&read(value).unwrap(), &settings, &mut Unwatched)
}

/// Addresses of what a file frees.
fn freed(name: &str, free: Value, held: Value) -> Vec<String> {
    let file = read(changed(name, &[("/free", free), ("/held", held)])).unwrap();
    file.free.iter().map(|free| free.place.address().to_string()).collect()
}

#[test]
fn every_word_frees_its_kind_and_holds_it() {
    for (word, count) in [
        ("radii", 8),
        ("spacings", 9),
        ("thicknesses", 4),
        ("conics", 1),
        ("aspheres", 2),
        ("airs", 0),
    ] {
        assert_eq!(freed("asphere", json!([word]), json!([])).len(), count, "{word}");
        assert_eq!(freed("asphere", json!([word]), json!([word])), [""; 0], "{word}");
    }
    assert_eq!(freed("collimator", json!(["airs"]), json!([])), ["/groups/2/airs_mm/0"]);
}

#[test]
fn every_form_of_address_frees_what_lies_within() {
    let asphere = |at: &str| freed("asphere", json!([at]), json!([]));
    assert_eq!(asphere("/groups/exit").len(), 6);
    assert_eq!(asphere("/groups/3"), asphere("/groups/exit"));
    assert_eq!(asphere("/groups/*/elements/*/radii_mm/*").len(), 8);
    assert_eq!(asphere("/groups").len(), 15);
    assert_eq!(asphere("/states/4x"), [0, 1, 2].map(|i| format!("/states/1/spacings_mm/{i}")));
    assert_eq!(asphere("/states/*/spacings_mm/0").len(), 3);
    assert_eq!(asphere("/groups/exit/elements/0/shapes/1/conic").len(), 1);
    // An address given twice, or by two names, frees a number once.
    assert_eq!(
        freed("asphere", json!(["/states/4x", "/states/1", "/states/*"]), json!([])).len(),
        9
    );
}

#[test]
fn addresses_that_lead_to_nothing_changeable_are_told() {
    for at in
        ["/beam", "/title", "/groups/0/name", "/housing/track_mm", "/states/0/ratio", "/limits"]
    {
        let words = told(changed("river", &[("/free", json!(["radii", at]))]));
        assert!(words.contains(&format!("nothing at \"{at}\" can be changed")), "{words}");
        assert!(words.starts_with("changed.json:"), "{words}");
    }
    let words =
        told(changed("river", &[("/free", json!(["radi", "/groups/exot", "/a~2", "*", ""]))]));
    assert!(words.contains("did you mean \"radii\"?"), "{words}");
    assert!(words.contains("did you mean \"exit\"?"), "{words}");
    assert_eq!(words.matches("changed.json:").count(), 5, "{words}");
}

#[test]
fn ranges_of_every_kind_are_taken_or_told() {
    let at = "/groups/1/elements/0/radii_mm/1";
    let ranged = |min: Value, max: Value| {
        changed("river", &[("/free", json!(["spacings", { "at": at, "min": min, "max": max }]))])
    };
    for (min, max, words) in [
        (json!(5), json!(-5), "min 5 above max -5"),
        (json!(-5), json!(5), "passes through the radius zero"),
        (json!(0), json!(5), "passes through the radius zero"),
        (json!(1e10), json!(1e11), "an end of the range is"),
    ] {
        let told = told(ranged(min, max));
        assert!(told.contains(words), "{told}");
    }
    for (min, max) in [(9.0, 9.0), (8.5, 9.5), (20.0, 30.0), (-30.0, -20.0)] {
        let end = optimised(ranged(json!(min), json!(max)), 10).unwrap();
        let radius = end.file.document().value().pointer(at).unwrap().as_f64().unwrap();
        assert!((min - 1e-9..=max + 1e-9).contains(&radius), "{radius} of {min} to {max}");
    }
}

#[test]
fn a_freed_flat_bends_and_a_range_makes_it_bend_one_way() {
    let at = "/groups/2/elements/0/radii_mm/0";
    let with = |free: Value| {
        optimised(changed("collimator", &[("/free", json!(["spacings", free]))]), 20).unwrap()
    };
    let free = with(json!(at));
    assert!(free.file.document().value().pointer(at).unwrap().is_number());
    let bent = with(json!({ "at": at, "min": -900, "max": -200 }));
    let radius = bent.file.document().value().pointer(at).unwrap().as_f64().unwrap();
    assert!((-900.0 - 1e-9..=-200.0 + 1e-9).contains(&radius), "{radius}");
}

#[test]
fn every_housing_is_kept() {
    // The first state's distances repeated, so that any set of groups may be fixed.
    let mut root = value("asphere");
    for state in 0..3 {
        root["states"][state]["spacings_mm"] = json!([53.0, 11.0, 87.5]);
    }
    root["goals"] = json!({ "wavefront_rms_waves": { "within": 0.07 } });
    let names = ["entry", "front runner", "rear runner", "exit"];
    for set in 0..16_u32 {
        let fixed: Vec<&str> = (0..4).filter(|g| set & (1 << g) != 0).map(|g| names[g]).collect();
        root["housing"]["fixed"] = json!(fixed);
        let end = optimised(root.clone(), 12).unwrap();
        assert_eq!(end.file.design.housing_mismatch(), None, "{fixed:?}");
        let positions = end.file.design.all_positions_mm();
        for group in (0..4).filter(|g| set & (1 << g) != 0) {
            let still = positions.iter().all(|z| (z[group] - positions[0][group]).abs() < 2e-6);
            assert!(still, "{}: {positions:?}", names[group]);
        }
        for (state, z) in end.file.design.states.iter().zip(&positions) {
            let behind = end.file.design.housing.track_mm - z[0] - end.file.design.length_mm(state);
            assert!(z[0] > -1e-3 && behind > -1e-3, "{fixed:?}: {} and {behind}", z[0]);
        }
    }
}

#[test]
fn a_start_whose_outer_rays_fail_is_brought_in() {
    // An exit lens bent so hard that its rear surface reflects the outer rays of two states.
    let at = "/groups/2/elements/0/radii_mm";
    let root = changed("river", &[(at, json!([14.0, -14.0]))]);
    let file = read(root.clone()).unwrap();
    let start = assess(&file.design, &file.wishes);
    assert_eq!(start.states.iter().filter(|state| state.fault.is_some()).count(), 2);
    let end = optimised(root, 300).unwrap().report.end;
    assert!(end.states.iter().all(|state| state.fault.is_none()), "{end:?}");
    // The whole beam counts again: the end is the one that the shipped start leads to.
    let from_shipped = optimised(value("river"), 300).unwrap().report.end;
    let (one, other) = (end.merit.total.unwrap(), from_shipped.merit.total.unwrap());
    assert!((one / other - 1.0).abs() < 1e-4, "{one} and {other}");
}

#[test]
fn states_may_want_things_of_their_own() {
    let root = changed(
        "pairs",
        &[
            ("/states/0/wavelengths_nm", json!([532.0])),
            ("/states/1/goals", json!({ "wavefront_rms_waves": { "within": 0.5 } })),
            ("/states/2/weight", json!(0)),
            ("/states/3/weight", json!(1e6)),
        ],
    );
    let file = read(root.clone()).unwrap();
    let start = assess(&file.design, &file.wishes);
    assert_eq!(start.states[0].wavefront.len(), 1);
    assert_eq!(start.states[1].wavefront.len(), 2);
    assert_eq!(start.states[2].merit, Some(0.0));
    let end = optimised(root.clone(), 15).unwrap().report.end;
    assert!(end.merit.total.unwrap() < start.merit.total.unwrap());

    let mut weightless = root;
    for state in 0..4 {
        weightless["states"][state]["weight"] = json!(0);
    }
    assert!(matches!(optimised(weightless, 5), Err(OptimiseError::NoGoals)));
}

#[test]
fn an_inverted_beam_is_made_unless_it_is_forbidden() {
    // Two positive groups, 20 mm and 60 mm: a telescope of ratio −3.
    let design = |focus: &str| {
        let lens = |radius: f64| json!([{ "radii_mm": [radius, -radius], "glasses": ["N-BK7"], "thicknesses_mm": [3.0], "diameter_mm": 10.0 }]);
        json!({
            "format": "drawtube/1",
            "beam": { "wavelengths_nm": [633.0], "diameter_mm": 1.0 },
            "groups": [{ "name": "a", "elements": lens(20.0) }, { "name": "b", "elements": lens(60.0) }],
            "housing": { "track_mm": 120.0 },
            "states": [{ "name": "s", "ratio": -3.0, "spacings_mm": [77.0] }],
            "goals": { "ratio_percent": { "within": 0.1 }, "exit_slope_urad": { "within": 10.0 } },
            "limits": { "internal_focus": focus }
        })
    };
    let allowed = optimised(design("allow"), 100).unwrap().report.end;
    assert!(allowed.meets, "{allowed:?}");
    assert!(allowed.warnings.iter().any(|warning| warning.contains("laser safety officer")));
    let forbidden = optimised(design("forbid"), 100).unwrap();
    let end = &forbidden.report.end;
    assert!(!end.meets);
    let upright = end.states[0].ratio.unwrap() > 0.0;
    assert!(upright || end.limits.iter().any(|limit| !limit.met), "{end:?}");
    let upright = changed("river", &[("/states/0/ratio", json!(-2.0))]);
    let end = optimised(upright, 30).unwrap().report.end;
    assert!(!end.meets, "{end:?}");
}

#[test]
fn a_glass_out_of_its_range_is_told_where_it_is_used() {
    let words = told(changed("pairs", &[("/states/1/wavelengths_nm", json!([532.0, 3500.0]))]));
    assert!(words.contains("at /groups/entry/elements/pair/glasses/0"), "{words}");
    assert!(words.contains("3500"), "{words}");
    assert!(words.contains("at /groups/runner/elements/pair/glasses/1"), "the melt: {words}");
}

#[test]
fn nothing_free_and_nothing_wanted_are_told() {
    for (changes, words) in [
        (("/free", json!([])), "nothing in the file is free"),
        (("/held", json!(["radii", "spacings"])), "nothing in the file is free"),
        (("/goals", json!({})), "no goals"),
    ] {
        let error = optimised(changed("river", &[changes]), 5).unwrap_err();
        assert!(error.to_string().contains(words), "{error}");
    }
}

#[test]
fn numbers_that_are_held_do_not_move() {
    let held = json!(["/groups/entry", "/states/6x", "/groups/exit/elements/0/radii_mm/1"]);
    let end = optimised(changed("river", &[("/held", held)]), 20).unwrap();
    let before = read(value("river")).unwrap();
    let free: Vec<Place> = end.file.free.iter().map(|free| free.place).collect();
    for place in Place::all(&before.design) {
        let same = place.value(&before.design).to_bits() == place.value(&end.file.design).to_bits();
        assert!(same || free.contains(&place), "{} moved", place.address());
    }
}
