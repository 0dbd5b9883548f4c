//! Every console block of the README is what the program prints, effort of the solver aside.

use std::path::Path;
use std::process::Command;

use driver::write_whole::{Existing, write_whole};

use crate::program::{root, run_on, without_effort};

/// A command line of the README and what it says the program prints.
struct Block {
    line: String,
    printed: String,
}

fn blocks(readme: &str) -> Vec<Block> {
    let parts = readme.split("```console\n$ ").skip(1);
    let block = |part: &str| {
        let text = part.split("\n```").next().unwrap_or_default();
        let (line, printed) = text.split_once('\n').unwrap_or((text, ""));
        Block { line: line.to_owned(), printed: printed.to_owned() }
    };
    parts.map(block).collect()
}

/// The folder the tour is taken in: the shipped designs, and one with a slip of the pen.
pub fn scene(folder: &Path) {
    let configs = folder.join("configs");
    std::fs::create_dir(&configs).unwrap();
    for file in std::fs::read_dir(root().join("configs")).unwrap() {
        let file = file.unwrap();
        std::fs::copy(file.path(), configs.join(file.file_name())).unwrap();
    }
    let design = std::fs::read_to_string(configs.join("river-lidar-2x-6x.json")).unwrap();
    let slip = design.replace(r#"thicknesses_mm": [2.0]"#, r#"thiknesses_mm": [2.0]"#);
    assert_ne!(slip, design);
    write_whole(&folder.join("wrong.json"), slip.as_bytes(), Existing::Keep).unwrap();
}

#[test]
fn every_block_is_what_the_program_prints() {
    let readme = std::fs::read_to_string(root().join("README.md")).unwrap();
    let folder = tempfile::tempdir().unwrap();
    scene(folder.path());
    let blocks = blocks(&readme);
    assert!(blocks.len() >= 6, "the tour has come to an end too soon");
    for Block { line, printed } in blocks {
        let arguments: Vec<&str> = line.strip_prefix("drawtube ").unwrap().split(' ').collect();
        let output = Command::new(env!("CARGO_BIN_EXE_drawtube-program"))
            .args(arguments)
            .env_clear()
            .current_dir(folder.path())
            .output()
            .unwrap();
        let told = String::from_utf8([output.stdout, output.stderr].concat()).unwrap();
        assert_eq!(without_effort(told.trim_end()), without_effort(&printed), "$ {line}");
    }
}

/// What stands in the README as a whole file is one that works.
#[test]
fn every_file_that_is_shown_works() {
    let readme = std::fs::read_to_string(root().join("README.md")).unwrap();
    let shown: Vec<&str> = readme
        .split("```json\n")
        .skip(1)
        .map(|rest| rest.split("```").next().unwrap_or_default())
        .collect();
    assert!(!shown.is_empty());
    for file in shown {
        let ended = run_on("start - --most 1", file);
        assert_eq!(ended.status, 0, "{}", ended.err);
    }
}

/// The table of tolerances says what the grades are.
#[test]
fn the_grades_are_those_of_the_program() {
    use driver::tolerance::{Grade, Kind};
    let readme = std::fs::read_to_string(root().join("README.md")).unwrap();
    for kind in Kind::ALL {
        let word = format!("`{}`", kind.word());
        let row = readme.lines().find(|line| line.starts_with('|') && line.contains(&word));
        let row = row.unwrap_or_else(|| panic!("{word} is not in the README"));
        let cells: Vec<&str> = row.split('|').map(str::trim).collect();
        for (grade, cell) in
            [Grade::Ordinary, Grade::Fine, Grade::Finest].into_iter().zip(&cells[3..])
        {
            let Some(value) = grade.tolerance(kind) else { continue };
            let told = cell.split(", ").any(|told| told.parse() == Ok(value));
            assert!(told, "{word} {}: {cell}, {value}", grade.word());
        }
    }
}
