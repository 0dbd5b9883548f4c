//! A run split into parts, and put together again.

use crate::job::{KEEP, Program, STARTS, Scene, result_in, said, same, undisturbed};

fn part(scene: &Scene, share: &str, more: &str) {
    let more = format!("--part {share} --quiet {more}");
    let output = scene.command(Program::Drawtube, &more).output().unwrap();
    assert_eq!(output.status.code(), Some(0), "{}", said(&output));
}

/// The list and designs of a folder, without what tells of the run itself.
fn list(folder: &std::path::Path) -> Vec<(String, Vec<u8>)> {
    let result = result_in(folder).into_iter();
    result.filter(|(name, _)| name != "asked.json" && name != "run.json").collect()
}

fn expected() -> Vec<(String, Vec<u8>)> {
    let result = undisturbed().clone().into_iter();
    result.filter(|(name, _)| name != "asked.json" && name != "run.json").collect()
}

#[test]
fn parts_in_one_folder_make_the_list_of_one_machine() {
    let scene = Scene::new();
    for share in ["3/3", "1/3"] {
        part(&scene, share, "");
    }
    let line = format!("gather run --keep {KEEP}");
    let incomplete = scene.other(&line);
    let told = said(&incomplete);
    assert_eq!(incomplete.status.code(), Some(3), "{told}");
    assert!(told.contains("Of 3 parts, 1 to be run again: --part 2/3"), "{told}");
    part(&scene, "2/3", "");
    // A part that runs again finds nothing to do and harms nothing.
    part(&scene, "1/3", "");
    for _ in 0..2 {
        let whole = scene.other(&line);
        assert_eq!(whole.status.code(), Some(0), "{}", said(&whole));
        assert_eq!(list(&scene.run_folder()), expected());
    }
}

#[test]
fn folders_of_their_own_in_any_order_do_so_too() {
    let folders: Vec<Scene> = (0..3).map(|_| Scene::new()).collect();
    part(&folders[0], "1/2", "");
    part(&folders[1], "2/2", "");
    // The same part twice, once not to the end.
    part(&folders[2], "2/2", "--starts 2");
    let name = |i: usize| folders[i].run_folder().display().to_string();
    let out = Scene::new();
    let orders = [vec![name(0), name(1), name(2)], vec![name(2), name(1), name(0), name(1)]];
    for (i, order) in orders.iter().enumerate() {
        let line = format!("gather {} -o all{i} --keep {KEEP}", order.join(" "));
        let gathered = out.other(&line);
        assert_eq!(gathered.status.code(), Some(0), "{}", said(&gathered));
        assert_eq!(list(&out.path().join(format!("all{i}"))), expected());
    }
    let unsaid = out.other(&format!("gather {}", orders[0].join(" ")));
    assert_eq!(unsaid.status.code(), Some(2), "{}", said(&unsaid));
}

#[test]
fn what_is_missing_is_told_for_machines() {
    let scene = Scene::new();
    part(&scene, "4/4", "");
    let gathered = scene.other("gather run --json");
    assert_eq!(gathered.status.code(), Some(3), "{}", said(&gathered));
    let told: serde_json::Value = serde_json::from_slice(&gathered.stdout).unwrap();
    let missing: Vec<&str> = told["missing"]
        .as_array()
        .unwrap()
        .iter()
        .map(|part| part["part"].as_str().unwrap())
        .collect();
    assert_eq!(missing, ["1/4", "2/4", "3/4"]);
    assert_eq!(told["missing"][0]["starts"], STARTS / 4);
}

#[test]
fn other_runs_and_other_folders_are_not_gathered() {
    let one = Scene::new();
    part(&one, "1/2", "");
    let other = Scene::new();
    part(&other, "2/2", "--seed 9");
    let line = format!("gather run {} -o all", other.run_folder().display());
    let mixed = one.other(&line);
    assert_eq!(mixed.status.code(), Some(6), "{}", said(&mixed));
    assert!(said(&mixed).contains("the seed is 9 there and 0 here"), "{}", said(&mixed));
    std::fs::create_dir(one.path().join("mine")).unwrap();
    crate::job::write(&one.path().join("mine/notes.txt"), b"mine");
    let filled = one.other("gather run -o mine");
    assert_eq!(filled.status.code(), Some(6), "{}", said(&filled));
    assert_eq!(one.other("gather mine").status.code(), Some(6));
    same(&Scene::new().result()).unwrap_err();
}
