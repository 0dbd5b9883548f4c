//! The sheets for the shop: what the design gives, and what it leaves open.

use serde_json::json;

use crate::designs::{every_key, text};
use crate::program::{run, run_on};

const BUILT: &str = "configs/survey-lidar-to-build.json";

/// The words of one element's sheet, markup aside, blanks made one.
fn sheet(html: &str, number: usize) -> String {
    let section = html.split("<section>").nth(number).unwrap();
    let words = section.split('<').map(|piece| piece.split_once('>').map_or(piece, |(_, w)| w));
    words.collect::<String>().split_whitespace().collect::<Vec<_>>().join(" ")
}

#[test]
fn one_sheet_by_hand() {
    let folder = tempfile::tempdir().unwrap();
    let sheets = folder.path().join("shop");
    assert_eq!(run(&format!("report {BUILT} --sheets {}", sheets.display())).status, 0);
    let html = std::fs::read_to_string(sheets.join("elements.html")).unwrap();

    // The entry lens: R = −108.005 is hollow to the left, −25.210 bulges to the right. Sag at 4 mm
    // R − √(R² − 16): 0.07410 and 0.31938. Grade fine: 0.1 % of a radius, half a fringe, 0.05 mm,
    // 0.0005 of index, 0.5 % of 64.17, and 0.3 mrad = 1.03 minutes of arc.
    let entry = sheet(&html, 1);
    let fringes = "3/ –(0.5)";
    for told in [
        "R 108.0050 CC ± 0.11",
        "R 25.2100 CX ± 0.025",
        "sag at Øe 0.0741",
        "sag at Øe 0.3194",
        "nd = 1.51680 ± 0.0005",
        "νd = 64.17 ± 0.32",
        "thickness 3.0000 mm ± 0.05",
        "Ø 9 −0.01 / −0.03",
        fringes,
        "4/ 1.0′",
        "chamfer 0.2 – 0.4",
        "5/ 3 × 0.1; L 1 × 0.006; E 0.3",
        "0/ –",
        "1/ 2 × 0.1",
        "2/ 2; 3",
        "coating antireflection at 532 nm",
    ] {
        assert!(entry.contains(told), "{told}: {entry}");
    }
    // The exit lens is held by test plate. To first order N fringes of λ/2 of sag over the height h
    // are 2 R² N (λ/2)/h² of radius (s = h²/2R, D. Malacara, Optical Shop Testing, ch. 18; value
    // from memory): 2 · 647.222² · 3 · 273.035 nm/13² = 4.06 mm, and 0.079 mm for the other side.
    let exit = sheet(&html, 3);
    for told in ["R 647.2220 CX ± 4.1", "R 90.4010 CX ± 0.078", "3/ 3(0.5)", "5/ 3 × 0.16"] {
        assert!(exit.contains(told), "{told}: {exit}");
    }
    assert!(!exit.contains(fringes));
    // The tables say the same.
    let surfaces = std::fs::read_to_string(sheets.join("surfaces.csv")).unwrap();
    assert!(surfaces.contains(",4.06,3,0.5,0.2,0.4,3,0.16,1,0.006,0.3,"), "{surfaces}");
    let elements = std::fs::read_to_string(sheets.join("elements.csv")).unwrap();
    assert!(elements.contains(",28,-0.05,-0.02,0.05,0.0005,0.5,0.3,,2,0.1,2,3"), "{elements}");
}

#[test]
fn what_a_grade_would_be_is_not_what_the_design_says() {
    // `tolerance` takes the grade "fine" where none is named; a sheet does not.
    let folder = tempfile::tempdir().unwrap();
    let sheets = folder.path().join("shop");
    let mut design = every_key();
    design["tolerances"] = json!({ "own": [ { "at": "/groups/exit", "thickness_mm": 0.03 } ] });
    let line = format!("report - --sheets {}", sheets.display());
    assert_eq!(run_on(&line, &text(&design)).status, 0);
    let html = std::fs::read_to_string(sheets.join("elements.html")).unwrap();
    assert!(sheet(&html, 1).contains("mm ± –") && !sheet(&html, 1).contains("± 0."), "{html}");
    let count = html.matches("<section>").count();
    assert!(sheet(&html, count).contains("mm ± 0.03"), "{html}");
}

#[test]
fn what_is_wrong_in_what_the_shop_is_told() {
    let mut design = every_key();
    design["tolerances"]["shop"] = json!([
        { "at": "/groups/exit", "outer_diameter_mm": 3.0, "striae_class": 6 },
        { "at": "/groups/exti", "coating": "none" },
        { "at": "/states", "edge_chips_mm": 0.1 },
        { "at": "/groups/exit/elements/pair/glasses/0", "chamfer_mm": { "min": 0.4, "max": 0.2 } },
        { "at": "/groups", "outer_diameter_off_mm": [0.1, -0.1], "bubbles": { "count": 1, "grade_mm": 0 } }
    ]);
    let ended = run_on("assess -", &text(&design));
    assert_eq!((ended.status, ended.out.as_str()), (2, ""));
    insta::assert_snapshot!(ended.err);
    design["tolerances"]["shop"] = json!([{ "at": "/groups", "coatings": "none" }]);
    let ended = run_on("assess -", &text(&design));
    assert!(ended.err.contains("did you mean \"coating\"?"), "{}", ended.err);
}
