//! `cam`, pictures, and the sheets for the shop.

use crate::designs::RIVER;
use crate::program::run;

#[test]
fn a_movement_curve_as_a_table() {
    let ended = run(&format!("cam {RIVER} --ratios 3 --barrel-radius-mm 16"));
    assert!(ended.out.lines().all(|line| line.chars().count() <= 80), "{}", ended.out);
    assert_eq!(ended.status, 0);
    for word in ["entry", "groove", "collimation", "travel"] {
        assert!(ended.out.contains(word), "{word}");
    }
}

#[test]
fn four_groups_fit_the_width_too() {
    let ended = run("cam configs/four-groups-asphere.json --ratios 3");
    assert!(ended.out.lines().all(|line| line.chars().count() <= 80), "{}", ended.out);
}

#[test]
fn the_document_and_the_table_tell_the_same() {
    let folder = tempfile::tempdir().unwrap();
    let csv = folder.path().join("cam.csv");
    let ended = run(&format!("cam {RIVER} --step 0.5 --json --csv {}", csv.display()));
    let document = ended.json();
    assert_eq!(document["format"], "drawtube-cam/1");
    let points = document["points"].as_array().unwrap();
    assert_eq!(points.len(), 9);
    let text = std::fs::read_to_string(csv).unwrap();
    let mut lines = text.lines();
    let head: Vec<&str> = lines.next().unwrap().split(',').collect();
    assert_eq!(head[..3], ["ratio", "state", "entry position_mm"]);
    for (line, point) in lines.zip(points) {
        let cells: Vec<&str> = line.split(',').collect();
        assert_eq!(cells.len(), head.len());
        let z: f64 = cells[2].parse().unwrap();
        assert!((z - point["groups"][0]["position_mm"].as_f64().unwrap()).abs() < 1e-6);
        assert!(point["collimation_urad"].as_f64().unwrap().abs() < 1e-2);
    }
}

#[test]
fn what_is_wrong_is_a_status_only_when_asked() {
    let line = "cam configs/moving-collimator.json --ratios 3";
    assert_eq!(run(line).status, 0);
    assert_eq!(run(&format!("{line} --require")).status, 3);
    let ended = run(&format!("cam {RIVER} --barrel-radius-mm -2"));
    assert_eq!((ended.status, ended.out.as_str()), (2, ""));
    assert!(ended.err.contains("--barrel-radius-mm: -2"), "{}", ended.err);
}

#[test]
fn pictures_are_whole_and_are_not_overwritten() {
    let folder = tempfile::tempdir().unwrap();
    for command in ["assess", "cam", "optimise"] {
        let path = folder.path().join(format!("{command}.svg"));
        let line = format!("{command} {RIVER} --picture {}", path.display());
        assert_eq!(run(&line).status, 0, "{line}");
        let svg = std::fs::read_to_string(&path).unwrap();
        assert!(svg.starts_with("<svg") && svg.trim_end().ends_with("</svg>"));
        assert!(svg.contains("Layout, to scale") && !svg.contains("NaN") && !svg.contains("inf"));
        let again = run(&line);
        assert_eq!((again.status, again.out.as_str()), (7, ""));
        assert_eq!(run(&format!("{line} --force")).status, 0);
        assert_eq!(std::fs::read_to_string(&path).unwrap(), svg, "same in, same out");
    }
}

#[test]
fn the_sheets_hold_what_the_design_says_and_no_more() {
    let folder = tempfile::tempdir().unwrap();
    let sheets = folder.path().join("shop");
    assert_eq!(run(&format!("report {RIVER} --sheets {}", sheets.display())).status, 0);
    let text = |name: &str| std::fs::read_to_string(sheets.join(name)).unwrap();
    // The entry lens by hand: R = 75 and −20, clear Ø 8, 3 thick. Sag R − √(R² − 16):
    // 0.106743 and 0.404082; edge 3 − 0.106743 − 0.404082 = 2.489175.
    let surfaces = text("surfaces.csv");
    assert!(surfaces.contains("entry,0,0,75.000000,8,0.106743,0,"), "{surfaces}");
    assert!(surfaces.contains("entry,0,1,-20.000000,8,-0.404082,0,"), "{surfaces}");
    let elements = text("elements.csv");
    assert!(elements.contains("3.000000,2.489175,8"), "{elements}");
    let html = text("elements.html");
    for told in
        ["75.0000 CX", "20.0000 CX", "24.0000 CC", "thickness 3.0000 mm ± –", "4/ –", "chamfer –"]
    {
        assert!(html.contains(told) || html.contains(&told.replace(' ', "</b> ")), "{told}");
    }
    assert_eq!(html.matches("<section>").count(), 3, "a sheet an element");
    // Nothing is overwritten.
    assert_eq!(run(&format!("report {RIVER} --sheets {}", sheets.display())).status, 7);
}
