//! One value of a shipped brief spoilt at a time.

use std::panic::catch_unwind;

use checks::judges::brief::{BRIEFS, judge};
use checks::judges::mutants::all;

/// Judges every `stride`-th mutant; how many were refused, and how many layouts there were.
fn judged(stride: usize) -> (usize, usize) {
    let mutants = BRIEFS.iter().flat_map(|(name, text)| all(name, text));
    let (mut refused, mut layouts) = (0, 0);
    let mut failures = Vec::new();
    for mutant in mutants.step_by(stride) {
        let verdict = catch_unwind(|| judge(mutant.text.as_bytes()));
        match verdict.unwrap_or_else(|_| Err("a panic".into())) {
            Ok(None) => refused += 1,
            Ok(Some(found)) => layouts += found,
            Err(what) => failures.push(format!("{}\n    {what}", mutant.name)),
        }
    }
    assert!(failures.is_empty(), "{} failures\n{}", failures.len(), failures.join("\n"));
    (refused, layouts)
}

#[test]
fn a_sample_of_spoilt_briefs_is_answered_well() {
    let (refused, layouts) = judged(17);
    assert!(refused >= 100 && layouts >= 100, "{refused} {layouts}");
}

/// Minutes in a release build: `cargo test --release -p checks --test hostile -- --ignored`.
#[test]
#[ignore = "takes minutes"]
fn every_spoilt_brief_is_answered_well() {
    println!("{:?}", judged(1));
}
