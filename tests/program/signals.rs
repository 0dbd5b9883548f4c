//! Ctrl-C and SIGTERM while the program is computing.

use std::io::{BufRead, BufReader, Read, Write};
use std::process::{Child, Command, Stdio};
use std::thread::{self, JoinHandle};
use std::time::{Duration, Instant};

use crate::designs::long_job;
use crate::program::{program, run, run_on};

/// A job of hours.
struct Job {
    child: Child,
    out: JoinHandle<String>,
    err: JoinHandle<String>,
}

/// The job when it has begun to iterate, as its first line of progress tells.
fn begin(arguments: &[&str]) -> Job {
    let mut child = program()
        .args(["optimise", "-", "--method", "nelder-mead", "--iterations", "1000000000"])
        .args(["--progress", "plain", "--progress-every", "0.1"])
        .args(arguments)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    child.stdin.take().unwrap().write_all(long_job().as_bytes()).unwrap();
    let mut err = BufReader::new(child.stderr.take().unwrap());
    let mut line = String::new();
    err.read_line(&mut line).unwrap();
    assert!(line.contains("iterations"), "{line}");
    let out = child.stdout.take().unwrap();
    Job { child, out: thread::spawn(|| all(out)), err: thread::spawn(|| all(err)) }
}

fn all(mut stream: impl Read) -> String {
    let mut text = String::new();
    stream.read_to_string(&mut text).unwrap();
    text
}

fn signal(job: &Job, name: &str) {
    let id = job.child.id().to_string();
    assert!(Command::new("kill").args(["-s", name, &id]).status().unwrap().success());
}

/// Status and both streams of a job that must end soon.
fn within(mut job: Job, limit: Duration) -> (i32, String, String) {
    let began = Instant::now();
    let status = job.child.wait().unwrap();
    let took = began.elapsed();
    assert!(took < limit, "it took {took:?}");
    (status.code().unwrap(), job.out.join().unwrap(), job.err.join().unwrap())
}

#[test]
fn the_first_signal_saves_the_best_so_far() {
    for (name, status) in [("INT", 130), ("TERM", 143)] {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("best.json");
        let child = begin(&["-o", path.to_str().unwrap()]);
        signal(&child, name);
        let (code, out, err) = within(child, Duration::from_secs(3));
        assert_eq!(code, status, "{err}");
        assert!(out.contains("Nelder-Mead: stopped by the user."), "{out}");
        assert!(out.contains("The design was written to"), "{out}");
        assert_eq!(run(&format!("assess {}", path.display())).status, 0);
    }
}

#[test]
fn a_design_whose_folder_is_gone_goes_to_standard_output() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("inner/best.json");
    std::fs::create_dir(path.parent().unwrap()).unwrap();
    let child = begin(&["-o", path.to_str().unwrap()]);
    std::fs::remove_dir(path.parent().unwrap()).unwrap();
    signal(&child, "INT");
    let (code, out, err) = within(child, Duration::from_secs(3));
    assert_eq!(code, 7, "{err}");
    assert!(err.contains("cannot be written") && err.contains("last resort"), "{err}");
    assert_eq!(run_on("assess -", &out).status, 0, "standard output holds the design alone");
}

#[test]
fn without_a_file_the_summary_is_all() {
    let child = begin(&["--then", "least-squares"]);
    signal(&child, "INT");
    let (code, out, _) = within(child, Duration::from_secs(3));
    assert_eq!(code, 130);
    assert!(out.contains("The design was not kept"), "{out}");
    assert!(!out.contains("Damped least squares"), "no method follows a stop: {out}");
}

#[test]
fn the_second_signal_leaves_at_once() {
    let child = begin(&[]);
    // While it is halted nothing can be handled; both signals are there when it goes on.
    signal(&child, "STOP");
    signal(&child, "INT");
    signal(&child, "TERM");
    signal(&child, "CONT");
    let (code, out, _) = within(child, Duration::from_secs(1));
    assert!([130, 143].contains(&code), "{code}");
    assert_eq!(out, "", "nothing is summed up");
}

#[test]
fn a_halt_and_going_on_change_nothing() {
    let child = begin(&[]);
    signal(&child, "STOP");
    thread::sleep(Duration::from_millis(200));
    signal(&child, "CONT");
    signal(&child, "TERM");
    let (code, _, _) = within(child, Duration::from_secs(3));
    assert_eq!(code, 143);
}
