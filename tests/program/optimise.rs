//! `optimise`.

use serde_json::Value;

use crate::designs::{RIVER, every_key, text};
use crate::program::{root, run, run_on, without_effort};

#[test]
fn before_and_after_as_a_table() {
    let ended = run(&format!("optimise {RIVER}"));
    insta::assert_snapshot!(without_effort(&ended.told()));
}

#[test]
fn the_document_has_start_and_end() {
    let ended = run(&format!("optimise {RIVER} --json"));
    assert_eq!((ended.status, ended.err.as_str()), (0, ""));
    let document = ended.json();
    assert_eq!(document["format"], "drawtube-optimisation/1");
    assert_eq!(document["method"], "damped least squares");
    assert!(document["stopped"].is_string());
    for key in ["iterations", "evaluations", "solve_seconds"] {
        assert!(document[key].as_f64().unwrap() > 0.0, "{key}");
    }
    let assessed = run(&format!("assess {RIVER} --json")).json();
    assert_eq!(document["start"], assessed);
    let total = |part: &str| document[part]["merit"]["total"].as_f64().unwrap();
    assert!(total("end") < 1e-3 * total("start"));
}

#[test]
fn the_design_that_is_written_is_the_design_that_is_told() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("better.json");
    let ended = run(&format!("optimise {RIVER} --json --require -o {}", path.display()));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let again = run(&format!("assess --json --require {}", path.display()));
    assert_eq!(again.status, 0);
    assert_eq!(again.json(), ended.json()["end"]);
    let left: Vec<_> = std::fs::read_dir(folder.path()).unwrap().collect();
    assert_eq!(left.len(), 1, "nothing else is left in the folder");
}

#[test]
fn remarks_and_order_of_the_file_survive() {
    let ended = run_on("optimise - -o - --iterations 3", &text(&every_key()));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let before = every_key();
    let after: Value = serde_json::from_str(&ended.out).unwrap();
    let keys = |value: &Value| value.as_object().unwrap().keys().cloned().collect::<Vec<_>>();
    assert_eq!(keys(&after), keys(&before));
    for kept in
        ["/note", "/title", "/glasses", "/goals", "/free", "/groups/0/elements/0/radii_mm/1"]
    {
        assert_eq!(after.pointer(kept), before.pointer(kept), "{kept}");
    }
    assert_ne!(after["groups"], before["groups"]);
    assert!(ended.err.contains("The design was written to standard output."));
}

#[test]
fn nothing_is_overwritten_without_force() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("better.json");
    std::fs::copy(root().join(RIVER), &path).unwrap();
    let before = std::fs::read(&path).unwrap();
    let refused = run(&format!("optimise {RIVER} -o {}", path.display()));
    assert_eq!((refused.status, refused.out.as_str()), (7, ""));
    assert!(refused.err.contains("exists already") && refused.err.contains("--force"));
    assert_eq!(std::fs::read(&path).unwrap(), before);
    let replaced = run(&format!("optimise {RIVER} --force -o {}", path.display()));
    assert_eq!(replaced.status, 0);
    assert_ne!(std::fs::read(&path).unwrap(), before);
}

#[test]
fn a_place_that_takes_no_file_is_told_at_once() {
    let folder = tempfile::tempdir().unwrap();
    let design = crate::designs::long_job();
    // The job would take hours; only a check before it begins can answer at all.
    let told = |out: &str| {
        run_on(
            &format!("optimise - --method nelder-mead --iterations 1000000000 -o {out}"),
            &design,
        )
    };
    let missing = told(&format!("{}/nowhere/a.json", folder.path().display()));
    let is_folder = told(&format!("{}", folder.path().display()));
    assert_eq!((missing.status, is_folder.status), (7, 7));
    assert!(missing.err.contains("cannot be written"), "{}", missing.err);
    assert!(is_folder.err.contains("is a folder"), "{}", is_folder.err);
}

#[test]
fn methods_follow_each_other() {
    let ended = run(&format!(
        "optimise {RIVER} --json --method nelder-mead --iterations 50 --then least-squares"
    ));
    let document = ended.json();
    assert_eq!(document["method"], "Nelder-Mead, then damped least squares");
    let stages = document["stages"].as_array().unwrap();
    assert_eq!(stages.len(), 2);
    let sum: u64 = stages.iter().map(|stage| stage["iterations"].as_u64().unwrap()).sum();
    assert_eq!(document["iterations"], sum);
    let total = |value: &Value| value["merit"]["total"].as_f64().unwrap();
    assert!(total(&stages[0]) < total(&document["start"]));
    assert!(total(&stages[1]) <= total(&stages[0]));
    assert_eq!(stages[1]["merit"], document["end"]["merit"]);
}

#[test]
fn a_target_is_an_end() {
    let ended = run(&format!("optimise {RIVER} --json --target-merit 100 --then nelder-mead"));
    let document = ended.json();
    assert_eq!(document["stopped"], "the target merit is reached");
    assert!(document.get("stages").is_none(), "nothing follows a target that is reached");
}

#[test]
fn too_few_iterations_are_told() {
    let ended = run("optimise configs/two-colour-pairs.json --iterations 1 --require");
    assert_eq!(ended.status, 3);
    assert!(ended.out.contains("give more --iterations"), "{}", ended.out);
}

#[test]
fn quiet_is_quiet() {
    let ended = run(&format!("optimise {RIVER} --quiet --progress plain --progress-every 0"));
    assert_eq!((ended.status, ended.out.as_str(), ended.err.as_str()), (0, "", ""));
}

#[test]
fn progress_is_told_in_plain_lines_when_asked() {
    let told =
        |form: &str| run(&format!("optimise {RIVER} --progress {form} --progress-every 0")).err;
    let plain = told("plain");
    assert!(plain.lines().count() > 10);
    assert!(plain.lines().all(|line| line.contains("a second, merit ")), "{plain}");
    assert_eq!(told("auto").lines().count(), plain.lines().count());
    assert_eq!(told("none"), "");
}

#[test]
fn what_cannot_begin_is_told() {
    let mut no_goals = every_key();
    no_goals["goals"] = serde_json::json!({});
    no_goals["states"][1].as_object_mut().unwrap().remove("goals");
    let mut nothing_free = every_key();
    nothing_free["free"] = serde_json::json!([]);
    let told: Vec<String> = [no_goals, nothing_free]
        .iter()
        .map(|design| run_on("optimise -", &text(design)).told())
        .collect();
    insta::assert_snapshot!(told.join("\n"));
}
