//! The peers that are programs of their own: SciPy and Ceres. Each prints one line of JSON a set
//! of options and times itself inside.

use std::path::{Path, PathBuf};
use std::process::Command;

use driver::write_whole::{Existing, write_whole};
use serde_json::Value;

use crate::{Failure, design, peer_input};

/// A program to be held against.
#[derive(Debug, Clone)]
pub(crate) struct Program {
    pub(crate) name: &'static str,
    command: Vec<String>,
}

/// What a peer reached with one set of options.
#[derive(Debug, Clone)]
pub(crate) struct Reached {
    pub(crate) options: String,
    pub(crate) merit: f64,
    pub(crate) seconds: Vec<f64>,
}

impl Program {
    /// The Ceres program, built on the way; the reason where it cannot be.
    pub(crate) fn ceres() -> Result<Self, String> {
        let script = design::home().join("peers/ceres/build.sh");
        let built = Command::new(&script).output().map_err(|error| error.to_string())?;
        if !built.status.success() {
            return Err(String::from_utf8_lossy(&built.stderr).trim().to_owned());
        }
        let path = String::from_utf8_lossy(&built.stdout).trim().to_owned();
        Ok(Self { name: "Ceres", command: vec![path] })
    }

    /// SciPy; the reason where it is missing.
    pub(crate) fn scipy() -> Result<Self, String> {
        let versions = "import numpy, scipy; print(numpy.__version__, scipy.__version__)";
        let found = Command::new("python3").args(["-c", versions]).output();
        match found {
            Ok(output) if output.status.success() => {
                let script = design::home().join("peers/scipy_job.py").display().to_string();
                Ok(Self { name: "SciPy", command: vec!["python3".into(), script] })
            }
            _ => Err("skipped: python3 with numpy and scipy is not there".into()),
        }
    }

    /// Runs `repeats` optimisations of the problem in `file` down to `target` with each of the
    /// sets of options (all known ones if none is given).
    pub(crate) fn run(
        &self,
        file: &Path,
        target: f64,
        repeats: usize,
        options: &[String],
    ) -> Result<Vec<Reached>, Failure> {
        let output = Command::new(&self.command[0])
            .args(&self.command[1..])
            .arg(file)
            .args([format!("{target:e}"), repeats.to_string()])
            .args(options)
            .output()?;
        if !output.status.success() {
            return Err(String::from_utf8_lossy(&output.stderr).into_owned().into());
        }
        let lines = String::from_utf8(output.stdout)?;
        lines.lines().map(|line| read(line).ok_or_else(|| format!("{line}?").into())).collect()
    }

    /// The file this peer reads for a design: the design itself, or its plain numbers.
    pub(crate) fn input(&self, name: &str) -> Result<PathBuf, Failure> {
        if self.name == "SciPy" {
            return Ok(design::path(name));
        }
        let folder = design::home().join("../target/peers");
        std::fs::create_dir_all(&folder)?;
        let path = folder.join(format!("{name}.txt"));
        let text = peer_input::text(&design::load(name)?)?;
        write_whole(&path, text.as_bytes(), Existing::Replace)?;
        Ok(path)
    }
}

fn read(line: &str) -> Option<Reached> {
    let value: Value = serde_json::from_str(line).ok()?;
    let seconds = value["seconds"].as_array()?.iter().map(Value::as_f64);
    Some(Reached {
        options: value["options"].as_str()?.to_owned(),
        // A merit that is no number is written as such and is no use.
        merit: value["merit"].as_f64().unwrap_or(f64::INFINITY),
        seconds: seconds.collect::<Option<_>>()?,
    })
}
