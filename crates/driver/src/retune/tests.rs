use serde_json::json;
use surface_model::document::Document;

use super::*;
use crate::solve::Unwatched;

fn river() -> DesignFile {
    let text = include_bytes!("../../../../configs/river-lidar-2x-6x.json");
    DesignFile::read(Document::parse("river.json", text).unwrap()).unwrap()
}

fn change(text: &str) -> Change {
    Change::read("--change", text, &serde_json::Value::Null).unwrap()
}

/// The derivative of what a change costs is the limit of what it costs traced, for every kind of
/// change that has one.
#[test]
fn costs_from_derivatives_are_those_traced_as_changes_shrink() {
    let pairs = include_bytes!("../../../../configs/two-colour-pairs.json");
    let asphere = include_bytes!("../../../../configs/four-groups-asphere.json");
    for text in [&pairs[..], asphere] {
        let file = DesignFile::read(Document::parse("design.json", text).unwrap()).unwrap();
        let optimised = optimise(&file, &Settings::default(), &mut Unwatched).unwrap().file;
        let design = &optimised.design;
        let radius = 1.0 / design.groups[0].elements[0].surfaces[0].curvature;
        let thickness = design.groups[1].elements[0].thicknesses_mm[0];
        let spacing = design.states[0].spacings_mm[0];
        let mut changes = vec![
            format!("/groups/0/elements/0/radii_mm/0={}", radius * 1.00001),
            format!("/groups/1/elements/0/thicknesses_mm/0={}", thickness + 1e-4),
            format!("/states/0/spacings_mm/0={}", spacing + 1e-4),
            "/groups/0/elements/0/glasses/0={\"from\":\"".to_owned()
                + &design.groups[0].elements[0].glasses[0].full_name()
                + "\",\"index_shift\":1e-6}",
        ];
        let shaped = design.groups.iter().enumerate().find_map(|(g, group)| {
            let shaped = |surface: &surface_model::surface::Surface| surface.conic != 0.0;
            let element = group.elements.iter().position(|e| e.surfaces.iter().any(shaped))?;
            let surface = group.elements[element].surfaces.iter().position(shaped)?;
            let conic = group.elements[element].surfaces[surface].conic;
            Some(format!("/groups/{g}/elements/{element}/shapes/{surface}/conic={}", conic + 1e-5))
        });
        changes.extend(shaped);
        for told in
            blame::blame(&optimised, &changes.iter().map(|text| change(text)).collect::<Vec<_>>())
        {
            let (derivative, traced) = (told.by_derivatives.unwrap(), told.traced.unwrap());
            // Six rays against an integral, and a second order in what is small.
            let off = (derivative - traced).abs();
            assert!(
                off <= 0.02 * traced.abs() + 1e-7,
                "{}: {derivative:e}, {traced:e}",
                told.change
            );
        }
    }
}

#[test]
fn parts_are_named_in_three_ways() {
    let file = river();
    let parts = |words: &[&str]| {
        let words: Vec<String> = words.iter().map(|word| (*word).to_owned()).collect();
        made::parts(&file, &words)
            .map(|parts| parts.iter().map(Address::to_string).collect::<Vec<_>>().join(" "))
            .map_err(|complaints| complaints.to_string())
    };
    assert_eq!(
        parts(&["exit", "/groups/entry/elements/0"]).unwrap(),
        "/groups/0/elements/0 /groups/2"
    );
    assert_eq!(parts(&["/groups/*", "exit"]).unwrap(), "/groups/0 /groups/1 /groups/2");
    insta::assert_snapshot!(parts(&["ext", "/states/2x"]).unwrap_err());
}

#[test]
fn tools_beside_a_radius_are_of_its_sign() {
    let table = |text: &str| table::Table::read("shop.csv", text.as_bytes()).unwrap();
    let told = |text: &str| tool_radii::Tools::of(&table(text)).map_err(|error| error.to_string());
    assert!(told("radius_mm\n-20\n30\nflat\n").is_ok());
    insta::assert_snapshot!(
        [told("radii\n20\n"), told("radius_mm\n"), told("tool,radius_mm\nA,20\nB,0\nC,x\n")]
            .map(Result::unwrap_err)
            .join("\n")
    );
}

#[test]
fn a_changed_number_stays_where_it_was_put() {
    let changes = [
        change("/groups/runner/elements/0/thicknesses_mm/0=2.2"),
        change("/groups/exit/elements/0/radii_mm/0=410"),
    ];
    let told = retune(&river(), &changes, &[], &Settings::default(), &mut Unwatched).unwrap();
    let last = told.last().unwrap();
    assert_eq!(last.file.design.groups[2].elements[0].surfaces[0].curvature, 1.0 / 410.0);
    assert_eq!(last.moving, Moving::Unmade);
    assert_eq!(
        last.file.document().value()["held"],
        json!(["/groups/runner/elements/0/thicknesses_mm/0", "/groups/exit/elements/0/radii_mm/0"])
    );
}
