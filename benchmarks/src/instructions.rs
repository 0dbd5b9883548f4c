//! Instructions a call, counted by valgrind's callgrind: the same on every run, whatever else the
//! machine does, and on every x86-64 processor with AVX2. The program runs on the processor that
//! valgrind plays, which has AVX2 and nothing wider whatever the real one has; the kernels choose
//! their vectors by that. A program that sees other vectors is not compared, which is a failure.

use std::fmt::Write;
use std::process::Command;

use driver::optimise::merit_of;
use driver::solve::{Settings, Unwatched, run};
use driver::write_whole::{Existing, write_whole};
use merit_function::block::{BlockProblem, Linearisation};
use multiversion::{multiversion, target::target_cfg_f};
use surface_model::bundle::Bundle;

use crate::page::Section;
use crate::{Failure, bare_loop, design};

const INTRODUCTION: &str = "## Instructions

Counted by `valgrind --tool=callgrind` as the difference of two runs of different length, 256-bit
vectors (valgrind knows no wider ones).

| kernel | instructions a call | a unit |
|---|---|---|
";

/// The counts that [`check`] holds the present ones against, one `kernel count` a line.
const COMMITTED: &str = "instructions.txt";
/// Kernels whose counts are committed.
const CHECKED: [&str; 2] = ["trace", "linearise"];
/// Instructions allowed over the committed ones, as a ratio.
const ALLOWED: f64 = 1.05;

/// Kernels by name, calls of the shorter run, units of work a call and their name.
const KERNELS: [(&str, usize, f64, &str); 4] = [
    ("trace", 2000, 64.0 * 6.0, "ray and surface (64 rays, 6 spheres)"),
    ("residuals", 2000, 40.0, "residual (three singlets, 5 states, 16 variables)"),
    ("linearise", 1000, 40.0 * 16.0, "entry of the whole Jacobian, same problem"),
    ("optimise", 20, 38.0, "step (three singlets, 13 variables, to convergence)"),
];

/// The section of the page; a line of its own where valgrind is missing.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    if Command::new("valgrind").arg("--version").output().is_err() {
        page.text.push_str("| skipped: valgrind is not installed | | |\n");
        return Ok(page);
    }
    for (kernel, calls, units, unit) in KERNELS {
        let each = instructions_a_call(kernel, calls)?;
        writeln!(page.text, "| `{kernel}` | {each:.0} | {:.1} per {unit} |", each / units)?;
    }
    Ok(page)
}

/// Counts the kernels whose counts are committed, prints both, and fails where one has grown by
/// more than a twentieth.
pub(crate) fn check() -> Result<(), Failure> {
    let committed = std::fs::read_to_string(design::home().join(COMMITTED))?;
    let mut grown = Vec::new();
    for (kernel, now) in checked()? {
        let line =
            committed.lines().find_map(|line| line.strip_prefix(kernel)?.trim().parse().ok());
        let before: f64 = line.ok_or_else(|| format!("{COMMITTED} has no count of {kernel}"))?;
        let ratio = now / before;
        println!("{kernel}: {now:.0} instructions a call, committed {before:.0}: {ratio:.3}");
        if ratio > ALLOWED {
            grown.push(kernel);
        }
    }
    if grown.is_empty() {
        return Ok(());
    }
    Err(format!(
        "more than 5 % over the committed instructions: {}. If that is what the change is worth, \
         commit what `cargo run --release -p benchmarks instructions commit` writes",
        grown.join(", ")
    )
    .into())
}

/// Writes the present counts where [`check`] looks for them.
pub(crate) fn commit() -> Result<(), Failure> {
    let mut text = String::new();
    for (kernel, count) in checked()? {
        writeln!(text, "{kernel} {count:.0}")?;
    }
    Ok(write_whole(&design::home().join(COMMITTED), text.as_bytes(), Existing::Replace)?)
}

fn checked() -> Result<Vec<(&'static str, f64)>, Failure> {
    let kernels = KERNELS.iter().filter(|(kernel, ..)| CHECKED.contains(kernel));
    kernels.map(|&(kernel, calls, ..)| Ok((kernel, instructions_a_call(kernel, calls)?))).collect()
}

/// The difference of two runs of different length, so that loading a design does not count.
fn instructions_a_call(kernel: &str, calls: usize) -> Result<f64, Failure> {
    let (short, long) = (count(kernel, calls)?, count(kernel, 2 * calls)?);
    Ok((long - short) as f64 / calls as f64)
}

/// Instructions of this program when it does nothing but `calls` calls of a kernel.
fn count(kernel: &str, calls: usize) -> Result<u64, Failure> {
    let output = Command::new("valgrind")
        .args(["--tool=callgrind", "--callgrind-out-file=/dev/null"])
        .arg(std::env::current_exe()?)
        .args(["kernel", kernel, &calls.to_string()])
        .output()?;
    let seen = String::from_utf8_lossy(&output.stdout);
    if seen.trim() != COMPARABLE {
        let sees = format!("under valgrind the kernels see {}, not {COMPARABLE}", seen.trim());
        return Err(format!("{sees}: counts would not compare").into());
    }
    let text = String::from_utf8_lossy(&output.stderr);
    let line = text.lines().find_map(|line| line.split("Collected :").nth(1));
    Ok(line.ok_or("callgrind counted nothing")?.trim().parse()?)
}

/// The vectors of the processor that valgrind plays.
const COMPARABLE: &str = "256-bit vectors";

/// The vectors the kernels choose on this processor, or on the one that valgrind plays.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
fn vectors() -> &'static str {
    let sees = [target_cfg_f!(target_feature = "avx512f"), target_cfg_f!(target_feature = "avx2")];
    match sees {
        [true, _] => "512-bit vectors",
        [_, true] => COMPARABLE,
        _ => "baseline vectors",
    }
}

/// Calls a kernel over and over, for callgrind or perf to watch.
pub(crate) fn repeat(kernel: &str, calls: usize) -> Result<(), Failure> {
    let mut merit = merit_of(&design::load("river-lidar-2x-6x")?)?;
    let start = merit.variables().start().to_vec();
    println!("{}", vectors());
    match kernel {
        "trace" => {
            let train = bare_loop::train()?;
            let heights: Vec<f64> = (0..64).map(|i| 1.8 * (f64::from(i) + 0.5) / 64.0).collect();
            let (mut bundle, mut paths) = (Bundle::new(), vec![0.0; 64]);
            bundle.load([&train], &heights);
            for _ in 0..calls {
                std::hint::black_box(&mut bundle).trace(&mut paths)?;
            }
        }
        "residuals" => {
            let mut residuals = vec![0.0; merit.shape().residuals()];
            for _ in 0..calls {
                merit.residuals(std::hint::black_box(&start), &mut residuals)?;
            }
        }
        "linearise" => {
            let mut linear = Linearisation::zeros(merit.shape());
            for _ in 0..calls {
                merit.linearise(std::hint::black_box(&start), &mut linear)?;
            }
        }
        "optimise" => {
            let mut merit = merit_of(&design::load("three-singlets")?)?;
            let start = merit.variables().start().to_vec();
            for _ in 0..calls {
                run(&mut merit, &start, &Settings::default(), &mut Unwatched)?;
            }
        }
        other => return Err(format!("no kernel {other}").into()),
    }
    Ok(())
}
