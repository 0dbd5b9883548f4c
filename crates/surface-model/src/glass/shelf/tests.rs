use super::*;
use proptest::prelude::*;

fn resolve(json: &str) -> (GlassShelf, Vec<GlassFault>) {
    let documents: BTreeMap<String, GlassDocument> = serde_json::from_str(json).unwrap();
    GlassShelf::resolve(documents.iter().map(|(name, document)| (name.as_str(), document)))
}

/// The faults of a section as lines of place, message and advice.
fn faults(json: &str) -> String {
    let lines = resolve(json).1.into_iter().map(|fault| {
        format!("{}: {}; {}", fault.at, fault.error, fault.error.advice().unwrap_or_default())
    });
    lines.collect::<Vec<_>>().join("\n")
}

#[test]
fn every_way_of_definition_holds() {
    let (shelf, faults) = resolve(
        r#"{ "melt-4471": { "from": "N-BK7", "index_shift": 0.00021, "note": "spring delivery" },
             "second": { "from": "melt-4471", "index_shift": -0.0001, "density_g_cm3": 2.6 },
             "bench-medium": { "index": 1.62 },
             "measured": { "points": [[532.0, 1.52], [633.0, 1.515]] },
             "own-law": { "sellmeier": [[1.1, 0.01]], "offset": 0.1, "range_nm": [400, 1100] } }"#,
    );
    assert_eq!(faults, []);
    assert_eq!(shelf.own.values().flatten().count(), 5);
    let at = |name: &str, nm: f64| shelf.find(name).unwrap().index(nm).unwrap();
    assert_eq!(at("melt-4471", 532.0), at("N-BK7", 532.0) + 0.00021);
    assert!((at("second", 532.0) - at("N-BK7", 532.0) - 0.00011).abs() < 1e-15);
    assert_eq!((at("bench-medium", 150.0), at("bench-medium", 20_000.0)), (1.62, 1.62));
    assert!((at("measured", 532.0) - 1.52).abs() < 1e-15);
    // At L = 1: 1 + 0.1 + 1.1/(1 − 0.01).
    assert!((at("own-law", 1000.0) - (1.1f64 + 1.1 / 0.99).sqrt()).abs() < 1e-15);

    let melt = shelf.find("melt-4471").unwrap();
    let base = find("N-BK7").unwrap();
    assert_eq!(
        (melt.range(), melt.density_g_cm3(), melt.thermal()),
        (base.range(), base.density_g_cm3(), base.thermal())
    );
    assert_eq!(
        (melt.status(), melt.maker(), melt.full_name().as_str()),
        (GlassStatus::Own, Some("Schott"), "melt-4471")
    );
    assert_eq!(shelf.find("second").unwrap().density_g_cm3(), Some(2.6));
    assert_eq!(shelf.find("bench-medium").unwrap().vd(), None);
}

#[test]
fn outside_its_points_a_glass_is_an_error() {
    let (shelf, _) = resolve(r#"{ "m": { "points": [[532, 1.52], [633, 1.515]] } }"#);
    let error = shelf.find("m").unwrap().index(531.9).unwrap_err();
    insta::assert_snapshot!(error, @"m is known from 532 nm to 633 nm; 531.9 nm is outside");
}

#[test]
fn all_faults_are_told_at_once() {
    insta::assert_snapshot!(faults(
        r#"{ "": { "index": 1.5 },
             "N-BK7": { "index": 1.5 },
             "a/b": { "index": 15.2 },
             "both": { "index": 1.5, "points": [[500, 1.5], [600, 1.49]], "index_shift": 0.1 },
             "coarse": { "from": "N-BK7", "index_shift": 1.5168 },
             "empty": {},
             "far": { "from": "NBK7", "index_shift": 0.0 },
             "half": { "from": "N-BK7" },
             "micrometres": { "points": [[0.532, 1.52], [0.633, 1.515]] },
             "pole": { "sellmeier": [[1.0, 0.25]], "range_nm": [400, 700] },
             "shift-only": { "index_shift": 0.001 },
             "thin": { "index": 1.02, "density_g_cm3": 0 },
             "thinner": { "from": "thin", "index_shift": 0.01 },
             "unsorted": { "points": [[600, 1.5], [500, 1.5]] } }"#
    ), @r##"
    /: a glass needs a name; this one is empty; give it a name such as "melt-4471"
    /N-BK7: "N-BK7" is a glass of the catalogue and cannot be given another meaning; choose a name of your own, such as the melt number
    /a~1b/index: an index must lie between 1 and 5, not at 15.2; check the number: an index is relative to air, that of glass is 1.4 to 2.1, of germanium 4.0
    /both: the glass is defined in more than one way: index and points; keep one and take out the others
    /coarse/index_shift: an index shift of 1.5168 is too large for a melt; at most 0.05 either way is taken; give the difference from the catalogue index, such as 0.00021, not the index itself
    /empty: the glass is not defined: none of from, index, points or sellmeier is given; give "from" with "index_shift", "index", "points", or "sellmeier" with "range_nm"
    /half/from: "from" is given without "index_shift"; add "index_shift" or take out "from"
    /micrometres/points/0/0: a wavelength must be finite and 100 nm or longer, not 0.532 nm; wavelengths are in nanometres: 0.532 um is 532
    /micrometres/points/1/0: a wavelength must be finite and 100 nm or longer, not 0.633 nm; wavelengths are in nanometres: 0.532 um is 532
    /pole/sellmeier/0/1: C = 0.25 um^2 puts a resonance at 500 nm, inside the range from 400 nm to 700 nm; check that C is the squared wavelength in um^2, or end the range short of it
    /shift-only/index_shift: "index_shift" is given without "from"; add "from" or take out "index_shift"
    /thin/density_g_cm3: a density must be positive and finite, not 0 g/cm^3; give g/cm^3, such as 2.51, or leave it out
    /unsorted/points/1/0: the point at 500 nm comes after the one at 600 nm; points must ascend in wavelength, by 0.001 nm or more; sort the points by wavelength, each wavelength once
    /far/from: "NBK7" is not written as the catalogue writes it: N-BK7; write N-BK7
    "##);
}

#[test]
fn a_circle_is_named_once_and_its_hangers_on_are_not_blamed() {
    let json = r#"{ "a": { "from": "b", "index_shift": 0 }, "b": { "from": "c", "index_shift": 0 },
                    "c": { "from": "b", "index_shift": 0 }, "self": { "from": "self", "index_shift": 0 } }"#;
    insta::assert_snapshot!(faults(json), @r##"
    /b/from: these glasses are defined from each other in a circle: b -> c -> b; define one of them from a catalogue glass, points or an index
    /self/from: these glasses are defined from each other in a circle: self -> self; define one of them from a catalogue glass, points or an index
    "##);
    let (shelf, _) = resolve(json);
    assert!(matches!(shelf.find("a"), Err(LookupError::Faulty { .. })));
}

#[test]
fn a_law_that_leaves_the_bounds_is_told_where() {
    insta::assert_snapshot!(faults(
        r#"{ "low": { "index": 1.04 }, "lower": { "from": "low", "index_shift": -0.05 },
             "dip": { "sellmeier": [[1.0, 0.01], [0.9, 4.0]], "range_nm": [500, 1990] },
             "unreal": { "sellmeier": [[1.0, 0.01], [0.9, 4.0]], "range_nm": [1890, 1990] } }"#
    ), @r##"
    /dip/sellmeier: the definition gives an index of 0.99713 at 1454.5 nm; it must lie between 1 and 5; check the coefficients, the units and the range
    /unreal/sellmeier: the definition gives no real index at 1890.0 nm; check the coefficients, the units and the range
    /lower/index_shift: the definition gives an index of 0.99000 at 486.1 nm; it must lie between 1 and 5; check the coefficients, the units and the range
    "##);
}

#[test]
fn a_long_chain_of_melts_resolves() {
    let names: Vec<String> = (0..5000).map(|i| format!("melt {i}")).collect();
    let documents: Vec<GlassDocument> = (0..5000)
        .map(|i| GlassDocument {
            from: Some(names.get(i + 1).cloned().unwrap_or("N-BK7".to_owned())),
            index_shift: Some(1e-6),
            ..GlassDocument::default()
        })
        .collect();
    let (shelf, faults) =
        GlassShelf::resolve(std::iter::zip(names.iter().map(String::as_str), &documents));
    assert_eq!(faults, []);
    let added = shelf.find("melt 0").unwrap().nd().unwrap() - find("N-BK7").unwrap().nd().unwrap();
    assert!((added - 5e-3).abs() < 1e-12);
}

#[test]
fn a_name_given_twice_is_an_error() {
    let document = GlassDocument { index: Some(1.5), ..GlassDocument::default() };
    let (_, faults) = GlassShelf::resolve([("x", &document), ("x", &document)]);
    assert!(matches!(faults[0].error, GlassError::Definition(DefinitionError::Repeated { .. })));
}

#[test]
fn own_names_are_offered_too() {
    let (shelf, _) = resolve(r#"{ "melt-4471": { "index": 1.5 } }"#);
    let Err(error) = shelf.find("melt-4477") else { panic!("not defined") };
    insta::assert_snapshot!(error.advice().unwrap(), @"did you mean melt-4471?");
}

proptest! {
    #[test]
    fn a_melt_adds_exactly_its_shift(
        which in 0usize..1090,
        shift in -0.05f64..=0.05,
        t in 0.0f64..=1.0,
    ) {
        let base = super::super::catalogue::entries()[which].glass();
        let from = Some(base.full_name());
        let document = GlassDocument { from, index_shift: Some(shift), ..GlassDocument::default() };
        let (shelf, faults) = GlassShelf::resolve([("melt", &document)]);
        prop_assert_eq!(faults, []);
        let range = base.range().unwrap();
        let nm = range.low_nm() + t * (range.high_nm() - range.low_nm());
        prop_assume!(range.contains(nm));
        prop_assert_eq!(
            shelf.find("melt").unwrap().index(nm).unwrap(),
            base.index(nm).unwrap() + shift
        );
    }

    #[test]
    fn points_are_met_exactly_and_never_left(
        start in 200.0f64..2000.0,
        steps in prop::collection::vec((0.5f64..300.0, 1.3f64..2.0), 2..=8),
    ) {
        let mut nm = start;
        let points: Vec<[f64; 2]> =
            steps.iter().map(|(step, n)| { nm += step; [nm, *n] }).collect();
        let document =
            GlassDocument { points: Some(points.clone()), ..GlassDocument::default() };
        let (shelf, faults) = GlassShelf::resolve([("m", &document)]);
        // Wild points may swing out of bounds between them, which must be told.
        match shelf.find("m") {
            Ok(glass) => {
                for [nm, n] in &points {
                    prop_assert!((glass.index(*nm).unwrap() - n).abs() < 1e-12);
                }
                prop_assert!(glass.index(points[0][0] - 0.01).is_err());
                prop_assert!(glass.index(nm + 0.01).is_err());
            }
            Err(_) => prop_assert!(!faults.is_empty()),
        }
    }

    #[test]
    fn any_numbers_are_answered(
        terms in prop::collection::vec([any::<f64>(), any::<f64>()], 0..4),
        range in [any::<f64>(), any::<f64>()],
        pick in 0u8..4,
    ) {
        let document = match pick {
            0 => GlassDocument { points: Some(terms), ..GlassDocument::default() },
            1 => GlassDocument { index: Some(range[0]), ..GlassDocument::default() },
            2 => GlassDocument { sellmeier: Some(terms), range_nm: Some(range), ..GlassDocument::default() },
            _ => GlassDocument { from: Some("N-BK7".into()), index_shift: Some(range[0]), ..GlassDocument::default() },
        };
        let (shelf, faults) = GlassShelf::resolve([("m", &document)]);
        prop_assert_eq!(shelf.find("m").is_ok(), faults.is_empty());
    }
}
