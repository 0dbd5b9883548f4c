//! Every file in `configs/` does what it is there for.

use std::path::{Path, PathBuf};

use crate::program::{root, run};

fn shipped() -> Vec<PathBuf> {
    let folder = std::fs::read_dir(root().join("configs")).unwrap();
    let mut paths: Vec<PathBuf> = folder.map(|file| file.unwrap().path()).collect();
    paths.sort();
    paths
}

/// The command lines a file is for. Designs are optimised by `streams.rs`, too.
fn lines(path: &Path, scratch: &Path) -> Vec<String> {
    let text = std::fs::read_to_string(path).unwrap();
    let name = path.strip_prefix(root()).unwrap().display();
    let is = |format: &str| text.contains(&format!("\"format\": \"{format}\""));
    match path.extension().and_then(|kind| kind.to_str()) {
        Some("json") if is("drawtube/1") => {
            let mut lines = vec![format!("assess {name}")];
            // Movement curves are of collimated beams alone.
            if !text.contains("\"exit_focus_m\"") {
                lines.push(format!("cam {name} --ratios 3"));
            }
            if text.contains("\"tolerances\"") {
                lines.push(format!("tolerance {name} --systems 3"));
            }
            lines
        }
        Some("json") if is("drawtube-brief/1") => vec![format!("start {name} --most 1")],
        Some("json") if is("drawtube-plan/1") => {
            let stem = path.file_stem().unwrap().to_string_lossy().into_owned();
            vec![format!("sweep {name} --run {}", scratch.join(stem).display())]
        }
        Some("csv") if text.starts_with("serial") => {
            vec![format!("retune configs/river-as-designed.json --batch {name}")]
        }
        Some("csv") if text.starts_with("radius_mm") => {
            vec![format!("retune configs/river-as-designed.json --tool-radii {name}")]
        }
        // The scripts are run by `tests/runs/engine.rs`.
        Some("sh" | "md") => Vec::new(),
        other => panic!("{name}: nothing is known of {other:?}"),
    }
}

#[test]
fn every_shipped_file_runs_with_its_command() {
    let scratch = tempfile::tempdir().unwrap();
    let mut ran = 0;
    for line in shipped().iter().flat_map(|path| lines(path, scratch.path())) {
        let ended = run(&line);
        assert_eq!(ended.status, 0, "{line}: {}", ended.err);
        ran += 1;
    }
    assert!(ran >= 20, "{ran}");
}
