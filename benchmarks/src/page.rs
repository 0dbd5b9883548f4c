//! The page of numbers, `benchmarks/README.md`.

use std::fmt::Write;
use std::process::Command;

use driver::write_whole::{Existing, write_whole};

use crate::spread::Spread;
use crate::{
    Failure, bare_loop, derivatives, design, instructions, jobs, more_states, profile, retune,
    search, steps, sweep, threads, tolerance, zoom_states,
};

const HEAD: &str = "# Numbers

Made by `cargo run --release -p benchmarks`; what stands here is what that run measured, targets missed
included. One section alone: `cargo run --release -p benchmarks SECTION`, where SECTION is `jobs` (with
names of designs, to measure only those), `steps`, `more-states`, `derivatives`, `trace`, `states`,
`threads`, `search` (with names likewise), `sweep`, `retune`, `tolerance`, `instructions` or `profile`.
All figures are median (min … max).

The peers: `pip install numpy scipy` for SciPy; `apt-get install libceres-dev` and a C++ compiler for
Ceres, whose program `peers/ceres/build.sh` builds into `target/peers/` on the way (the library as it
is packaged, residuals and derivatives with `-O3 -march=native`); `valgrind` for the
instruction counts, `perf` for the profile. What is missing is skipped and named. By hand:

```sh
benchmarks/peers/ceres/build.sh
cargo run --release -p benchmarks peer-input three-singlets > target/peers/three-singlets.txt
target/peers/ceres-expander target/peers/three-singlets.txt 0 1
python3 benchmarks/peers/scipy_job.py benchmarks/designs/three-singlets.json 0 1
perf record target/release/benchmarks kernel optimise 20000 && perf report
valgrind --tool=callgrind target/release/benchmarks kernel linearise 2000
```

`peers/expander.py` is an independent NumPy program for the same merit; `peers/reference.py` writes
with it what `tests/published/scipy.rs` checks against.
";

const VERDICTS: &str = "## What was wanted and what was measured

Median (min … max) of the ratios of rounds measured in turn; the median decides.

| ratio | wanted | measured | met |
|---|---|---|---|
";

/// A section of the page, and what it says about what was wanted.
pub(crate) struct Section {
    pub(crate) text: String,
    pub(crate) verdicts: Vec<Verdict>,
}

impl Section {
    pub(crate) fn new(introduction: &str) -> Self {
        Self { text: introduction.to_owned(), verdicts: Vec::new() }
    }
}

/// A ratio that was wanted, and the one measured; its median decides.
pub(crate) struct Verdict {
    what: String,
    wanted: String,
    measured: Spread,
    met: bool,
}

impl Verdict {
    /// The ratio should not be above `most`.
    pub(crate) fn at_most(what: String, most: f64, measured: Spread) -> Self {
        Self { what, wanted: format!("at most {most}"), measured, met: measured.median <= most }
    }

    /// The ratio should not be below `least`.
    pub(crate) fn at_least(what: String, least: f64, measured: Spread) -> Self {
        Self { what, wanted: format!("at least {least}"), measured, met: measured.median >= least }
    }
}

type Measure = fn() -> Result<Section, Failure>;

/// Measures everything and writes the page.
pub(crate) fn write() -> Result<(), Failure> {
    let machine = machine()?;
    let (mut verdicts, mut rest) = (String::from(VERDICTS), String::new());
    let mut missed = Vec::new();
    let sections: [(&str, Measure); 13] = [
        ("jobs", || jobs::section(&[])),
        ("steps", steps::section),
        ("more-states", more_states::section),
        ("derivatives", derivatives::section),
        ("trace", bare_loop::section),
        ("states", zoom_states::section),
        ("threads", threads::section),
        ("search", || search::section(&[])),
        ("sweep", sweep::section),
        ("retune", retune::section),
        ("tolerance", tolerance::section),
        ("instructions", instructions::section),
        ("profile", profile::section),
    ];
    for (name, section) in sections {
        eprintln!("{name}");
        // What was measured is not thrown away for one section that failed.
        let section = section().unwrap_or_else(|failure| failed(name, &failure));
        write!(rest, "\n{}", section.text)?;
        for verdict in section.verdicts {
            let Verdict { what, wanted, measured, met } = verdict;
            if !met {
                missed.push(what.clone());
            }
            let met = if met { "yes" } else { "**no**" };
            writeln!(verdicts, "| {what} | {wanted} | {measured} | {met} |")?;
        }
    }
    let missed = if missed.is_empty() { "nothing".to_owned() } else { missed.join("; ") };
    writeln!(verdicts, "\nMissed: {missed}.")?;
    let page = format!("{HEAD}\n{machine}\n{verdicts}{rest}");
    Ok(write_whole(&design::home().join("README.md"), page.as_bytes(), Existing::Replace)?)
}

fn failed(name: &str, failure: &Failure) -> Section {
    eprintln!("{name}: {failure}");
    Section::new(&format!("## {name}\n\nFailed: {failure}\n"))
}

/// The machine and the versions measured.
fn machine() -> Result<String, Failure> {
    let mut text = String::from("## Machine and versions\n\n");
    let cpus = std::fs::read_to_string("/proc/cpuinfo").unwrap_or_default();
    let model = cpus.lines().find_map(|line| line.strip_prefix("model name")?.split(':').nth(1));
    let cores = std::thread::available_parallelism()?;
    let processor = model.map_or("unknown", str::trim);
    let wide = if cpus.contains("avx512f") { ", 512-bit vectors" } else { "" };
    writeln!(text, "- processor: {processor}, {cores} cores{wide}")?;
    let load = std::fs::read_to_string("/proc/loadavg").unwrap_or_default();
    let load: Vec<&str> = load.split_whitespace().take(3).collect();
    writeln!(text, "- load before the run (1, 5, 15 minutes): {}", load.join(", "))?;
    let versions: [(&str, &str, &[&str]); 5] = [
        ("Rust", "rustc", &["--version"]),
        ("C++", "g++", &["-dumpfullversion"]),
        ("Ceres", "dpkg-query", &["-W", "-f", "${Version}", "libceres-dev"]),
        (
            "Python, NumPy, SciPy",
            "python3",
            &[
                "-c",
                "import platform, numpy, scipy; print(platform.python_version(), numpy.__version__, scipy.__version__)",
            ],
        ),
        ("valgrind", "valgrind", &["--version"]),
    ];
    for (name, command, arguments) in versions {
        let output = Command::new(command).args(arguments).output();
        let found = output.ok().filter(|output| output.status.success());
        let version = found.map(|output| String::from_utf8_lossy(&output.stdout).trim().to_owned());
        writeln!(text, "- {name}: {}", version.as_deref().unwrap_or("not installed"))?;
    }
    writeln!(text, "- levenberg-marquardt crate: 0.15")?;
    Ok(text)
}
