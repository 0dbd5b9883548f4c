//! Running the program.

use std::io::Write;
use std::path::PathBuf;
use std::process::{Command, Stdio};

/// The program, ready for arguments, with an environment that is the same everywhere.
pub fn program() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_drawtube-program"));
    command.env_clear().current_dir(root()).stdin(Stdio::null());
    command
}

/// The folder the examples in `--help` are written for.
pub fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).parent().unwrap().to_owned()
}

/// What a run ended with.
#[derive(Debug)]
pub struct Ended {
    pub status: i32,
    pub out: String,
    pub err: String,
}

impl Ended {
    fn of(output: std::process::Output) -> Self {
        let ended = Self {
            status: output.status.code().expect("the program ends by itself"),
            out: String::from_utf8(output.stdout).unwrap(),
            err: String::from_utf8(output.stderr).unwrap(),
        };
        assert!(!ended.err.contains("panicked"), "{}", ended.err);
        ended
    }

    /// The run for a snapshot: status and both streams.
    pub fn told(&self) -> String {
        let Self { status, out, err } = self;
        let mut told = format!("status {status}\n");
        for (name, stream) in [("out", out), ("err", err)] {
            if !stream.is_empty() {
                told.push_str(&format!("--- {name}\n{stream}"));
            }
        }
        told
    }

    pub fn json(&self) -> serde_json::Value {
        serde_json::from_str(&self.out).unwrap()
    }
}

/// Runs the program to its end; arguments are separated by spaces.
pub fn run(arguments: &str) -> Ended {
    Ended::of(program().args(arguments.split_whitespace()).output().unwrap())
}

/// As [`run`], with something on standard input.
pub fn run_on(arguments: &str, input: &str) -> Ended {
    let mut child = program()
        .args(arguments.split_whitespace())
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    let mut stdin = child.stdin.take().unwrap();
    let input = input.to_owned();
    let writer = std::thread::spawn(move || stdin.write_all(input.as_bytes()));
    let output = child.wait_with_output().unwrap();
    // A program that has seen enough may close its end.
    let _ = writer.join().unwrap();
    Ended::of(output)
}

/// Puts `*` for what differs from run to run: counts of the solver and times.
pub fn without_effort(text: &str) -> String {
    let line = |line: &str| {
        if line.ends_with(" of solving.") {
            "* iterations, * evaluations, * of solving.".to_owned()
        } else if let Some((done, _)) = line.split_once(" starts are done in ") {
            format!("{done} starts are done in *")
        } else {
            line.to_owned()
        }
    };
    text.lines().map(line).collect::<Vec<_>>().join("\n")
}
