use serde_json::json;
use surface_model::document::Source;

use super::*;

fn design(fixed: &[&str]) -> DesignFile {
    let lens = |radii: [f64; 2], thickness: f64| {
        json!({ "radii_mm": radii, "glasses": ["fused-silica"], "thicknesses_mm": [thickness],
                "diameter_mm": 8.0 })
    };
    let value = json!({
        "format": "drawtube/1",
        "beam": { "wavelengths_nm": [532.0], "diameter_mm": 2.4 },
        "groups": [
            { "name": "entry", "elements": [lens([74.0, -20.0], 3.0)] },
            { "name": "runner", "elements": [lens([-24.0, 9.0], 2.0)] },
            { "name": "exit", "elements": [lens([400.0, -85.0], 5.0)] }
        ],
        "housing": { "track_mm": 130.0, "fixed": fixed },
        "states": [
            { "name": "2x", "ratio": 2.0, "spacings_mm": [13.0, 107.0] },
            { "name": "4x", "ratio": 4.0, "spacings_mm": [4.0, 116.0] },
            { "name": "6x", "ratio": 6.0, "spacings_mm": [1.0, 119.0] }
        ],
        "goals": { "exit_slope_urad": { "within": 20.0 } },
        "held": ["/groups/entry"]
    });
    DesignFile::read(Document::from_value("design.json", value)).unwrap()
}

fn changed(fixed: &[&str], changes: &[&str]) -> Result<Changed, Complaints> {
    let file = design(fixed);
    let changes = changes.iter();
    let changes = changes.map(|text| Change::read("--change", text, file.document().value()));
    apply(&file, &changes.collect::<Result<Vec<_>, _>>()?)
}

/// What differs, a line a difference.
fn told(fixed: &[&str], changes: &[&str]) -> String {
    let after = match changed(fixed, changes) {
        Ok(after) => after,
        Err(complaints) => return complaints.to_string(),
    };
    let found = differences(design(fixed).document().value(), after.file.document().value());
    let line = |d: &Difference| {
        let shown = |value: &Option<Value>| value.as_ref().map_or("-".into(), Value::to_string);
        let by =
            d.by.zip(d.by_percent)
                .map_or_else(String::new, |(by, percent)| format!(" by {by:.4}, {percent:.2} %"));
        format!("{} {} -> {}{by}", d.at, shown(&d.from), shown(&d.to))
    };
    found.iter().map(line).collect::<Vec<_>>().join("\n")
}

#[test]
fn numbers_words_keys_and_states_change() {
    insta::assert_snapshot!(told(&["exit"], &[
        "/groups/exit/elements/0/thicknesses_mm/0=5.12",
        "/groups/exit/elements/0/radii_mm/0=flat",
        "/groups/runner/elements/0/glasses/0=N-BK7",
        "/goals/ratio_percent={\"within\": 0.2}",
        "/states/*/ratio=3",
        "/beam/wavelengths_nm=[1064]",
    ]), @r#"
    /beam/wavelengths_nm/0 532.0 -> 1064 by 532.0000, 100.00 %
    /groups/runner/elements/0/glasses/0 "fused-silica" -> "N-BK7"
    /groups/exit/elements/0/radii_mm/0 400.0 -> "flat"
    /groups/exit/elements/0/thicknesses_mm/0 5.0 -> 5.12 by 0.1200, 2.40 %
    /states/2x/ratio 2.0 -> 3 by 1.0000, 50.00 %
    /states/4x/ratio 4.0 -> 3 by -1.0000, -25.00 %
    /states/6x/ratio 6.0 -> 3 by -3.0000, -50.00 %
    /goals/ratio_percent - -> {"within":0.2}
    /held/1 - -> "/groups/exit/elements/0/thicknesses_mm/0"
    /held/2 - -> "/groups/exit/elements/0/radii_mm/0"
    "#);
}

#[test]
fn addresses_are_those_of_the_design_as_it_was() {
    insta::assert_snapshot!(told(&["exit"], &[
        "/states/0=null",
        "/states/6x/spacings_mm/0=1.5",
        "/states/-={\"name\": \"5x\", \"ratio\": 5}",
        "/states/2x/ratio=2.5",
    ]), @r#"
    /states/2x {"name":"2x","ratio":2.0,"spacings_mm":[13.0,107.0]} -> -
    /states/6x/spacings_mm/0 1.0 -> 1.5 by 0.5000, 50.00 %
    /states/5x - -> {"name":"5x","ratio":5,"spacings_mm":[4.0,116.0]}
    /held/1 - -> "/states/6x/spacings_mm/0"
    "#);
}

#[test]
fn a_shift_has_the_digits_that_the_measured_index_needs() {
    // Digits given, and the most that a shift has for them.
    for (measured, most) in [
        ("1.46095", "-0.00012345".len()),
        ("1.46", "-0.00012345".len()),
        ("1.460951234", "-0.0001234567".len()),
        ("1.460951234567", "-0.0001234567890".len()),
    ] {
        let change = format!("/groups/exit/elements/0/glasses/0={measured}@532");
        let after = changed(&["exit"], &[&change]).unwrap().file;
        let index = after.design.groups[2].elements[0].glasses[0].index(532.0).unwrap();
        let decimals = measured.len() - "1.".len();
        assert_eq!(format!("{index:.decimals$}"), measured);
        let shift = &after.document().value()["glasses"]["fused-silica as measured"]["index_shift"];
        assert!(shift.as_f64().is_some_and(|shift| shift.abs() > 1e-5), "{shift}");
        assert!(format!("{}", shift.as_f64().unwrap()).len() <= most, "{measured}: {shift}");
    }
}

#[test]
fn a_glass_is_given_by_what_was_measured() {
    let after = changed(&["exit"], &["/groups/*/elements/0/glasses/0=1.461@532"]).unwrap().file;
    let value = after.document().value();
    assert_eq!(value["glasses"].as_object().unwrap().len(), 1, "one melt for all three");
    for group in &after.design.groups {
        let index = group.elements[0].glasses[0].index(532.0).unwrap();
        assert!((index - 1.461).abs() < 5e-9, "{index}");
    }
    let points = "/groups/exit/elements/0/glasses/0=1.4497@1064,1.461@532";
    let after = changed(&["exit"], &[points]).unwrap().file;
    assert_eq!(
        after.document().value()["glasses"]["fused-silica as measured"]["points"],
        json!([[532.0, 1.461], [1064.0, 1.4497]])
    );
    let shifted = "/groups/exit/elements/0/glasses/0={\"from\":\"N-BK7\",\"index_shift\":0.001}";
    let after = changed(&["exit"], &[shifted]).unwrap().file;
    let bk7 = surface_model::glass::find("N-BK7").unwrap().index(532.0).unwrap();
    assert_eq!(after.design.groups[2].elements[0].glasses[0].index(532.0).unwrap(), bk7 + 0.001);
}

#[test]
fn fixed_groups_leave_a_spacing_to_take_up_the_difference() {
    let fixed = ["entry", "exit"];
    let change = ["/groups/runner/elements/0/thicknesses_mm/0=2.25"];
    let after = changed(&fixed, &change).unwrap();
    let by: Vec<(usize, usize, f64)> =
        after.taken_up.iter().map(|t| (t.state, t.after, t.by_mm)).collect();
    assert_eq!(by, [(0, 1, -0.25), (1, 1, -0.25), (2, 1, -0.25)]);
    assert_eq!(after.file.design.states[1].spacings_mm, [4.0, 115.75]);
    let set = ["/states/*/spacings_mm/1=106", "/housing/track_mm=135"];
    let after = changed(&fixed, &set).unwrap();
    assert_eq!(after.file.design.states[2].spacings_mm, [19.0, 106.0], "what is set stays");
}

#[test]
fn complaints_name_the_change() {
    let told: Vec<String> = [
        &["/groups/exti/elements/0/thicknesses_mm/0=5", "/states/7x=null"][..],
        &["/housing/trak_mm=160"],
        &["/housing/track_mm=long", "/groups/exit/elements/0/radii_mm/0=0"],
        &["/groups/exit/elements/0/glasses/0=N-BK8"],
        &["/groups/exit/elements/0/glasses/0=1.5x@532"],
        &["/groups/exit/elements/0/glasses/0=1.6@532"],
        &["/states=null"],
        &["/states/*=null"],
        &["housing/track_mm=160"],
        &["/housing/track_mm"],
        &["=3"],
        &["/beam/wavelengths_nm=[9000]", "/states/2x/ratio=2.1"],
    ]
    .iter()
    .map(|changes| told(&["exit"], changes))
    .collect();
    insta::assert_snapshot!(told.join("\n\n"));
}

#[test]
fn a_change_from_a_table_is_told_with_its_line_and_column() {
    let position = surface_model::document::Position { line: 3, column: 8 };
    let source = Source { label: "units.csv".to_owned(), position: Some(position) };
    let at: Address = "/groups/exit/elements/0/thicknesses_mm/0".parse().unwrap();
    let refused = apply(&design(&["exit"]), &[Change::new(at, json!(-5), source)]).unwrap_err();
    insta::assert_snapshot!(refused.to_string());
}
