//! Killed at random moments.

use std::process::Stdio;
use std::time::{Duration, Instant};

use crate::job::{Chance, Program, STARTS, Scene, go_on_to_the_end, said, undisturbed};

const KILLS: usize = 50;

/// Kills runs at random moments, each several times, until `KILLS` are dead, and lets each go on.
pub fn check(program: Program) -> Result<(), String> {
    undisturbed();
    let whole = duration_of_a_run(program);
    let mut chance = Chance(11);
    let mut kills = 0;
    while kills < KILLS {
        let scene = Scene::new();
        for _ in 0..6 {
            let mut child = scene
                .command(program, "--quiet")
                .stdout(Stdio::null())
                .stderr(Stdio::null())
                .spawn()
                .unwrap();
            // Half of them early, where the folder is being made.
            let share = if kills % 2 == 0 { 0.2 } else { 1.1 };
            std::thread::sleep(whole.mul_f64(share * chance.next()));
            child.kill().unwrap();
            let status = child.wait().unwrap();
            match status.code() {
                None => kills += 1,
                Some(0) => break,
                Some(code) => return Err(format!("going on ends with status {code}")),
            }
        }
        go_on_to_the_end(&scene, program)?;
    }
    Ok(())
}

fn duration_of_a_run(program: Program) -> Duration {
    let began = Instant::now();
    let scene = Scene::new();
    assert!(scene.command(program, "--quiet").status().unwrap().success());
    began.elapsed()
}

#[test]
fn random_kills_change_nothing() {
    check(Program::Drawtube).unwrap();
}

#[test]
fn a_folder_in_use_is_told_and_free_again_after_a_kill() {
    let scene = Scene::new();
    let more = "--starts 1000000 --threads 1";
    let mut first = scene.command(Program::Drawtube, more).stderr(Stdio::null()).spawn().unwrap();
    let journal = scene.run_folder().join("journal.jsonl");
    while !std::fs::read(&journal).is_ok_and(|text| text.contains(&b'\n')) {
        std::thread::sleep(Duration::from_millis(5));
    }
    let second = scene.command(Program::Drawtube, more).output().unwrap();
    assert_eq!(second.status.code(), Some(5));
    let told = said(&second);
    assert!(told.contains(&format!("is in use by process {} on ", first.id())), "{told}");
    let show = said(&scene.other("overnight --run run --show"));
    assert!(show.contains(&format!("running, process {} on ", first.id())), "{show}");
    first.kill().unwrap();
    first.wait().unwrap();
    let again = scene.command(Program::Drawtube, "--starts 1").output().unwrap();
    assert_eq!(again.status.code(), Some(0), "{}", said(&again));
}

#[test]
fn more_starts_go_on_from_fewer() {
    let scene = Scene::new();
    for starts in [1, 3, STARTS] {
        let more = format!("--starts {starts}");
        let output = scene.command(Program::Drawtube, &more).output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{}", said(&output));
    }
    crate::job::same(&scene.result()).unwrap();
}
