//! One value of a shipped design spoilt at a time.

use std::collections::HashMap;
use std::panic::catch_unwind;

use checks::judges::design::{Came, judge};
use checks::judges::mutants::all;
use checks::judges::shipped::DESIGNS;

/// Judges every `stride`-th mutant, the first of them `phase`.
fn judged(stride: usize, phase: usize, iterations: u64) -> HashMap<Came, usize> {
    let mutants = DESIGNS.iter().flat_map(|(name, text)| all(name, text));
    let mut came: HashMap<Came, usize> = HashMap::new();
    let mut failures = Vec::new();
    for mutant in mutants.skip(phase).step_by(stride) {
        let verdict = catch_unwind(|| judge(mutant.text.as_bytes(), iterations));
        match verdict.unwrap_or_else(|_| Err("a panic".into())) {
            Ok(how_far) => *came.entry(how_far).or_default() += 1,
            Err(what) => failures.push(format!("{}\n    {what}", mutant.name)),
        }
    }
    assert!(failures.is_empty(), "{} failures\n{}", failures.len(), failures.join("\n"));
    came
}

#[test]
fn a_sample_of_spoilt_files_is_answered_well() {
    let came = judged(13, 5, 6);
    for (how_far, fewest) in [(Came::Refused, 300), (Came::Assessed, 1), (Came::Optimised, 100)] {
        assert!(came.get(&how_far).is_some_and(|&count| count >= fewest), "{came:?}");
    }
}

/// Minutes in a release build: `cargo test --release -p checks --test hostile -- --ignored`.
#[test]
#[ignore = "takes minutes"]
fn every_spoilt_file_is_answered_well() {
    println!("{:?}", judged(1, 0, 15));
}
