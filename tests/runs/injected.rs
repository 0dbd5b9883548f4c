//! The system fails or kills at its N-th call, one after the other (`strace`).

use std::collections::BTreeMap;
use std::process::{Output, Stdio};

use crate::absent::is_there;
use crate::job::{Program, Scene, go_on_to_the_end, said, undisturbed};

/// The calls by which a file comes to be what it is.
const CALLS: [&str; 8] =
    ["write", "fsync", "fdatasync", "ftruncate", "rename", "renameat", "renameat2", "linkat"];

/// Whether `strace` is there and may trace.
pub fn can_trace() -> bool {
    is_there("strace", &["-qq", "-o", "/dev/null", "true"], "strace")
}

/// How often the main thread makes each call, with what is in the folder already.
fn calls(program: Program, scene: &Scene) -> BTreeMap<&'static str, usize> {
    let log = scene.path().join("calls");
    let trace = format!("trace={}", CALLS.join(","));
    let log_name = log.display().to_string();
    let strace = ["-qq", "-f", "-e", &trace, "-o", &log_name].map(String::from);
    let output = scene.traced(program, &strace, RUN).output().unwrap();
    assert!(output.status.success(), "{}", said(&output));
    let log = std::fs::read_to_string(log).unwrap();
    let main = log.split_whitespace().next().unwrap_or_default().to_owned();
    let mut counts = BTreeMap::new();
    for line in log.lines().filter(|line| line.starts_with(&main)) {
        let called = line[main.len()..].trim_start();
        if let Some(call) = CALLS.iter().find(|call| called.starts_with(&format!("{call}("))) {
            *counts.entry(*call).or_insert(0) += 1;
        }
    }
    // Were nothing counted, nothing would be tried.
    assert!(counts["write"] >= 5, "{counts:?}");
    counts
}

/// One thread, so that calls come in the same order every time.
const RUN: &str = "--threads 1 --quiet";

fn inject(program: Program, scene: &Scene, call: &str, what: &str, when: &str) -> Output {
    let fault = format!("inject={call}:{what}:when={when}");
    let strace = ["-qq", "-f", "-e", &format!("trace={call}"), "-e", &fault, "-o", "/dev/null"];
    let strace = strace.map(String::from);
    scene.traced(program, &strace, RUN).stdin(Stdio::null()).output().unwrap()
}

/// Killed at every call, each time in a new folder, and gone on.
pub fn check_kills(program: Program) -> Result<(), String> {
    undisturbed();
    let counts = calls(program, &Scene::new());
    if program == Program::Drawtube {
        assert!(counts.contains_key("fsync") && counts.contains_key("renameat"), "{counts:?}");
    }
    for (call, count) in counts {
        for when in 1..=count {
            let scene = Scene::new();
            let killed = inject(program, &scene, call, "signal=SIGKILL", &when.to_string());
            if killed.status.success() {
                return Err(format!("the kill at {call} {when} did not come"));
            }
            go_on_to_the_end(&scene, program).map_err(|told| format!("{call} {when}: {told}"))?;
        }
    }
    Ok(())
}

/// A run that was smaller before, so that there is a state that must stay intact.
fn with_an_old_state() -> Scene {
    let scene = Scene::new();
    let output = scene.command(Program::Drawtube, "--starts 2").output().unwrap();
    assert!(output.status.success(), "{}", said(&output));
    scene
}

/// Fails every call in turn, once or from then on.
pub fn check_errors(program: Program, error: &str, from_then_on: bool) -> Result<(), String> {
    undisturbed();
    let before = with_an_old_state();
    let old = before.result();
    for (call, count) in calls(program, &before.copy()) {
        for when in 1..=count {
            let place = format!("{error} at {call} {when}");
            let scene = before.copy();
            let suffix = if from_then_on { "+" } else { "" };
            let what = format!("error={error}");
            let failed = inject(program, &scene, call, &what, &format!("{when}{suffix}"));
            let status = failed.status.code();
            let told = said(&failed);
            if !matches!(status, Some(0 | 7)) {
                return Err(format!("{place}: status {status:?}: {told}"));
            }
            if status == Some(7) && told.is_empty() && call != "write" {
                return Err(format!("{place}: nothing is said"));
            }
            for (name, bytes) in scene.result() {
                let is_old = old.get(&name) == Some(&bytes);
                if !is_old && undisturbed().get(&name) != Some(&bytes) {
                    return Err(format!("{place}: {name} is neither old nor new"));
                }
            }
            go_on_to_the_end(&scene, program).map_err(|told| format!("{place}: {told}"))?;
        }
    }
    Ok(())
}

#[test]
fn a_kill_at_every_call_changes_nothing() {
    if can_trace() {
        check_kills(Program::Drawtube).unwrap();
    }
}

#[test]
fn a_full_disk_at_every_call_is_told_and_harms_nothing() {
    if can_trace() {
        check_errors(Program::Drawtube, "ENOSPC", true).unwrap();
    }
}

#[test]
fn a_failing_disk_at_every_call_is_told_and_harms_nothing() {
    if can_trace() {
        check_errors(Program::Drawtube, "EIO", false).unwrap();
    }
}

#[test]
fn an_interrupted_call_is_made_again() {
    if can_trace() {
        check_errors(Program::Drawtube, "EINTR", false).unwrap();
    }
}
