//! The program needs nothing beside it: no environment, no files but those it is given.

use std::path::Path;
use std::process::{Command, Stdio};

use crate::program::root;

/// Runs the program in an empty folder with an empty environment.
fn alone(arguments: &[&str], input: Option<&Path>) -> String {
    let empty = tempfile::tempdir().unwrap();
    let stdin = input.map_or_else(Stdio::null, |path| std::fs::File::open(path).unwrap().into());
    let output = Command::new(env!("CARGO_BIN_EXE_drawtube-program"))
        .args(arguments)
        .env_clear()
        .current_dir(empty.path())
        .stdin(stdin)
        .output()
        .unwrap();
    assert_eq!(output.status.code(), Some(0), "{arguments:?}: {output:?}");
    let left = std::fs::read_dir(empty.path()).unwrap().count();
    assert_eq!(left, 0, "{arguments:?} left something behind");
    String::from_utf8(output.stdout).unwrap()
}

#[test]
fn everything_is_in_the_program_itself() {
    assert!(alone(&["glass", "N-BK7"], None).contains("1.51680"), "the glass data");
    assert!(alone(&["schema", "design"], None).contains("wavelengths_nm"));
    assert!(alone(&["man"], None).contains(".TH drawtube"));
    assert!(alone(&["completions", "bash"], None).contains("drawtube"));
    let design = root().join(crate::designs::RIVER);
    assert!(alone(&["assess", "-"], Some(&design)).contains("Merit"));
    assert!(alone(&["report", "-", "-o", "-"], Some(&design)).contains("</html>"));
}

/// One version everywhere: what is built, what it says, what is told of it.
#[test]
fn the_version_is_the_same_everywhere() {
    let version = env!("CARGO_PKG_VERSION");
    assert_eq!(alone(&["--version"], None), format!("drawtube {version}\n"));
    let page = alone(&["man"], None);
    assert!(page.contains(&format!("drawtube {version}")), "{page}");
    let news = std::fs::read_to_string(root().join("CHANGELOG.md")).unwrap();
    let newest = news.lines().find_map(|line| line.strip_prefix("## ")).unwrap();
    assert_eq!(newest, version);
    let lock = std::fs::read_to_string(root().join("Cargo.lock")).unwrap();
    for name in ["surface-model", "merit-function", "driver", "report", "drawtube"] {
        assert!(lock.contains(&format!("name = \"{name}\"\nversion = \"{version}\"\n")), "{name}");
    }
}

/// Every file of data says where it comes from, in itself or in the page beside it.
#[test]
fn every_file_of_data_names_its_source() {
    let mut told = 0;
    for folder in [
        "crates/surface-model/data",
        "tests/published/data",
        "tests/published/data/nist",
        "tests/published/data/scipy",
        "configs",
        "benchmarks/designs",
    ] {
        let folder = root().join(folder);
        let page = std::fs::read_to_string(folder.join("README.md")).unwrap_or_default();
        for file in std::fs::read_dir(&folder).unwrap() {
            let path = file.unwrap().path();
            let name = path.file_name().unwrap().to_string_lossy().into_owned();
            if path.is_dir() || name == "README.md" {
                continue;
            }
            let text = std::fs::read_to_string(&path).unwrap();
            let itself = ["\"source\"", "\"provenance\""].iter().any(|key| text.contains(key));
            let by_kind = path
                .extension()
                .is_some_and(|kind| page.contains(&format!("`.{}`", kind.to_string_lossy())));
            assert!(itself || by_kind || page.contains(&format!("`{name}`")), "{}", path.display());
            told += 1;
        }
    }
    assert!(told > 50, "{told}");
}
