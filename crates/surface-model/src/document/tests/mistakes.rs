//! What people read about the mistakes that people make.

use serde::Deserialize;
use serde_json::json;

use super::*;
use crate::document::complaint::MOST_COMPLAINTS;

/// All that is said about the sample after `from` has become `to`, up to the typed reading.
fn told(from: &str, to: &str) -> String {
    assert!(SAMPLE.contains(from), "{from}");
    let text = SAMPLE.replacen(from, to, 1);
    match read(text.as_bytes()) {
        Ok(()) => "fine".into(),
        Err(complaints) => complaints.to_string(),
    }
}

#[test]
fn typical_mistakes_are_told_well() {
    insta::assert_snapshot!(told(r#""wavelengths_nm""#, r#""wavelength_nm""#), @r#"
    design.json:4:13: the key "wavelength_nm" is not known here
      at /beam/wavelength_nm
      expected: one of "wavelengths_nm", "diameter_mm", "traced_to"
      did you mean "wavelengths_nm"?
    "#);
    insta::assert_snapshot!(told(r#", "diameter_mm": 2.4"#, ""), @r#"
    design.json:4:11: the key "diameter_mm" is missing
      at /beam
      expected: "diameter_mm": a number above 0 (Diameter at 1/e² of the peak, in mm)
    "#);
    insta::assert_snapshot!(told("2.4", "\"2.4\""), @r#"
    design.json:4:55: "diameter_mm" is the text "2.4"
      at /beam/diameter_mm
      expected: a number above 0
      write it without quotes: 2.4
    "#);
    insta::assert_snapshot!(told("2.4", "-0.0"), @r#"
    design.json:4:55: "diameter_mm" is -0.0
      at /beam/diameter_mm
      expected: a number above 0
    "#);
    insta::assert_snapshot!(told("\"traced_to\": 1.5", "\"traced_to\": 9"), @r#"
    design.json:4:73: "traced_to" is 9
      at /beam/traced_to
      expected: a number from 0.5 to 4
    "#);
    insta::assert_snapshot!(told("[532.0]", "532.0"), @r#"
    design.json:4:31: "wavelengths_nm" is the number 532.0
      at /beam/wavelengths_nm
      expected: a list of numbers
      a list stands in brackets: [532.0]
    "#);
    insta::assert_snapshot!(told("[532.0]", "[]"), @r#"
    design.json:4:31: "wavelengths_nm" has no entries
      at /beam/wavelengths_nm
      expected: at least 1 entry
    "#);
    insta::assert_snapshot!(told("\"flat\"", "\"Flat\""), @r#"
    design.json:14:36: entry 0 of "radii_mm" is the text "Flat"
      at /groups/exit/elements/1/radii_mm/0
      expected: a number or "flat"
      did you mean "flat"?
    "#);
    insta::assert_snapshot!(told("\"flat\"", "\"-85.5\""), @r#"
    design.json:14:36: entry 0 of "radii_mm" is the text "-85.5"
      at /groups/exit/elements/1/radii_mm/0
      expected: a number or "flat"
      write it without quotes: -85.5
    "#);
    insta::assert_snapshot!(told("\"flat\"", "null"), @r#"
    design.json:14:36: entry 0 of "radii_mm" is null
      at /groups/exit/elements/1/radii_mm/0
      expected: a number or "flat"
    "#);
    insta::assert_snapshot!(told("\"spacings\"", "\"spacing\""), @r#"
    design.json:23:21: entry 1 of "free" is the text "spacing"
      at /free/1
      expected: "thicknesses", "radii", "spacings" or an object with "at"
      did you mean "spacings"?
    "#);
    insta::assert_snapshot!(told("\"spacings\"", "7"), @r#"
    design.json:23:21: entry 1 of "free" is the number 7
      at /free/1
      expected: "thicknesses", "radii", "spacings" or an object with "at"
    "#);
    insta::assert_snapshot!(told("\"index_shift\": 0.00021", "\"index_shft\": 0.00021"), @r#"
    design.json:6:37: the key "index_shft" is not known here
      at /glasses/melt-4471/index_shft
      expected: "from" or "index_shift"
      did you mean "index_shift"?
    "#);
    insta::assert_snapshot!(told("{ \"index\": 1.62 }", "{ \"index\": \"high\" }"), @r#"
    design.json:7:32: "index" is the text "high"
      at /glasses/bench-medium/index
      expected: a number
    "#);
    insta::assert_snapshot!(told("\"4\": 1.1e-7", "\"four\": 1.1e-7"), @r#"
    design.json:15:71: the key "four" is not known here
      at /groups/exit/elements/1/shapes/1/asphere/four
      expected: a whole number, in quotes since it is a key
    "#);
    insta::assert_snapshot!(told("drawtube/1", "drawtube/2"), @r#"
    design.json:2:13: "format" is the text "drawtube/2"
      at /format
      expected: "drawtube/1"
      did you mean "drawtube/1"?
    "#);
    insta::assert_snapshot!(told("\"weight\": 1.0", "\"rounds\": 3.0"), @r#"
    design.json:21:76: "rounds" is the number 3.0
      at /states/6x/rounds
      expected: a whole number from 0 to 4294967295
      write it without a point: 3
    "#);
    insta::assert_snapshot!(told("\"weight\": 1.0", "\"rounds\": 5000000000"), @r#"
    design.json:21:76: "rounds" is 5000000000
      at /states/6x/rounds
      expected: a whole number from 0 to 4294967295
    "#);
    insta::assert_snapshot!(told("\"weight\": 1.0", "\"ratio\": 3"), @r#"
    design.json:21:66: the key "ratio" occurs twice in the same object
      expected: every key once
      it is first given at line 21, column 21
    "#);
    insta::assert_snapshot!(told("\"airs_mm\": [1.0]", "\"\\u001b[31m\\n\u{202e}\": [1.0]"), @r#"
    design.json:16:7: the key "\u{1b}[31m\n\u{202e}" is not known here
      at /groups/exit/\u{1b}[31m\n\u{202e}
      expected: one of "name", "elements", "airs_mm"
    "#);
    insta::assert_snapshot!(told("[1.00, 127.88]", "[1.00, 1e999]"), @r#"
    design.json:21:57: the number 1e999 is beyond ±1.8e308
      expected: a finite number
    "#);
}

#[test]
fn several_mistakes_come_in_the_order_of_the_text() {
    let text = SAMPLE.replace("\"track_mm\"", "\"trak_mm\"").replace("\"beam\"", "\"baem\"");
    insta::assert_snapshot!(read(text.as_bytes()).unwrap_err(), @r#"
    design.json:4:3: the key "baem" is not known here
      at /baem
      expected: one of "format", "title", "beam", "glasses", "groups", "housing", "states", "free", "held"
      did you mean "beam"?
    design.json:18:16: the key "trak_mm" is not known here
      at /housing/trak_mm
      expected: "track_mm" or "fixed"
      did you mean "track_mm"?
    "#);
}

#[test]
fn more_than_twenty_mistakes_are_counted() {
    let mut value = sample().value().clone();
    value["states"] = json!(vec![json!({ "name": "2x", "ratio": null, "spacings_mm": [] }); 45]);
    let complaints = Document::from_value("d", value).check(&design_schema()).unwrap_err();
    assert_eq!(complaints.count(), 45);
    assert_eq!(complaints.iter().count(), MOST_COMPLAINTS);
    assert!(complaints.to_string().ends_with("\nd: and 25 more"));
    assert_eq!(complaints.to_json()["more"], 25);
}

#[test]
fn complaints_are_told_to_machines_as_well() {
    let text = SAMPLE.replace("\"flat\"", "\"flt\"");
    let json = read(text.as_bytes()).unwrap_err().to_json();
    insta::assert_snapshot!(layout(&json), @r#"
    {
      "problems": [
        {
          "file": "design.json",
          "line": 14,
          "column": 36,
          "at": "/groups/exit/elements/1/radii_mm/0",
          "found": "entry 0 of \"radii_mm\" is the text \"flt\"",
          "expected": "a number or \"flat\"",
          "advice": "did you mean \"flat\"?"
        }
      ],
      "more": 0
    }
    "#);
}

#[test]
fn typed_errors_of_an_owner_are_placed() {
    #[derive(Debug, thiserror::Error)]
    #[error("no glass is called {}", quoted(.name))]
    struct UnknownGlass {
        at: Address,
        name: String,
    }
    impl Complain for UnknownGlass {
        fn place(&self) -> Place {
            Place::Value(self.at.clone())
        }
        fn expected(&self) -> Option<String> {
            Some("a catalogue glass or one defined under \"glasses\"".into())
        }
        fn advice(&self) -> Option<String> {
            nearest(&self.name, ["N-BK7", "N-SF6"]).map(did_you_mean)
        }
    }
    let text = SAMPLE.replace("[\"N-BK7\",", "[\"N-BK8\",");
    let document = Document::parse("configs/river-lidar.json", text.as_bytes()).unwrap();
    let elements = Address::root().key("groups").index(2).key("elements");
    let at = elements.index(0).key("glasses").index(0);
    let verdict = document.verdict([UnknownGlass { at, name: "N-BK8".into() }]);
    insta::assert_snapshot!(verdict.unwrap_err(), @r#"
    configs/river-lidar.json:13:86: no glass is called "N-BK8"
      at /groups/exit/elements/pair/glasses/0
      expected: a catalogue glass or one defined under "glasses"
      did you mean "N-BK7"?
    "#);
    assert_eq!(document.verdict(Vec::<UnknownGlass>::new()), Ok(()));

    let held: Address = "/groups/entri/elements".parse().unwrap();
    let astray = held.resolve(document.value()).unwrap_err();
    let place = Place::Value(Address::root().key("held").index(0));
    insta::assert_snapshot!(document.verdict([astray.complaint(place)]).unwrap_err(), @r#"
    configs/river-lidar.json:24:12: nothing is at /groups/entri/elements: there is no "entri" in /groups
      at /held/0
      expected: one of "entry", "runner", "exit", or an index from 0 to 2
      did you mean "entry"?
    "#);
}

#[test]
fn a_file_that_is_no_document_is_told() {
    let told = |bytes: &[u8]| Document::parse("d.json", bytes).unwrap_err().to_string();
    let utf16: Vec<u8> = SAMPLE.encode_utf16().flat_map(u16::to_le_bytes).collect();
    insta::assert_snapshot!(told(&utf16), @r#"
    d.json: the text is in UTF-16
      expected: a JSON document in UTF-8
      save the file again as UTF-8
    "#);
    insta::assert_snapshot!(told(b"{\"title\": \"caf\xE9\"}"), @r#"
    d.json:1:15: byte 14 (counted from 0) is not UTF-8 text
      expected: a JSON document in UTF-8
      save the file again as UTF-8
    "#);
    insta::assert_snapshot!(told(b" \n"), @r#"
    d.json: the file is empty
      expected: a JSON document
    "#);
    insta::assert_snapshot!(told(b"{\"a\": 1,\n\"a\": 2}"), @r#"
    d.json:2:1: the key "a" occurs twice in the same object
      expected: every key once
      it is first given at line 1, column 2
    "#);
}

#[test]
fn a_type_that_refuses_more_than_its_schema_is_told_in_place() {
    #[derive(Debug, Deserialize)]
    #[expect(dead_code, reason = "only its reading matters")]
    struct Counted {
        counts: Vec<u8>,
    }
    let document = Document::parse("d", br#"{"counts": [1, 2, 300], "note": "x"}"#).unwrap();
    insta::assert_snapshot!(document.read::<Counted>().unwrap_err(), @r#"
    d:1:19: invalid value: integer `300`
      at /counts/2
      expected: u8
    "#);
}

#[test]
fn complaints_are_sorted_by_their_place() {
    let complaint = |address: &str| Complaint {
        place: Place::Value(address.parse().unwrap()),
        found: address.into(),
        expected: None,
        advice: None,
    };
    let document = sample();
    let verdict = document.verdict(["/held/0", "/groups/1", "/title"].map(complaint));
    let told = verdict.unwrap_err();
    let order: Vec<&str> = told.iter().map(|complaint| complaint.found.as_str()).collect();
    assert_eq!(order, ["/title", "/groups/1", "/held/0"]);
}
