//! Folders that are in use, of something else, or not writable.

use super::*;

fn names(path: &Path) -> Vec<String> {
    let entries = std::fs::read_dir(path).unwrap();
    let mut names: Vec<String> =
        entries.map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

#[test]
fn a_second_user_is_told_who_is_first() {
    let folder = in_memory();
    let first = RunFolder::open(folder.path(), &ask(Share::WHOLE)).unwrap();
    let Err(RunError::InUse { holder, .. }) = RunFolder::open(folder.path(), &ask(Share::WHOLE))
    else {
        panic!("two processes in one folder");
    };
    assert!(holder.starts_with(&format!("process {} on ", std::process::id())), "{holder}");
    let seen = Survey::of(folder.path()).unwrap().parts[0].holder.clone();
    assert_eq!(seen, Some(holder));
    drop(first);
    assert_eq!(Survey::of(folder.path()).unwrap().parts[0].holder, None);
    RunFolder::open(folder.path(), &ask(Share::WHOLE)).unwrap();
}

#[test]
fn another_run_is_told_by_what_differs_and_left_alone() {
    let folder = in_memory();
    finished_run(folder.path(), 5);
    let before = std::fs::read(folder.path().join("journal.jsonl")).unwrap();
    let base = ask(Share::WHOLE);
    let others = [
        (
            Ask { kind: "words", ..base.clone() },
            "the kind of run is \"digits\" there and \"words\" here",
        ),
        (Ask { text: b"{}".to_vec(), ..base.clone() }, "it was asked about another file"),
        (Ask { seed: 8, ..base.clone() }, "the seed is 7 there and 8 here"),
        (Ask { settings: json!({}), ..base.clone() }, "the settings is"),
        (ask(Share::new(1, 2).unwrap()), "the number of parts is 1 there and 2 here"),
    ];
    for (other, told) in others {
        let error = RunFolder::open(folder.path(), &other).unwrap_err();
        assert!(matches!(error, RunError::AnotherRun { .. }), "{error}");
        assert!(error.to_string().contains(told), "{error}");
    }
    let renamed = Ask { name: "elsewhere/digits.json".into(), ..base };
    drop(RunFolder::open(folder.path(), &renamed).unwrap());
    assert_eq!(std::fs::read(folder.path().join("journal.jsonl")).unwrap(), before);
}

#[test]
fn a_folder_of_other_things_is_not_filled() {
    let folder = in_memory();
    write(&folder.path().join("notes.txt"), b"mine");
    let error = RunFolder::open(folder.path(), &ask(Share::WHOLE)).unwrap_err();
    assert!(matches!(error, RunError::NotARun { .. }));
    assert!(error.to_string().contains("notes.txt"), "{error}");
    assert_eq!(names(folder.path()), ["notes.txt"]);
    let file = folder.path().join("notes.txt");
    assert!(matches!(RunFolder::open(&file, &ask(Share::WHOLE)), Err(RunError::System { .. })));
    let missing = folder.path().join("no/such");
    assert!(matches!(RunFolder::open(&missing, &ask(Share::WHOLE)), Err(RunError::System { .. })));
    assert!(matches!(Survey::of(&missing), Err(RunError::NotARun { .. })));
}

#[test]
fn a_beginning_cut_short_is_begun_again() {
    let made = in_memory();
    finished_run(made.path(), 5);
    for kept in [&["lock"][..], &["lock", "asked.json"], &["lock", ".drawtube-x1"]] {
        let folder = in_memory();
        for name in kept {
            let from = made.path().join(name);
            let text = std::fs::read(from).unwrap_or_default();
            write(&folder.path().join(name), &text);
        }
        finished_run(folder.path(), 5);
        let there = ["asked.json", "best", "journal.jsonl", "lock", "run.json"];
        assert_eq!(names(folder.path()), there, "{kept:?}");
    }
    let folder = in_memory();
    write(&folder.path().join("asked.json"), b"of another");
    let error = RunFolder::open(folder.path(), &ask(Share::WHOLE)).unwrap_err();
    assert!(matches!(error, RunError::NotARun { .. }), "{error}");
}

#[test]
fn things_in_the_way_are_found_before_any_work() {
    for (in_the_way, folder_in_the_way) in [("best", false), ("journal.jsonl", true)] {
        let folder = in_memory();
        finished_run(folder.path(), 5);
        let path = folder.path().join(in_the_way);
        if folder_in_the_way {
            std::fs::remove_file(&path).unwrap();
            std::fs::create_dir(&path).unwrap();
        } else {
            std::fs::remove_dir(&path).unwrap();
            write(&path, b"");
        }
        let work = Digits::default();
        let refused = session(folder.path(), Share::WHOLE, &work, &units(9), 1, None);
        let refused = refused.map(|_| ()).unwrap_err();
        assert!(matches!(refused, RunError::System { .. } | RunError::Write(_)), "{refused}");
        assert_eq!(work.performed.into_inner(), 0);
    }
}

#[test]
fn results_replace_those_of_before() {
    let folder = in_memory();
    let run = RunFolder::open(folder.path(), &ask(Share::WHOLE)).unwrap();
    let best = folder.path().join("best");
    let three: Vec<ResultFile> = (1..=3).map(|rank| ResultFile::best(rank, "x")).collect();
    run.write_results(&three).unwrap();
    write(&best.join("mine.json"), b"kept");
    run.write_results(&[ResultFile::best(1, "y"), ResultFile::ranking("r")]).unwrap();
    assert_eq!(names(&best), ["01.json", "mine.json"]);
    assert_eq!(std::fs::read(best.join("01.json")).unwrap(), b"y");
}

fn write(path: &Path, text: &[u8]) {
    crate::write_whole::write_whole(path, text, crate::write_whole::Existing::Replace).unwrap();
}
