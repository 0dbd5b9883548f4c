//! The page in a real browser: headless Chromium, which must be there (`apt-get install
//! chromium`; another one is named by `CHROMIUM`). Without it these tests fail.

use std::path::Path;
use std::process::Command;

use driver::write_whole::{Existing, write_whole};
use serde_json::Value;

use crate::designs::RIVER;
use crate::program::run;

/// What a browser made of a page: its document after all scripts, and what they said.
struct Shown {
    document: String,
    console: Vec<String>,
}

fn show(page: &Path) -> Shown {
    let browser = std::env::var("CHROMIUM").unwrap_or_else(|_| "chromium".into());
    let profile = tempfile::tempdir().unwrap();
    let output = Command::new(&browser)
        .args(["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run"])
        .args(["--disable-background-networking", "--disable-component-update", "--disable-sync"])
        .args(["--enable-logging=stderr", "--v=0", "--virtual-time-budget=5000", "--dump-dom"])
        .arg(format!("--user-data-dir={}", profile.path().display()))
        .arg(format!("file://{}", page.display()))
        .output()
        .unwrap_or_else(|error| {
            panic!("the page cannot be tested without a browser: {browser}: {error}")
        });
    let document = String::from_utf8_lossy(&output.stdout).into_owned();
    let told = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(document.contains("</html>"), "{browser} showed nothing:\n{told}");
    let console = told.lines().filter(|line| line.contains("CONSOLE")).map(str::to_owned);
    Shown { document, console: console.collect() }
}

/// Moves the slider as a hand would and notes what is shown before and after.
const PROBE: &str = r#"<script>
const stage = document.querySelector(".stage");
const slider = stage.querySelector("input");
const texts = (what, of) => [...of.querySelectorAll(what)].map(node => node.textContent);
const read = () => ({
  readings: texts("[data-reading]", stage),
  shifts: [...stage.querySelectorAll("[data-group]")].map(g => g.getAttribute("transform")),
  rays: [...stage.querySelectorAll("[data-ray]")].map(r => r.getAttribute("points")),
});
const noted = { hidden: stage.querySelector(".controls").hidden, first: read() };
slider.value = slider.max;
slider.dispatchEvent(new Event("input", { bubbles: true }));
noted.last = read();
stage.querySelectorAll("button")[1].click();
noted.second = read();
const values = row => [...row.querySelectorAll("td")].map(cell => cell.dataset.value ?? null);
noted.states = [...document.querySelectorAll("table.states tr[data-state]")].map(values);
noted.spacings = [...document.querySelectorAll("table.spacings tr[data-state]")].map(values);
noted.meets = document.querySelector("[data-meets]").dataset.meets;
const pre = document.createElement("pre");
pre.id = "noted";
pre.textContent = JSON.stringify(noted);
document.body.append(pre);
</script></body>"#;

fn noted(document: &str) -> Value {
    let text =
        document.split("<pre id=\"noted\">").nth(1).and_then(|rest| rest.split("</pre>").next());
    serde_json::from_str(text.expect("the probe ran")).unwrap()
}

fn numbers(list: &Value) -> Vec<Option<f64>> {
    let number = |value: &Value| value.as_str().map(|text| text.parse().unwrap());
    list.as_array().unwrap().iter().map(number).collect()
}

#[test]
fn the_page_loads_in_silence_and_its_slider_moves_what_it_should() {
    let folder = tempfile::tempdir().unwrap();
    let at = |name: &str| folder.path().join(name);
    let design = at("better.json");
    let design = design.to_str().unwrap();
    let page = at("report.html");
    assert_eq!(run(&format!("optimise {RIVER} -q -o {design}")).status, 0);
    assert_eq!(run(&format!("report {design} -o {}", page.display())).status, 0);
    let html = std::fs::read_to_string(&page).unwrap();
    for outside in ["http://", "https://", "src=", "@import"] {
        let inside = html.replace("http://www.w3.org/2000/svg", "");
        assert!(!inside.contains(outside), "the page must bring along all it needs: {outside}");
    }
    let probed = at("probed.html");
    let with_probe = html.replace("</body>", PROBE);
    write_whole(&probed, with_probe.as_bytes(), Existing::Keep).unwrap();
    let shown = show(&probed);
    assert!(shown.console.is_empty(), "{:?}", shown.console);
    let noted = noted(&shown.document);
    assert_eq!(noted["hidden"], false, "the slider shows with scripts on");

    // Numbers of the tables are those of `assess --json`.
    let assessment = run(&format!("assess {design} --json")).json();
    assert_eq!(noted["meets"], assessment["meets"].to_string());
    let states = assessment["states"].as_array().unwrap();
    assert_eq!(noted["states"].as_array().unwrap().len(), states.len());
    for (k, state) in states.iter().enumerate() {
        let told = numbers(&noted["states"][k]);
        let wave = &state["wavefront"][0];
        let expected = [
            &state["ratio_wanted"],
            &state["ratio"],
            &state["ratio_error_percent"],
            &state["exit_slope_urad"],
            &state["exit_diameter_mm"],
            &wave["wavelength_nm"],
            &wave["rms_waves"],
            &wave["pv_waves"],
        ];
        assert_eq!(told[1..], expected.map(Value::as_f64)[..], "{}", state["name"]);
        let told = numbers(&noted["spacings"][k]);
        assert_eq!(told[1], state["spacings_mm"][0].as_f64());
        assert_eq!(told[3], state["positions_mm"]["entry"].as_f64());
    }
    the_slider_agrees_with_the_curve(&noted, design);
}

fn the_slider_agrees_with_the_curve(noted: &Value, design: &str) {
    let curve = run(&format!("cam {design} --json --ratios 2")).json();
    let points = curve["points"].as_array().unwrap();
    for (when, point) in
        [("first", &points[0]), ("second", &points[1]), ("last", points.last().unwrap())]
    {
        let readings = noted[when]["readings"].as_array().unwrap();
        let read = |k: usize| readings[k].as_str().unwrap().parse::<f64>().unwrap();
        assert!((read(0) - point["ratio"].as_f64().unwrap()).abs() < 5.1e-5, "{when}");
        assert!((read(2) - point["exit_slope_urad"].as_f64().unwrap()).abs() < 5.1e-3, "{when}");
        assert!((read(1) - point["collimation_urad"].as_f64().unwrap()).abs() < 5.1e-3, "{when}");
        let rms = point["wavefront"][0]["rms_waves"].as_f64().unwrap();
        assert!((read(3) / rms - 1.0).abs() < 5.1e-3, "{when}");
        for g in 0..3 {
            let z = point["groups"][g]["position_mm"].as_f64().unwrap();
            assert!((read(4 + g) - z).abs() < 5.1e-5, "{when}");
        }
    }
    // 840 px hold the track of 150 mm and a twentieth of it at both ends.
    let scale = 840.0 / (1.1 * 150.0);
    for g in 0..3 {
        let z = |k: usize| points[k]["groups"][g]["position_mm"].as_f64().unwrap();
        let shift = noted["last"]["shifts"][g].as_str().unwrap();
        let px: f64 = shift["translate(".len()..].split(' ').next().unwrap().parse().unwrap();
        assert!((px - scale * (z(points.len() - 1) - z(0))).abs() < 6e-3, "{g}: {px}");
    }
    assert_eq!(noted["last"]["shifts"][2], "translate(0 0)", "the exit lens is fixed");
    assert_ne!(noted["first"]["rays"], noted["last"]["rays"]);
}

#[test]
fn the_page_as_it_is_says_nothing_on_the_console() {
    let folder = tempfile::tempdir().unwrap();
    let page = folder.path().join("pair.html");
    // One with a movement curve, one whose single moving group does not collimate between.
    let designs = "configs/two-colour-pairs.json configs/moving-collimator.json";
    assert_eq!(run(&format!("report {designs} -o {}", page.display())).status, 0);
    let shown = show(&page);
    assert!(shown.console.is_empty(), "{:?}", shown.console);
    assert!(shown.document.contains("Side by side"));
}
