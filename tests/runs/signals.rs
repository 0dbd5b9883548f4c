//! Ctrl-C, SIGTERM, and signals while something is written.

use std::process::{Child, Command, Output, Stdio};
use std::time::{Duration, Instant};

use crate::job::{Program, Scene, go_on_to_the_end, said};

/// A run without end that has finished a start.
fn begin(scene: &Scene, more: &str) -> Child {
    let child = scene
        .command(Program::Drawtube, &format!("--starts 10000000 {more}"))
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    let journal = scene.run_folder().join("journal.jsonl");
    let lines = || {
        let text = std::fs::read(&journal).unwrap_or_default();
        text.iter().filter(|&&byte| byte == b'\n').count()
    };
    while lines() < 2 {
        std::thread::sleep(Duration::from_millis(5));
    }
    child
}

fn signal(child: &Child, name: &str) {
    let id = child.id().to_string();
    assert!(Command::new("kill").args(["-s", name, &id]).status().unwrap().success());
}

/// What it ends with, which must be soon.
fn end(child: Child, limit: Duration) -> Output {
    let began = Instant::now();
    let output = child.wait_with_output().unwrap();
    let took = began.elapsed();
    assert!(took < limit, "it took {took:?}");
    output
}

/// Twice the second that is promised: the tests share their machine.
const SOON: Duration = Duration::from_secs(2);

#[test]
fn a_signal_stops_it_with_all_saved() {
    for (name, status) in [("INT", 130), ("TERM", 143)] {
        let scene = Scene::new();
        let child = begin(&scene, "--threads 2");
        signal(&child, name);
        let output = end(child, SOON);
        let told = said(&output);
        assert_eq!(output.status.code(), Some(status), "{told}");
        assert!(told.contains("Stopped by the user."), "{told}");
        assert!(scene.run_folder().join("ranking.json").is_file());
        go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    }
}

#[test]
fn a_second_signal_ends_it_at_once_and_harms_nothing() {
    let scene = Scene::new();
    let child = begin(&scene, "");
    for name in ["STOP", "INT", "TERM", "CONT"] {
        signal(&child, name);
    }
    let output = end(child, SOON);
    assert!([Some(130), Some(143)].contains(&output.status.code()));
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
}

#[test]
fn a_halt_changes_nothing() {
    let scene = Scene::new();
    let child = begin(&scene, "");
    signal(&child, "STOP");
    std::thread::sleep(Duration::from_millis(200));
    signal(&child, "CONT");
    signal(&child, "TERM");
    assert_eq!(end(child, SOON).status.code(), Some(143));
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
}

#[test]
fn a_signal_in_the_middle_of_saving_is_no_fault() {
    if !crate::injected::can_trace() {
        return;
    }
    for (call, when) in [("fsync", 2), ("fdatasync", 1), ("write", 5), ("renameat", 1)] {
        let scene = Scene::new();
        let fault = format!("inject={call}:signal=SIGTERM:when={when}");
        let trace = format!("trace={call}");
        let strace = ["-qq", "-f", "-e", &trace, "-e", &fault, "-o", "/dev/null"];
        let output = scene
            .traced(Program::Drawtube, &strace.map(String::from), "--threads 1")
            .output()
            .unwrap();
        // Where the signal comes after the last start, there is nothing left to stop.
        assert!([Some(0), Some(143)].contains(&output.status.code()), "{}", said(&output));
        go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    }
}

#[test]
fn usr1_asks_for_a_line_of_progress() {
    let scene = Scene::new();
    let child = begin(&scene, "--progress none");
    signal(&child, "USR1");
    std::thread::sleep(Duration::from_millis(300));
    signal(&child, "INT");
    let told = said(&end(child, SOON));
    assert!(told.contains(" of 10000000 starts, "), "{told}");
}
