//! The README's page of numbers is whole: every number the program shows stands on it, and every
//! check it names is there.

use std::collections::BTreeSet;

use serde_json::Value;

use crate::program::{program, root};

/// Command lines whose documents show all there is between them; `*` is a folder of its own.
const SHOWN: &[&str] = &[
    "start configs/river-brief.json --most 2 --json",
    "assess configs/gorge-lidar-pulsed.json --ranges-m 100 --json",
    "assess configs/survey-lidar-to-build.json --temperatures-c 0,40 --json",
    "optimise configs/river-lidar-2x-6x.json --json",
    "retune configs/river-as-designed.json --made /groups/* --json \
     --change /groups/runner/elements/0/thicknesses_mm/0=2.03",
    "tolerance configs/survey-lidar-to-build.json --systems 20 --json",
    "trace configs/river-lidar-2x-6x.json --state 6x --height-mm 1.2 --json",
    "glass N-BK7 --at-nm 532 --json",
    "cam configs/river-as-designed.json --barrel-radius-mm 20 --json",
    "overnight configs/river-lidar-2x-6x.json --run */night --starts 2 --json",
    "sweep configs/exit-glass.json --run */glasses --json",
];

/// The keys under which a document has numbers, or `null` where a number has no meaning. Designs
/// are what the user wrote, and the names of groups are the user's own.
fn numbers(value: &Value, key: &str, into: &mut BTreeSet<String>) {
    match value {
        Value::Object(map) if key == "positions_mm" => {
            assert!(map.values().all(Value::is_number));
            into.insert(key.to_owned());
        }
        Value::Object(map) => {
            for (key, value) in map.iter().filter(|(key, _)| *key != "design") {
                numbers(value, key, into);
            }
        }
        Value::Array(list) => list.iter().for_each(|value| numbers(value, key, into)),
        Value::Number(_) => {
            into.insert(key.to_owned());
        }
        Value::Null | Value::Bool(_) | Value::String(_) => {}
    }
}

/// The rows of the page's tables, cell by cell.
fn rows() -> Vec<Vec<String>> {
    let readme = std::fs::read_to_string(root().join("README.md")).unwrap();
    let page = readme.split("## What each number means").nth(1).unwrap();
    let page = page.split("\n## ").next().unwrap();
    let rows = page.lines().filter(|line| line.starts_with('|') && !line.starts_with("|---"));
    let cells = |row: &str| {
        let row = row.trim_matches('|').replace(r"\|", " ");
        row.split('|').map(|cell| cell.trim().to_owned()).collect::<Vec<_>>()
    };
    rows.map(cells).filter(|cells| cells[0] != "number").collect()
}

/// What stands between backticks.
fn quoted(text: &str) -> impl Iterator<Item = &str> {
    text.split('`').skip(1).step_by(2)
}

#[test]
fn every_number_shown_stands_on_the_page() {
    let folder = tempfile::tempdir().unwrap();
    let mut shown = BTreeSet::new();
    for line in SHOWN {
        let line = line.replace('*', "\u{0}").replace("/groups/\u{0}", "/groups/*");
        let line = line.replace('\u{0}', folder.path().to_str().unwrap());
        let output = program().args(line.split_whitespace()).output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{line}");
        numbers(&serde_json::from_slice(&output.stdout).unwrap(), "", &mut shown);
    }
    assert!(shown.len() > 100, "too few numbers are looked at: {}", shown.len());
    let rows = rows();
    let told: BTreeSet<&str> = rows.iter().flat_map(|cells| quoted(&cells[0])).collect();
    let missing: Vec<_> = shown.iter().filter(|key| !told.contains(key.as_str())).collect();
    assert!(missing.is_empty(), "the README does not say what these are: {missing:?}");
}

#[test]
fn every_check_named_is_there() {
    let mut named = 0;
    for cells in rows() {
        let (what, held_by) = (&cells[0], &cells[2]);
        let (files, tests): (Vec<&str>, Vec<&str>) =
            quoted(held_by).partition(|quoted| quoted.contains('/') || quoted.contains('.'));
        assert!(!files.is_empty(), "nothing holds {what}");
        let read = |file: &&str| {
            let path = if file.contains('/') { root() } else { root().join("tests/published") };
            let path = path.join(file);
            assert!(path.exists(), "{what}: there is no {file}");
            std::fs::read_to_string(path).unwrap_or_default()
        };
        let sources: Vec<String> = files.iter().map(read).collect();
        for test in tests {
            named += 1;
            let line = format!("fn {test}(");
            assert!(sources.iter().any(|text| text.contains(&line)), "{what}: no test {test}");
        }
    }
    assert!(named > 50, "too few checks are named: {named}");
}
