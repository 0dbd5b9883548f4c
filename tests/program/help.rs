//! Help, schema, completions, and command lines that are wrong.

use crate::program::{program, run, run_on};
use crate::readme::scene;

const COMMANDS: [&str; 15] = [
    "start",
    "assess",
    "optimise",
    "overnight",
    "sweep",
    "retune",
    "cam",
    "tolerance",
    "report",
    "gather",
    "trace",
    "glass",
    "schema",
    "man",
    "completions",
];

#[test]
fn the_overview() {
    insta::assert_snapshot!(run("--help").told());
}

#[test]
fn help_fits_eighty_columns_and_its_examples_work() {
    let folder = tempfile::tempdir().unwrap();
    scene(folder.path());
    for command in COMMANDS {
        let help = run(&format!("{command} --help")).out;
        assert!(help.lines().all(|line| line.chars().count() <= 80), "{help}");
        let examples: Vec<&str> =
            help.lines().filter_map(|line| line.trim().strip_prefix("drawtube ")).collect();
        assert!(!examples.is_empty(), "{command} has no example");
        for example in examples {
            let words = example.split(" > ").next().unwrap().split_whitespace();
            let output = program().args(words).current_dir(folder.path()).output().unwrap();
            assert_eq!(output.status.code(), Some(0), "{example}: {output:?}");
        }
    }
}

#[test]
fn wrong_command_lines_are_put_right() {
    let told: Vec<String> = [
        "",
        "asess x",
        "assess",
        "optimise x --iteration 5",
        "optimise x --method least-square",
        "optimise x --iterations many",
        "optimise configs/river-lidar-2x-6x.json --iterations 0",
        "optimise configs/river-lidar-2x-6x.json --target-merit -1",
        "optimise configs/river-lidar-2x-6x.json --target-merit nan",
        "optimise configs/river-lidar-2x-6x.json --progress-every -3",
        "optimise x --force",
        "start configs/river-brief.json --rank 0",
        "start configs/river-lidar-2x-6x.json",
        "assess no-such-file.json",
        "assess configs",
        "schema desing",
        "completions tcsh",
        "assess x --jsn --errors json",
        "assess no-such-file.json --errors=json",
    ]
    .iter()
    .map(|arguments| {
        let ended = run(arguments);
        assert_eq!(ended.status, 2, "{arguments}");
        assert_eq!(ended.out, "", "{arguments}");
        format!("$ drawtube {arguments}\n{}", ended.err)
    })
    .collect();
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn errors_for_machines_have_place_and_advice() {
    let ended = run_on("assess - --errors json", r#"{ "format": "drawtube/1", "beem": 3 }"#);
    assert_eq!((ended.status, ended.out.as_str()), (2, ""));
    let document: serde_json::Value = serde_json::from_str(&ended.err).unwrap();
    assert_eq!(document["format"], "drawtube-error/1");
    assert_eq!(document["status"], 2);
    let problem = document["problems"]
        .as_array()
        .unwrap()
        .iter()
        .find(|problem| problem["at"] == "/beem")
        .unwrap();
    assert_eq!((&problem["line"], &problem["column"]), (&1.into(), &27.into()));
    assert_eq!(problem["advice"], r#"did you mean "beam"?"#);
}

#[test]
fn the_schema_knows_every_key() {
    let schema = run("schema design").json();
    let properties = schema["properties"].as_object().unwrap();
    for key in crate::designs::every_key().as_object().unwrap().keys() {
        assert!(properties.contains_key(key), "{key}");
    }
}

#[test]
fn completions_for_every_shell() {
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        let ended = run(&format!("completions {shell}"));
        assert_eq!(ended.status, 0);
        for command in COMMANDS {
            assert!(ended.out.contains(command), "{shell} {command}");
        }
    }
}

#[test]
fn a_manual_page_of_every_command() {
    let whole = run("man").out;
    assert!(whole.contains(".TH drawtube 1"), "{whole}");
    for command in COMMANDS {
        assert!(whole.contains(&format!("drawtube\\-{command}(1)")), "{command}: {whole}");
        let page = run(&format!("man {command}"));
        assert_eq!(page.status, 0);
        assert!(page.out.contains(".SH SYNOPSIS"), "{}", page.out);
    }
    let unknown = run("man optimize");
    assert_eq!(unknown.status, 2, "{}", unknown.err);
}
