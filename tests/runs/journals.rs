//! Files of a run that were cut, spoilt, or come from elsewhere.

use crate::job::{Program, Scene, go_on_to_the_end, said, undisturbed, write};

/// A finished run, its journal cut within its last lines, gone on.
pub fn check_cuts(program: Program, step: usize) -> Result<(), String> {
    undisturbed();
    let scene = Scene::new();
    go_on_to_the_end(&scene, Program::Drawtube)?;
    let path = scene.run_folder().join("journal.jsonl");
    let whole = std::fs::read(&path).unwrap();
    let lines: Vec<&[u8]> = whole.split_inclusive(|&byte| byte == b'\n').collect();
    let last_unit = lines[lines.len() - 2];
    let begin = whole.len() - lines[lines.len() - 1].len() - last_unit.len();
    for cut in (begin..begin + last_unit.len()).step_by(step) {
        write(&path, &whole[..cut]);
        go_on_to_the_end(&scene, program).map_err(|told| format!("cut at {cut}: {told}"))?;
        // Once more: nothing torn may be left in the middle.
        go_on_to_the_end(&scene, program).map_err(|told| format!("cut at {cut}: {told}"))?;
    }
    Ok(())
}

#[test]
fn a_journal_cut_within_its_last_line_goes_on() {
    check_cuts(Program::Drawtube, 97).unwrap();
}

#[test]
fn a_torn_line_is_dropped_with_a_notice_and_damage_is_named() {
    let scene = Scene::new();
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    let path = scene.run_folder().join("journal.jsonl");
    let whole = std::fs::read(&path).unwrap();
    write(&path, &[&whole[..], &[0; 512]].concat());
    let output = scene.command(Program::Drawtube, "").output().unwrap();
    let told = said(&output);
    assert_eq!(output.status.code(), Some(0), "{told}");
    assert!(told.contains("was torn; its 512 bytes are dropped"), "{told}");
    assert_eq!(std::fs::read(&path).unwrap(), whole);

    let mut spoilt = whole;
    let third = spoilt.iter().position(|&byte| byte == b'\n').unwrap() + 40;
    spoilt[third] ^= 1;
    write(&path, &spoilt);
    for output in [
        scene.command(Program::Drawtube, "").output().unwrap(),
        scene.other("overnight --run run --show"),
        scene.other("gather run"),
    ] {
        let told = said(&output);
        assert_eq!(output.status.code(), Some(6), "{told}");
        assert!(told.contains("journal.jsonl: line 2 is damaged"), "{told}");
    }
    assert_eq!(std::fs::read(&path).unwrap(), spoilt, "nothing is touched");
}

#[test]
fn a_run_of_something_else_is_told_by_what_differs() {
    let scene = Scene::new();
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    let refused = |more: &str, differs: &str| {
        let output = scene.command(Program::Drawtube, more).output().unwrap();
        let told = said(&output);
        assert_eq!(output.status.code(), Some(6), "{told}");
        assert!(told.replace("\n  ", " ").contains(differs), "{told}");
        crate::job::same(&scene.result()).unwrap();
    };
    refused("--seed 3", "the seed is 0 there and 3 here");
    refused("--part 1/2", "the number of parts is 1 there and 2 here");
    let design = scene.path().join("design.json");
    let text = std::fs::read_to_string(&design).unwrap();
    write(&design, text.replace("0.05", "0.06").as_bytes());
    refused("", "it was asked about another file");
    write(&design, text.as_bytes());
    let run = scene.run_folder().join("run.json");
    let text = std::fs::read_to_string(&run).unwrap();
    for (from, to, told) in [
        ("\"version\": \"", "\"version\": \"9", "the program's version is \"9"),
        ("drawtube-run/1", "drawtube-run/7", "it was written for a newer drawtube"),
        ("\"seed\": 0", "\"seed\": x", "run.json: "),
    ] {
        write(&run, text.replace(from, to).as_bytes());
        let output = scene.command(Program::Drawtube, "").output().unwrap();
        assert_eq!(output.status.code(), Some(6), "{}", said(&output));
        assert!(said(&output).contains(told), "{}", said(&output));
    }
}
