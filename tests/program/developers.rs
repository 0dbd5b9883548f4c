//! Every file that DEVELOPERS.md names is there.

use std::path::Path;

use crate::program::root;

/// Every file and folder below `folder`, folders with a slash behind.
fn paths_in(folder: &Path, paths: &mut Vec<String>) {
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        let is_folder = path.is_dir();
        let relative = path.strip_prefix(root()).unwrap().to_str().unwrap();
        paths.push(format!("/{relative}{}", if is_folder { "/" } else { "" }));
        if is_folder {
            paths_in(&path, paths);
        }
    }
}

/// `a/{b,c}` as `a/b` and `a/c`.
fn expanded(name: &str) -> Vec<String> {
    let Some((before, rest)) = name.split_once('{') else { return vec![name.to_owned()] };
    let (choices, after) = rest.split_once('}').unwrap();
    choices.split(',').flat_map(|one| expanded(&format!("{before}{}{after}", one.trim()))).collect()
}

/// Names between backticks that are paths of the repository.
fn named(page: &str) -> Vec<String> {
    let blocks: String = page.split("```").step_by(2).collect();
    let names = blocks.split('`').skip(1).step_by(2).filter(|name| {
        let is_path = name.contains('/') || name.ends_with(".rs");
        // What a reader fills in, what a search leaves behind, and command lines.
        let is_other = name.contains("NAME") || name.starts_with("target/") || name.contains(' ');
        is_path && !is_other
    });
    names.flat_map(expanded).collect()
}

#[test]
fn every_file_it_names_is_there() {
    let page = std::fs::read_to_string(root().join("DEVELOPERS.md")).unwrap();
    let mut paths = Vec::new();
    for folder in [".ci", "benchmarks", "configs", "crates", "tests"] {
        paths.push(format!("/{folder}/"));
        paths_in(&root().join(folder), &mut paths);
    }
    let names = named(&page);
    assert!(names.len() > 80, "only {} files are named", names.len());
    for name in names {
        let end = format!("/{name}");
        let is_there = |path: &String| path.strip_suffix('/').unwrap_or(path).ends_with(&end);
        let is_there = paths.iter().any(|path| path.ends_with(&end) || is_there(path));
        assert!(is_there, "DEVELOPERS.md names {name}, which is not there");
    }
}
