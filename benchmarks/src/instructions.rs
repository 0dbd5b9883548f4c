//! Instructions a call, counted by valgrind's callgrind: the same on every run, whatever else the
//! machine does. valgrind offers no 512-bit vectors, so these are the 256-bit kernels.

use std::fmt::Write;
use std::process::Command;

use driver::optimise::merit_of;
use driver::solve::{Settings, Unwatched, run};
use merit_function::block::{BlockProblem, Linearisation};
use surface_model::bundle::Bundle;

use crate::page::Section;
use crate::{Failure, bare_loop, design};

const INTRODUCTION: &str = "## Instructions

Counted by `valgrind --tool=callgrind` as the difference of two runs of different length, 256-bit
vectors (valgrind knows no wider ones).

| kernel | instructions a call | a unit |
|---|---|---|
";

/// Kernels by name, calls of the shorter run, units of work a call and their name.
const KERNELS: [(&str, usize, f64, &str); 4] = [
    ("trace", 2000, 64.0 * 6.0, "ray and surface (64 rays, 6 spheres)"),
    ("residuals", 2000, 40.0, "residual (three singlets, 5 states, 16 variables)"),
    ("linearise", 1000, 40.0 * 16.0, "entry of the whole Jacobian, same problem"),
    ("optimise", 20, 30.0, "step (three singlets, 13 variables, to convergence)"),
];

/// The section of the page; a line of its own where valgrind is missing.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    if Command::new("valgrind").arg("--version").output().is_err() {
        page.text.push_str("| skipped: valgrind is not installed | | |\n");
        return Ok(page);
    }
    for (kernel, calls, units, unit) in KERNELS {
        let (short, long) = (count(kernel, calls)?, count(kernel, 2 * calls)?);
        let each = (long - short) as f64 / calls as f64;
        writeln!(page.text, "| `{kernel}` | {each:.0} | {:.1} per {unit} |", each / units)?;
    }
    Ok(page)
}

/// Instructions of this program when it does nothing but `calls` calls of a kernel.
fn count(kernel: &str, calls: usize) -> Result<u64, Failure> {
    let output = Command::new("valgrind")
        .args(["--tool=callgrind", "--callgrind-out-file=/dev/null"])
        .arg(std::env::current_exe()?)
        .args(["kernel", kernel, &calls.to_string()])
        .output()?;
    let text = String::from_utf8_lossy(&output.stderr);
    let line = text.lines().find_map(|line| line.split("Collected :").nth(1));
    Ok(line.ok_or("callgrind counted nothing")?.trim().parse()?)
}

/// Calls a kernel over and over, for callgrind or perf to watch.
pub(crate) fn repeat(kernel: &str, calls: usize) -> Result<(), Failure> {
    let mut merit = merit_of(&design::load("river-lidar-2x-6x")?)?;
    let start = merit.variables().start().to_vec();
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
