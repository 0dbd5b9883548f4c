//! One value of a shipped brief spoilt at a time.

use std::panic::catch_unwind;
use std::time::{Duration, Instant};

use driver::brief::BriefFile;
use driver::start::Starts;
use surface_model::document::Document;

use super::judge::{finite, refusal};
use super::mutants::all;

const BRIEFS: [(&str, &str); 3] = [
    ("river", include_str!("../../configs/river-brief.json")),
    ("two colours", include_str!("../../configs/two-colour-brief.json")),
    ("quay", include_str!("../../configs/quay-brief.json")),
];

/// Points of the space that are looked at.
const POINTS: u64 = 40;
/// Longest a brief may take, with room for a slow or busy machine.
const LONGEST: Duration = Duration::from_secs(10);

/// Reads a brief and looks at some of its layouts; how many there were, or `None` if it was
/// refused.
fn judge(bytes: &[u8]) -> Result<Option<usize>, String> {
    let began = Instant::now();
    let brief = match Document::parse("spoilt.json", bytes).and_then(BriefFile::read) {
        Ok(brief) => brief,
        Err(complaints) => return refusal(&complaints).map(|()| None),
    };
    let starts = match Starts::of(&brief) {
        Ok(starts) => starts,
        Err(error) if error.to_string().is_empty() => return Err("an error without words".into()),
        Err(_) => return Ok(Some(0)),
    };
    let mut found = 0;
    let points = starts.points(1);
    for number in 0..POINTS {
        if let Ok(layout) = starts.layout(&points.point(number)) {
            found += 1;
            finite("the layout", &layout)?;
            let file = starts.design_file(&layout, &layout.design, "");
            file.map_err(|complaints| format!("no design file: {complaints}"))?;
        }
    }
    if began.elapsed() > LONGEST {
        return Err(format!("took {:?}", began.elapsed()));
    }
    Ok(Some(found))
}

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
