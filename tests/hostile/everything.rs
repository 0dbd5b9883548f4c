//! A short stretch of the search that `tests/fuzz` makes for hours: the same judges, the same
//! inputs each time.

use std::panic::catch_unwind;

use checks::judges::brief::BRIEFS;
use checks::judges::mutants::all;
use checks::judges::plan::PLANS;
use checks::judges::run_folder;
use checks::judges::shipped::{DESIGNS, design};
use checks::judges::{documents, numbers, plan, retune, telling, words};
use driver::search::{SearchProblem, SearchSettings, StartResult};
use proptest::prelude::*;
use proptest::sample::Index;

/// Judges inputs; how many the judge was content with in its own way.
fn judged<T>(
    inputs: impl Iterator<Item = (String, Vec<u8>)>,
    judge: impl Fn(&[u8]) -> Result<T, String>,
) -> Vec<T> {
    let mut content = Vec::new();
    let mut failures = Vec::new();
    for (name, input) in inputs {
        let verdict = catch_unwind(std::panic::AssertUnwindSafe(|| judge(&input)));
        match verdict.unwrap_or_else(|_| Err("a panic".into())) {
            Ok(verdict) => content.push(verdict),
            Err(what) => failures.push(format!("{name}\n    {what}")),
        }
    }
    assert!(failures.is_empty(), "{} failures\n{}", failures.len(), failures.join("\n"));
    content
}

/// Every `stride`-th way to spoil one value of these files.
fn spoilt(
    files: &'static [(&'static str, &'static str)],
    stride: usize,
) -> impl Iterator<Item = (String, Vec<u8>)> {
    let mutants = files.iter().flat_map(|(name, text)| all(name, text));
    mutants.step_by(stride).map(|mutant| (mutant.name, mutant.text.into_bytes()))
}

#[test]
fn everything_is_told_of_spoilt_designs() {
    let told = judged(spoilt(&DESIGNS, 151), telling::judge);
    assert!(told.iter().filter(|&&told| told).count() >= 10, "{}", told.len());
}

#[test]
fn spoilt_plans_are_answered() {
    let points = judged(spoilt(&PLANS, 13), plan::judge);
    assert!(points.iter().flatten().count() >= 10, "{points:?}");
    assert!(points.iter().filter(|points| points.is_none()).count() >= 10, "{points:?}");
}

#[test]
fn every_document_is_read_as_every_kind() {
    for files in [&DESIGNS[..], &BRIEFS, &PLANS] {
        judged(spoilt(files, 41), documents);
    }
}

/// A run of two starts, as a folder in one text.
fn folder() -> String {
    let (_, text) = DESIGNS[0];
    let problem = SearchProblem::of_design(&design(text), SearchSettings::default()).unwrap();
    let start = |number| problem.start(0, number, &false.into()).unwrap();
    let units: Vec<StartResult> = (0..2).map(start).collect();
    String::from_utf8(run_folder::sample(text, &units)).unwrap()
}

#[test]
fn spoilt_run_folders_are_answered() {
    let scratch = tempfile::tempdir().unwrap();
    let whole = folder();
    let judge = |input: &[u8]| run_folder::judge(input, scratch.path());
    assert_eq!(judge(whole.as_bytes()), Ok(true), "the folder as it was");
    let end = "{\"end\":{\"seconds\":1.0,\"complete\":true}}";
    let unit = whole.lines().find(|line| line.starts_with("{\"unit\"")).unwrap();
    let swaps = [
        ("drawtube-run/1", "drawtube-run/2"),
        ("drawtube-run/1", "other"),
        ("\"overnight\"", "\"sweep\""),
        ("\"overnight\"", "\"\\u001b[31m\""),
        ("\"parts\": 1", "\"parts\": 18446744073709551615"),
        ("\"parts\": 1", "\"parts\": 0"),
        ("\"parts\": 1", "\"parts\": 99999999"),
        ("\"seed\": 0", "\"seed\": -1"),
        ("@ASKED", "0"),
        ("@RUN", "0"),
        ("[1,1]", "[0,0]"),
        ("[1,1]", "[1,18446744073709551615]"),
        ("\"units\":2", "\"units\":18446744073709551615"),
        ("\"number\":1", "\"number\":18446744073709551615"),
        ("\"number\":1", "\"number\":0"),
        ("\"seconds\":0.5", "\"seconds\":1e308"),
        ("\"seconds\":0.5", "\"seconds\":-1e308"),
        ("\"seconds\":1.0", "\"seconds\":1e999"),
        (end, unit),
        (unit, end),
        (unit, "{\"unit\":{\"number\":0,\"seconds\":0,\"done\":{}}}"),
        (">>> asked.json", ">>> best"),
        (">>> journal.jsonl", ">>> lock"),
        (">>> journal.jsonl", ">>> journal.jsonl/deeper"),
        ("\n", "\r\n"),
        ("\n", ""),
    ];
    let swapped = swaps.into_iter().map(|(from, to)| {
        assert!(whole.contains(from), "{from}");
        (format!("{from} → {to}"), whole.replacen(from, to, 1).into_bytes())
    });
    judged(swapped, judge);
    // Cut off anywhere, and a design of the journal spoilt where its checksum holds.
    let cut = (0..whole.len())
        .step_by(97)
        .map(|at| (format!("cut at {at}"), whole.as_bytes()[..at].to_vec()));
    judged(cut, judge);
    let value: serde_json::Value = serde_json::from_str(unit).unwrap();
    let spoilt = all("unit", &value.to_string()).into_iter().step_by(23).map(|mutant| {
        // A line of a journal is one line.
        let line = mutant.text.replace('\n', " ").replace("{ \"unit\"", "{\"unit\"");
        (mutant.name, whole.replacen(unit, line.trim(), 1).into_bytes())
    });
    judged(spoilt, judge);
}

/// Words that changes and tables are made of.
fn lines() -> impl Strategy<Value = String> {
    let pieces = prop::sample::select(vec![
        "river",
        "pairs",
        "collimator",
        "asphere",
        "gorge",
        "\n",
        "\n--change ",
        "\n--made ",
        "\n--equivalents ",
        "\n--batch\n",
        "\n--tool-radii\n",
        "serial",
        "radius_mm",
        ",",
        "\"",
        "/groups/0/elements/0/radii_mm/0",
        "/groups/exit/elements/*/glasses/0",
        "/states/0",
        "/states/-",
        "/states/*/spacings_mm/0",
        "/housing/track_mm",
        "/beam",
        "/goals",
        "/glasses/x",
        "=",
        "null",
        "flat",
        "160",
        "-1e308",
        "5e-324",
        "0",
        "{}",
        "[]",
        "1.5@532",
        "@",
        "N-BK7",
        "{\"ratio\":7,\"name\":\"x\"}",
        "exit",
        "*",
        "//",
        "~",
        "\u{1b}[31m",
        "\r",
    ]);
    prop::collection::vec(pieces, 1..14).prop_map(|pieces| pieces.concat())
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 150, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn anything_that_came_back_is_answered(text in lines()) {
        prop_assert_eq!(retune::judge(text.as_bytes()).err(), None, "{}", text);
    }

    #[test]
    fn words_of_the_command_line_are_answered(text in ".{0,40}", glass in "(nd|vd|n@532|code|status)?[=.0-9e-]{0,12}(schott)?") {
        prop_assert_eq!(words::judge(&text).err(), None);
        prop_assert_eq!(words::judge(&glass).err(), None);
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 30, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn numbers_of_the_command_line_are_answered(
        which in any::<u8>(),
        places in prop::collection::vec((any::<Index>(), any::<f64>()), 6),
    ) {
        let usual = [0.0, -0.0, 1.0, -3.0, 5.0, 20.0, 300.0, 532.0, 1e-9, 5e-324, 1e9, 1e308,
                     f64::NAN, f64::INFINITY, f64::NEG_INFINITY];
        let number = |(place, any): &(Index, f64)| {
            usual.get(place.index(2 * usual.len())).copied().unwrap_or(*any)
        };
        let numbers = places.iter().flat_map(|place| number(place).to_le_bytes());
        let input: Vec<u8> = std::iter::once(which).chain(numbers).collect();
        prop_assert_eq!(numbers::judge(&input).err(), None, "{:?}", places);
    }
}
