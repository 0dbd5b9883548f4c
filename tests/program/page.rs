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

/// Runs the browser on a page.
fn browse(page: &Path, arguments: &[&str]) -> std::process::Output {
    let browser = std::env::var("CHROMIUM").unwrap_or_else(|_| "chromium".into());
    let profile = tempfile::tempdir().unwrap();
    Command::new(&browser)
        .args(["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run"])
        .args(["--disable-background-networking", "--disable-component-update", "--disable-sync"])
        .args(["--enable-logging=stderr", "--v=0", "--virtual-time-budget=5000"])
        .args(arguments)
        .arg(format!("--user-data-dir={}", profile.path().display()))
        .arg(format!("file://{}", page.display()))
        .output()
        .unwrap_or_else(|error| {
            panic!("the page cannot be tested without a browser: {browser}: {error}")
        })
}

fn show(page: &Path) -> Shown {
    let output = browse(page, &["--dump-dom"]);
    let document = String::from_utf8_lossy(&output.stdout).into_owned();
    let told = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(document.contains("</html>"), "the browser showed nothing:\n{told}");
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

/// The pages a browser prints of a file: the sizes of their paper, in points.
fn printed(file: &Path) -> Vec<[f64; 2]> {
    let pdf = file.with_extension("pdf");
    browse(file, &["--no-pdf-header-footer", &format!("--print-to-pdf={}", pdf.display())]);
    let bytes = std::fs::read(&pdf).expect("the browser prints");
    // The browser writes the objects of pages as plain text: /Type /Page, /MediaBox [0 0 w h].
    let text = String::from_utf8_lossy(&bytes);
    let pages = text.split("/Type /Page").skip(1).filter(|rest| !rest.starts_with('s'));
    let size = |page: &str| {
        let numbers = page.split("/MediaBox [").nth(1).and_then(|rest| rest.split(']').next());
        let numbers: Vec<f64> =
            numbers.unwrap().split_whitespace().map(|n| n.parse().unwrap()).collect();
        [numbers[2], numbers[3]]
    };
    pages.map(size).collect()
}

/// A4 is 210 mm by 297 mm (ISO 216); a point is 1/72 inch.
fn is_a4([width, height]: [f64; 2]) -> bool {
    let near = |points: f64, mm: f64| (points * 25.4 / 72.0 - mm).abs() < 0.5;
    near(width, 210.0) && near(height, 297.0)
}

#[test]
fn every_sheet_prints_on_one_page_of_a4() {
    let folder = tempfile::tempdir().unwrap();
    for (design, elements) in
        [("survey-lidar-to-build", 3), ("two-colour-pairs", 3), ("four-groups-asphere", 4)]
    {
        let sheets = folder.path().join(design);
        let line = format!("report configs/{design}.json --sheets {}", sheets.display());
        assert_eq!(run(&line).status, 0);
        let pages = printed(&sheets.join("elements.html"));
        assert_eq!(pages.len(), elements, "{design}: a page an element");
        assert!(pages.into_iter().all(is_a4), "{design}");
    }
}

#[test]
fn a_page_tells_the_yield_the_temperatures_and_where_the_design_comes_from() {
    let folder = tempfile::tempdir().unwrap();
    let at = |name: &str| folder.path().join(name).display().to_string();
    // A search from a design that has tolerances, goals at two temperatures, and few starts.
    let built = std::fs::read_to_string(crate::program::root().join(BUILT)).unwrap();
    let mut design: Value = serde_json::from_str(&built).unwrap();
    design["temperatures_c"] = serde_json::json!([20.0, 35.0]);
    let asked = folder.path().join("asked.json");
    write_whole(&asked, design.to_string().as_bytes(), Existing::Keep).unwrap();
    let (night, page) = (at("night"), at("page.html"));
    let search = format!("overnight {} --run {night} --starts 2 --seed 7", asked.display());
    assert_eq!(run(&search).status, 0);
    let best = format!("{night}/best/01.json");
    assert_eq!(run(&format!("report {best} --systems 30 --seed 3 -o {page}")).status, 0);
    let shown = show(Path::new(&page));
    assert!(shown.console.is_empty(), "{:?}", shown.console);
    let tolerances = run(&format!("tolerance {best} --systems 30 --seed 3 --json")).json();
    let passed = &tolerances["monte_carlo"]["passed"];
    for told in [
        format!("{passed} of 30 systems come out right"),
        "30 systems built at random, seed 3.".to_owned(),
        "<h2>Temperature</h2>".to_owned(),
        "overnight, drawtube ".to_owned(),
        "multistart".to_owned(),
        "of 2 finished".to_owned(),
        "Merit against starts".to_owned(),
    ] {
        assert!(shown.document.contains(&told), "{told}");
    }
    // A wrong origin is no origin.
    let other = run(&format!("report {BUILT} --found {night} -o {}", at("other.html")));
    assert_eq!(other.status, 2, "{}", other.err);
    assert!(other.err.contains("--found") && !Path::new(&at("other.html")).exists());
}

/// A shipped design with tolerances.
const BUILT: &str = "configs/survey-lidar-to-build.json";

#[test]
fn an_optimisation_is_told_as_its_document_tells_it() {
    let folder = tempfile::tempdir().unwrap();
    let at = |name: &str| folder.path().join(name).display().to_string();
    let (better, page) = (at("better.json"), at("page.html"));
    let ended = run(&format!("optimise {RIVER} -o {better} --json"));
    let document = ended.json();
    let told = folder.path().join("told.json");
    write_whole(&told, ended.out.as_bytes(), Existing::Keep).unwrap();
    let told = told.display();
    assert_eq!(run(&format!("report {better} --found {told} -o {page}")).status, 0);
    let html = std::fs::read_to_string(&page).unwrap();
    let history = document["merit_history"][0]["iteration_and_merit"].as_array().unwrap();
    assert!(history.len() as u64 >= document["iterations"].as_u64().unwrap() / 2);
    for word in [&document["stopped"], &document["method"]] {
        assert!(html.contains(word.as_str().unwrap()), "{word}");
    }
    assert!(html.contains("Merit against iteration"));
}

/// First of all the page says whether the design holds, in its states and between them.
#[test]
fn the_verdict_speaks_of_what_lies_between_the_states_too() {
    let folder = tempfile::tempdir().unwrap();
    let page = |design: &str| {
        let page = folder.path().join(format!("{design}.html"));
        let line = format!("report configs/{design}.json -o {}", page.display());
        assert_eq!(run(&line).status, 0);
        std::fs::read_to_string(page).unwrap()
    };
    for (design, sound) in [("river-as-designed", false), ("river-on-a-cam", true)] {
        let html = page(design);
        let curve = run(&format!("cam configs/{design}.json --json")).json();
        assert_eq!(curve["sound"], sound, "{design}");
        let verdict = html.split("<h2>").next().unwrap();
        assert!(verdict.contains("data-meets=\"true\""), "{design}");
        assert!(verdict.contains(&format!("data-sound=\"{sound}\"")), "{design}");
        let findings = curve["findings"].as_array().unwrap();
        for finding in findings.iter().filter(|finding| finding["wrong"] == true) {
            assert!(verdict.contains(finding["told"].as_str().unwrap()), "{design}");
        }
    }
}

/// The laser's sections hold the numbers of the terminal's tables, as tables.
#[test]
fn the_laser_is_told_in_tables() {
    let folder = tempfile::tempdir().unwrap();
    let page = folder.path().join("page.html");
    let design = "configs/gorge-lidar-pulsed.json";
    assert_eq!(run(&format!("report {design} -o {}", page.display())).status, 0);
    let html = std::fs::read_to_string(&page).unwrap();
    let section = |title: &str| {
        let (_, rest) = html.split_once(&format!("<h2>{title}</h2>")).expect(title);
        rest.split("<h2>").next().unwrap().to_owned()
    };
    let (beam, hazards) = (section("The real beam"), section("Hazards"));
    let assessment = run(&format!("assess {design} --json")).json();
    for told in assessment["real_beam"].as_array().unwrap() {
        let diameter = told["exit"]["diameter_mm"].as_f64().unwrap();
        assert!(beam.contains(&format!("<td>{diameter:.2}</td>")), "{diameter}");
    }
    for caution in assessment["cautions"].as_array().unwrap() {
        let begins = &caution.as_str().unwrap()[..40];
        assert!(hazards.contains(begins), "{begins}");
    }
    for heading in ["Hit hardest", "The worst ghosts", "Every surface", "Every ghost"] {
        assert!(hazards.contains(heading), "{heading}");
    }
    assert!(!html.contains("<pre"), "no text of the terminal stands on the page");
}
