//! Seeing a run: `--show`, progress in a log.

use crate::job::{Program, STARTS, Scene, go_on_to_the_end, said};

#[test]
fn a_finished_run_is_shown_and_left_alone() {
    let scene = Scene::new();
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    let journal = std::fs::read(scene.run_folder().join("journal.jsonl")).unwrap();
    let shown = scene.other("overnight --run run --show");
    let told = said(&shown);
    assert_eq!(shown.status.code(), Some(0), "{told}");
    for expected in ["complete", "rank", "glasses", "How the merit fell", "fused-silica"] {
        assert!(told.contains(expected), "{told}");
    }
    assert!(told.lines().all(|line| line.chars().count() <= 80), "{told}");
    let json = scene.other("overnight --run run --show --json");
    let state: serde_json::Value = serde_json::from_slice(&json.stdout).unwrap();
    assert_eq!(state["format"], "drawtube-overnight/1");
    assert_eq!((&state["status"], &state["starts_wanted"]), (&"complete".into(), &STARTS.into()));
    let best = &state["ranking"]["best"][0];
    for key in ["merit", "worst_rms_waves", "track_mm", "elements"] {
        assert!(best[key].is_number(), "{key}: {best}");
    }
    let falls = state["merit_falls"].as_array().unwrap();
    assert_eq!(falls.last().unwrap()["merit"], best["merit"]);
    let assessed = scene.other("assess run/best/01.json --json");
    let assessed: serde_json::Value = serde_json::from_slice(&assessed.stdout).unwrap();
    assert_eq!(assessed["merit"]["total"], best["merit"], "the list tells what assess tells");
    assert_eq!(std::fs::read(scene.run_folder().join("journal.jsonl")).unwrap(), journal);
}

#[test]
fn a_search_is_drawn_when_it_ends_when_it_is_shown_and_when_it_is_gathered() {
    let scene = Scene::new();
    let read = |name: &str| std::fs::read_to_string(scene.path().join(name)).unwrap();
    let output = scene.command(Program::Drawtube, "--picture end.svg").output().unwrap();
    assert_eq!(output.status.code(), Some(0), "{}", said(&output));
    let drawn = read("end.svg");
    for word in ["Quay gauge, 2x", "Merit against time", "best so far", "Layout, to scale"] {
        assert!(drawn.contains(word), "{word}: {drawn}");
    }
    let rings = drawn.matches("<circle").count();
    assert_eq!(rings as u64, STARTS + 1, "a ring a start and one for the key: {drawn}");
    for line in [
        "overnight --run run --show --picture shown.svg",
        "gather run -o all --picture gathered.svg",
    ] {
        let output = scene.other(line);
        assert_eq!(output.status.code(), Some(0), "{}", said(&output));
        let again = scene.other(line);
        assert_eq!(again.status.code(), Some(7), "{}", said(&again));
        assert_eq!(scene.other(&format!("{line} --force")).status.code(), Some(0));
    }
    assert_eq!((read("shown.svg"), read("gathered.svg")), (drawn.clone(), drawn));
}

#[test]
fn a_log_gets_plain_lines() {
    let scene = Scene::new();
    let more = "--progress plain --progress-every 0 --threads 1";
    let output = scene.command(Program::Drawtube, more).output().unwrap();
    let told = said(&output);
    let line = format!(" of {STARTS} starts, ");
    let lines: Vec<&str> = told.lines().filter(|told| told.contains(&line)).collect();
    assert!(!lines.is_empty(), "{told}");
    assert!(lines.iter().all(|line| line.contains(" a second, ") && line.ends_with(" left")));
    assert!(!output.stderr.contains(&0x1b));
}

#[test]
fn what_is_done_is_not_done_again() {
    let scene = Scene::new();
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    let again = scene.command(Program::Drawtube, "").output().unwrap();
    let told = said(&again);
    assert!(told.contains(&format!("run goes on: {STARTS} starts were done in ")), "{told}");
    let done = format!("Complete. {STARTS} of {STARTS} starts are done");
    assert!(told.contains(&done), "{told}");
}
