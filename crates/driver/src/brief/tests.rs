use serde_json::{Value, json};
use surface_model::document::Document;

use super::BriefFile;

const RIVER: &str = include_str!("../../../../configs/river-brief.json");
const TWO_COLOUR: &str = include_str!("../../../../configs/two-colour-brief.json");
const QUAY: &str = include_str!("../../../../configs/quay-brief.json");

fn river() -> Value {
    serde_json::from_str(RIVER).unwrap()
}

fn read(value: Value) -> Result<BriefFile, String> {
    BriefFile::read(Document::from_value("b.json", value)).map_err(|told| told.to_string())
}

fn told(change: impl FnOnce(&mut Value)) -> String {
    let mut value = river();
    change(&mut value);
    read(value).err().unwrap_or_else(|| "read without complaint".to_owned())
}

#[test]
fn the_shipped_briefs_are_read() {
    for text in [RIVER, TWO_COLOUR, QUAY] {
        let brief = BriefFile::read(Document::parse("b.json", text.as_bytes()).unwrap());
        let brief = brief.unwrap_or_else(|told| panic!("{told}"));
        assert_eq!(brief.wishes.states.len(), brief.ratios.len());
        assert_eq!(brief.glasses_allowed.len(), brief.written().glasses_allowed.len());
    }
}

#[test]
fn temperatures_go_to_the_designs() {
    let mut value = river();
    value["temperatures_c"] = json!([0.0, 40.0]);
    let silent = read(value.clone()).unwrap_err();
    assert!(silent.contains("/temperatures_c/0"), "{silent}");
    value["housing"]["expansion_per_k"] = json!(2.3e-5);
    value["glasses_allowed"] = json!(["N-BK7"]);
    let brief = read(value).unwrap();
    assert_eq!(brief.wishes.temperatures_c, [0.0, 40.0]);
    let starts = crate::start::Starts::of(&brief).unwrap();
    let points = starts.points(1);
    let layout = (0..4096).find_map(|number| starts.layout(&points.point(number)).ok()).unwrap();
    let file = starts.design_file(&layout, &layout.design, "warm and cold").unwrap();
    assert_eq!(file.wishes.temperatures_c, [0.0, 40.0]);
    let outcome = crate::optimise::merit_of(&file);
    assert!(outcome.is_ok(), "{:?}", outcome.err());
}

#[test]
fn limits_between_the_states_are_for_two_moving_groups() {
    let limit = |v: &mut Value| v["limits"]["between_states"] = json!("keep");
    assert_eq!(told(limit), "read without complaint");
    let one_ratio = told(|v| {
        limit(v);
        v["ratios"] = json!([2]);
    });
    assert!(one_ratio.contains("/limits/between_states"), "{one_ratio}");
}

#[test]
fn a_ratio_can_have_wishes_of_its_own() {
    let brief = read({
        let mut value = river();
        value["ratios"][4] = json!({ "ratio": 6, "name": "survey", "weight": 3.0,
            "wavelengths_nm": [633.0], "goals": { "wavefront_rms_waves": { "within": 0.02 } } });
        value
    })
    .unwrap();
    let names: Vec<&str> = brief.ratios.iter().map(|ratio| ratio.name.as_str()).collect();
    assert_eq!(names, ["2x", "3x", "4x", "5x", "survey"]);
    assert_eq!(brief.ratios[0].wavelengths_nm, [532.0]);
    assert_eq!(brief.ratios[4].wavelengths_nm, [633.0]);
    let goals = brief.wishes.states[4];
    assert_eq!((goals.weight, goals.wavefront_rms_waves), (3.0, Some(0.02)));
    assert_eq!(goals.ratio_percent, Some(0.2), "the goals of all hold where it has no own");
}

#[test]
fn groups_and_elements_may_be_left_out() {
    let mut value = river();
    value["groups"][1].as_object_mut().unwrap().remove("elements");
    assert!(read(value.clone()).is_ok());
    value.as_object_mut().unwrap().remove("groups");
    assert!(read(value.clone()).is_ok());
    value["housing"]["fixed"] = json!(["runner"]);
    let told = read(value).unwrap_err();
    assert!(
        told.contains("one of \"entry\", \"exit\"") || told.contains("\"entry\" or \"exit\""),
        "{told}"
    );
}

#[test]
fn mistakes_are_told_at_their_place_in_the_brief() {
    let list = [
        told(|v| v["glasses_allowed"] = json!(["fused-silica", "N-BK8", "fused-silica"])),
        told(|v| v["ratios"] = json!([2, 0, { "ratio": 1e9, "name": "huge" }, 2, { "ratio": 2 }])),
        told(|v| {
            v["ratios"][1] =
                json!({ "ratio": 3, "weight": -1, "goals": { "ratio_percent": { "within": 0 } } })
        }),
        told(|v| v["ratios"][1] = json!({ "ratio": 3, "wavelengths_nm": [0.532] })),
        told(|v| v["ratios"][1] = json!({ "ratios": 3 })),
        told(|v| v["beam"]["wavelengths_nm"] = json!([50_000.0, 5000.0])),
        told(|v| v["groups"][2] = json!({ "name": "runner", "elements": 1, "pairs": 2 })),
        told(|v| v["groups"][2]["elements"] = json!(0)),
        told(|v| v["groups"] = json!([{ "name": "only" }])),
        told(|v| v["housing"] = json!({ "track_mm": -150, "fixed": ["exist"] })),
        told(|v| v["limits"]["radius_mm"] = json!({ "min": 9, "max": 8 })),
        told(|v| v["glasses"] = json!({ "melt": { "from": "N-BK77", "index_shift": 0.001 } })),
        told(misspelt),
        told(|v| v["format"] = json!("drawtube/1")),
        told(|v| v["format"] = json!("drawtube-brief/2")),
        told(|v| v["states"] = json!([])),
    ];
    insta::assert_snapshot!(list.join("\n\n"));
}

#[test]
fn a_brief_is_not_taken_for_a_design() {
    let document = Document::from_value("b.json", river());
    let told = crate::design_file::DesignFile::read(document).unwrap_err().to_string();
    assert!(told.contains("this is a brief, not a design"), "{told}");
}

fn misspelt(value: &mut Value) {
    let map = value.as_object_mut().unwrap();
    let glasses = map.remove("glasses_allowed").unwrap();
    map.insert("glases_allowed".to_owned(), glasses);
}
