//! The shipped script for a job engine, run by one.

use std::path::Path;
use std::process::Command;

use crate::absent::is_there;
use crate::job::{KEEP, Program, STARTS, Scene, said, undisturbed};

/// The folder of the scripts.
fn configs() -> std::path::PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).parent().unwrap().join("configs")
}

/// Lets a script run the parts, gathers them, and holds the list against the undisturbed run.
fn check(script: &Path, first: &[&str]) {
    let scene = Scene::new();
    let output = Command::new("sh")
        .arg(script)
        .args(first)
        .args(["--starts", &STARTS.to_string(), "--strategy", "multistart"])
        .args(["--keep", &KEEP.to_string()])
        .env("DRAWTUBE", Program::Drawtube.path())
        .env("HOME", scene.path())
        .current_dir(scene.path())
        .output()
        .unwrap();
    assert!(output.status.success(), "{}", said(&output));
    let gathered = scene.other(&format!("gather run --keep {KEEP}"));
    assert_eq!(gathered.status.code(), Some(0), "{}", said(&gathered));
    let result = scene.result();
    assert!(result.contains_key("ranking.json"));
    for (name, bytes) in result.iter().filter(|(name, _)| *name != "run.json") {
        assert_eq!(undisturbed().get(name), Some(bytes), "{name}");
    }
}

#[test]
fn the_script_for_gnu_parallel_makes_the_list_of_one_machine() {
    if is_there("parallel", &["--version"], "parallel") {
        check(&configs().join("overnight-parallel.sh"), &["design.json", "run", "3"]);
    }
}

#[test]
fn the_job_array_for_slurm_makes_the_list_of_one_machine() {
    if is_there("slurmctld", &["-V"], "slurm-wlm") && is_there("slurmd", &["-V"], "slurm-wlm") {
        let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("runs/slurm.sh");
        check(&script, &["slurm", "3", "design.json", "run"]);
    }
}
