//! Retuning at the bench: a whole run of the program, spacings only.

use std::fmt::Write;
use std::process::{Command, Stdio};
use std::time::Instant;

use crate::page::{Section, Verdict};
use crate::spread::Spread;
use crate::{Failure, design};

const ROUNDS: usize = 41;

const INTRODUCTION: &str = "## Retuning the spacings of a lens

`retune` of `configs/river-as-designed.json` after a thickness came back different, everything made:
the whole process, from its start to its end. Needs `cargo build --release -p drawtube`. Wanted: under
50 ms.

| process, ms |
|---|
";

/// The section of the page.
pub(crate) fn section() -> Result<Section, Failure> {
    let program = std::env::current_exe()?.with_file_name("drawtube");
    if !program.exists() {
        return Err("the program is not built: cargo build --release -p drawtube".into());
    }
    let root = design::home().join("..");
    let mut milliseconds = Vec::with_capacity(ROUNDS);
    for _ in 0..ROUNDS {
        let began = Instant::now();
        let status = Command::new(&program)
            .current_dir(&root)
            .args(["retune", "configs/river-as-designed.json", "--made", "/groups/*"])
            .args(["--change", "/groups/exit/elements/0/thicknesses_mm/0=5.12"])
            .stdout(Stdio::null())
            .status()?;
        milliseconds.push(began.elapsed().as_secs_f64() * 1e3);
        if !status.success() {
            return Err(format!("the program ended with {status}").into());
        }
    }
    let took = Spread::of(milliseconds);
    let mut page = Section::new(INTRODUCTION);
    page.verdicts.push(Verdict::at_most("retuning spacings, whole process, ms".into(), 50.0, took));
    writeln!(page.text, "| **{took}** |")?;
    Ok(page)
}
