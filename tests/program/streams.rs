//! Pipes that close, devices that are full, terminals that are narrow, colours.

use std::fs::OpenOptions;
use std::io::{BufRead, BufReader};
use std::process::Stdio;

use crate::designs::RIVER;
use crate::program::{program, run};

fn full() -> Stdio {
    OpenOptions::new().write(true).open("/dev/full").unwrap().into()
}

#[test]
fn a_closed_pipe_is_no_failure() {
    for arguments in ["glass", "schema design", "completions zsh", "glass --json"] {
        let mut child = program()
            .args(arguments.split_whitespace())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        let mut line = String::new();
        BufReader::with_capacity(16, child.stdout.take().unwrap()).read_line(&mut line).unwrap();
        let output = child.wait_with_output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{arguments}");
        assert_eq!(String::from_utf8(output.stderr).unwrap(), "", "{arguments}");
    }
}

#[test]
fn full_devices_are_told_or_borne() {
    let status = |arguments: &str, out: Stdio, err: Stdio| {
        let mut command = program();
        command.args(arguments.split_whitespace()).stdout(out).stderr(err);
        command.status().unwrap().code().unwrap()
    };
    for arguments in [
        format!("assess {RIVER}"),
        format!("assess {RIVER} --json"),
        format!("optimise {RIVER}"),
        format!("optimise {RIVER} -o -"),
        "glass".to_owned(),
        "schema design".to_owned(),
        "completions bash".to_owned(),
    ] {
        assert_eq!(status(&arguments, full(), Stdio::null()), 7, "{arguments}");
        assert_eq!(status(&arguments, full(), full()), 7, "{arguments}");
        assert_eq!(status(&arguments, Stdio::null(), full()), 0, "{arguments}");
    }
    assert_eq!(status("assess no-such-file", Stdio::null(), full()), 2);
    let progress = format!("optimise {RIVER} --progress plain --progress-every 0");
    assert_eq!(status(&progress, Stdio::null(), full()), 0);
}

#[test]
fn pipes_and_files_hold_no_escape_codes() {
    for arguments in [
        format!("assess {RIVER}"),
        format!("optimise {RIVER} --progress bar"),
        "--help".to_owned(),
        "asess".to_owned(),
    ] {
        for environment in [("TERM", "xterm-256color"), ("NO_COLOR", "1"), ("TERM", "dumb")] {
            let output = program()
                .args(arguments.split_whitespace())
                .env(environment.0, environment.1)
                .output()
                .unwrap();
            assert!(!output.stdout.contains(&0x1b), "{arguments} {environment:?}");
            assert!(!output.stderr.contains(&0x1b), "{arguments} {environment:?}");
        }
    }
}

#[test]
fn a_path_that_is_no_text_is_told() {
    use std::ffi::OsStr;
    use std::os::unix::ffi::OsStrExt;
    let output = program().arg("assess").arg(OsStr::from_bytes(b"a\xff.json")).output().unwrap();
    assert_eq!(output.status.code(), Some(2));
    assert!(String::from_utf8(output.stderr).unwrap().contains("a\u{fffd}.json cannot be opened"));
}

#[test]
fn twenty_columns_are_survived() {
    for arguments in [
        format!("assess {RIVER}"),
        format!("optimise {RIVER}"),
        "--help".to_owned(),
        "glass f2".to_owned(),
    ] {
        let output =
            program().args(arguments.split_whitespace()).env("COLUMNS", "20").output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{arguments}");
    }
}

#[test]
fn tables_of_the_shipped_designs_fit_eighty_columns() {
    for entry in std::fs::read_dir(crate::program::root().join("configs")).unwrap() {
        let path = entry.unwrap().path();
        let is_design = std::fs::read_to_string(&path).unwrap().contains("\"drawtube/1\"");
        if !is_design {
            continue;
        }
        for command in ["assess", "optimise"] {
            let ended = run(&format!("{command} {}", path.display()));
            assert_eq!(ended.status, 0, "{}", ended.err);
            for line in ended.out.lines() {
                assert!(line.chars().count() <= 80, "{command}: {line}");
            }
        }
    }
}
