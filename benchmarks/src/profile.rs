//! Where the time goes, by function, as `perf` samples it.

use std::fmt::Write;
use std::process::Command;

use crate::page::Section;
use crate::{Failure, design};

/// Kernels and how often they are called for a second or two of samples.
const KERNELS: [(&str, &str); 2] = [("optimise", "8000"), ("linearise", "500000")];
const ROWS: usize = 12;

const INTRODUCTION: &str = "## Where the time goes

Share of samples by function (`perf record`), one thread: `optimise` is the three singlets from start
to convergence, over and over; `linearise` the residuals and whole Jacobian of the river lidar.

| kernel | share | function |
|---|---|---|
";

/// The section of the page; a line of its own where perf is missing.
pub(crate) fn section() -> Result<Section, Failure> {
    let mut page = Section::new(INTRODUCTION);
    let data = design::home().join("../target/peers/perf.data");
    std::fs::create_dir_all(design::home().join("../target/peers"))?;
    for (kernel, calls) in KERNELS {
        let recorded = Command::new("perf")
            .args(["record", "-q", "-o"])
            .arg(&data)
            .arg(std::env::current_exe()?)
            .args(["kernel", kernel, calls])
            .output();
        if !recorded.is_ok_and(|output| output.status.success()) {
            page.text.push_str("| skipped: perf is not installed or may not sample | | |\n");
            return Ok(page);
        }
        let report = Command::new("perf")
            .args(["report", "--stdio", "--no-children", "-F", "overhead,symbol", "-i"])
            .arg(&data)
            .output()?;
        let text = String::from_utf8_lossy(&report.stdout);
        let lines = text.lines().filter(|line| !line.starts_with('#') && line.contains('%'));
        for line in lines.take(ROWS) {
            let mut parts = line.split_whitespace();
            let (share, rest) = (parts.next(), parts.skip(1).collect::<Vec<_>>().join(" "));
            let name = rest.split("_avx").next().unwrap_or_default();
            writeln!(page.text, "| {kernel} | {} | `{name}` |", share.unwrap_or_default())?;
        }
    }
    Ok(page)
}
