//! `trace`.

use crate::designs::RIVER;
use crate::program::run;

#[test]
fn a_ray_parallel_to_the_axis() {
    insta::assert_snapshot!(run(&format!("trace {RIVER} --state 6x --height-mm 1.2")).told());
}

#[test]
fn a_skew_ray() {
    let ended = run(&format!(
        "trace {RIVER} --state 6x --height-mm -0.8 --x-mm 0.4 --angle-mrad 1.5 --angle-x-mrad -0.5"
    ));
    insta::assert_snapshot!(ended.told());
}

#[test]
fn the_table_is_the_document() {
    let document = run(&format!("trace {RIVER} --state 2x --height-mm 1 --json")).json();
    assert_eq!(document["format"], "drawtube-ray/1");
    let surfaces = document["surfaces"].as_array().unwrap();
    assert_eq!(surfaces.len(), 6);
    assert_eq!(surfaces[3]["at"], "/groups/runner/elements/0/radii_mm/1");
    // Snell's law at every surface; air is 1, so the indices are those of the glass or 1.
    let sine =
        |surface: &serde_json::Value, key: &str| surface[key].as_f64().unwrap().to_radians().sin();
    let ratio = sine(&surfaces[0], "incidence_deg") / sine(&surfaces[0], "refraction_deg");
    // Malitson (1965), J. Opt. Soc. Am. 55, 1205: fused silica at 532 nm, value from memory.
    assert!((ratio - 1.4607).abs() < 1e-4, "{ratio}");
    let last = &surfaces[5]["slope_y_mrad"];
    assert_eq!(last, &document["exit"]["slope_y_mrad"]);
}

#[test]
fn the_axial_ray_stays_on_the_axis() {
    let document = run(&format!("trace {RIVER} --state 4x --height-mm 0 --json")).json();
    assert_eq!(document["exit"]["y_mm"], 0.0);
    assert_eq!(document["exit"]["path_waves"], 0.0);
}

#[test]
fn what_cannot_be_traced_is_told() {
    let told: Vec<String> = [
        "--state 6x --height-mm 9",
        "--state 6 --height-mm 1",
        "--state 66x --height-mm 1",
        "--state 6x --height-mm NaN",
        "--state 6x --height-mm 1e308",
        "--state 6x --height-mm 1 --angle-mrad 1600",
        "--state 6x --height-mm 1 --wavelength-nm 0",
        "--state 6x --height-mm 1 --wavelength-nm 12000",
        "--state 6x --height-mm 1 --wavelength-nm 0.532",
    ]
    .iter()
    .map(|arguments| format!("{arguments}\n{}", run(&format!("trace {RIVER} {arguments}")).told()))
    .collect();
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn a_ray_outside_the_clear_diameter_is_marked() {
    let ended = run(&format!("trace {RIVER} --state 6x --height-mm 3.2"));
    assert_eq!(ended.status, 0);
    assert!(ended.out.contains('!') && ended.out.contains("warning: the ray passes outside"));
}
