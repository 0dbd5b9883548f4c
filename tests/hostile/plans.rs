//! One value of a shipped sweep plan spoilt at a time.

use std::panic::catch_unwind;

use driver::sweep::{PlanFile, Subject};
use surface_model::document::{Complaints, Document};

use super::judge::{finite, refusal};
use super::mutants::all;

/// Name and text of each plan and of the file it is about.
const PLANS: [[&str; 3]; 3] = [
    [
        "tube",
        include_str!("../../configs/river-tube.json"),
        include_str!("../../configs/river-brief.json"),
    ],
    [
        "glass",
        include_str!("../../configs/exit-glass.json"),
        include_str!("../../configs/river-lidar-2x-6x.json"),
    ],
    [
        "wider",
        include_str!("../../configs/wider-beam.json"),
        include_str!("../../configs/river-lidar-2x-6x.json"),
    ],
];

fn parsed(text: &str) -> Result<Document, Complaints> {
    Document::parse("spoilt.json", text.as_bytes())
}

/// Reads a plan; how many points it has, or `None` if it was refused.
fn judge(text: &str, about: &Subject) -> Result<Option<usize>, String> {
    match parsed(text).and_then(PlanFile::read).and_then(|file| file.resolve(about)) {
        Err(complaints) => refusal(&complaints).map(|()| None),
        Ok(plan) => {
            finite("the points", &plan.points)?;
            Ok(Some(plan.points.len()))
        }
    }
}

#[test]
fn spoilt_plans_are_answered_well() {
    let (mut refused, mut points) = (0, 0);
    let mut failures = Vec::new();
    for [name, text, about] in PLANS {
        let file = PlanFile::read(parsed(text).unwrap()).unwrap();
        let about = file.read_subject(parsed(about).unwrap()).unwrap();
        for mutant in all(name, text).into_iter().step_by(3) {
            let verdict = catch_unwind(|| judge(&mutant.text, &about));
            match verdict.unwrap_or_else(|_| Err("a panic".into())) {
                Ok(None) => refused += 1,
                Ok(Some(found)) => points += found,
                Err(what) => failures.push(format!("{}\n    {what}", mutant.name)),
            }
        }
    }
    assert!(failures.is_empty(), "{} failures\n{}", failures.len(), failures.join("\n"));
    assert!(refused >= 50 && points >= 50, "{refused} {points}");
}
