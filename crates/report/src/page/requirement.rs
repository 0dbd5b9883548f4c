//! The requirement, and whether it is met: first of all.

use driver::cam::MovementCurve;
use driver::design_file::DesignFile;
use maud::{Markup, html};
use merit_function::assessment::Assessment;

use super::Subject;
use super::parts::{number, value_cell};
use crate::text::number::counted;
use crate::text::{as_written, verdict};

/// The verdict, on the states and between them, and a row a goal.
pub(super) fn requirement(subject: &Subject<'_>) -> Markup {
    let Subject { file, assessment, .. } = subject;
    let class = if assessment.meets { "verdict" } else { "verdict missed" };
    let crossed = assessment.limits.iter().filter(|limit| !limit.met).count();
    html! {
        p class=(class) data-meets=(assessment.meets) { (verdict::closing_sentence(file, assessment)) }
        @if let Ok(curve) = &subject.curve { (between_states(curve)) }
        table {
            tr { th.word { "wanted" } th { "within" } th { "worst reached" } th.word { "where" } }
            @for row in rows(file, assessment) {
                tr {
                    td.word { (row.what) }
                    td { (row.within) }
                    (value_cell(row.worst, row.worst.map_or_else(|| "unknown".into(), |v| number(v, 3)), row.missed))
                    td.word { (row.place) }
                }
            }
            tr {
                td.word { "limits kept" }
                td { "all of " (assessment.limits.len()) }
                (value_cell(Some((assessment.limits.len() - crossed) as f64),
                    format!("{}", assessment.limits.len() - crossed), crossed > 0))
                td.word { }
            }
        }
        @for caution in &assessment.cautions { p { strong { "Caution: " } (caution) } }
        @for warning in &assessment.warnings { p { "Warning: " (warning) } }
    }
}

/// Most findings that are told here; all stand with the movement curve.
const MOST_TOLD: usize = 3;

/// Whether the design holds between its states too.
fn between_states(curve: &MovementCurve) -> Markup {
    let wrong: Vec<_> = curve.findings.iter().filter(|finding| finding.wrong).collect();
    let more = wrong.len().saturating_sub(MOST_TOLD);
    html! {
        @if wrong.is_empty() {
            p data-sound="true" { "Between its states, along the movement curve, nothing is wrong either." }
        } @else {
            div.verdict.missed data-sound="false" {
                "Between its states, along the movement curve, it does not hold:"
                ul {
                    @for finding in wrong.iter().take(MOST_TOLD) { li { (finding.told) } }
                    @if more > 0 { li { "and " (counted(more, "finding")) " more, under Movement" } }
                }
            }
        }
    }
}

struct Row {
    what: &'static str,
    within: String,
    worst: Option<f64>,
    missed: bool,
    place: String,
}

/// One row a kind of goal: its worst state.
fn rows(file: &DesignFile, assessment: &Assessment) -> Vec<Row> {
    let marks = verdict::marks(file, assessment);
    let kinds = [
        ("RMS wavefront", "RMS wavefront error, waves"),
        ("ratio error", "error of the ratio, %"),
        ("exit slope", "exit slope at the 1/e² radius, µrad"),
        ("divergence", "divergence of the real beam, mrad"),
        ("error of the diameter", "error of the diameter at its distance, mm"),
        ("error of the focus", "error of the focus, m"),
    ];
    let row = |(begins, what): (&str, &'static str)| {
        let of_kind = marks.iter().filter(|mark| mark.what.starts_with(begins));
        let worst = of_kind.max_by(|a, b| a.size().total_cmp(&b.size()))?;
        Some(Row {
            what,
            within: as_written(worst.within),
            worst: worst.value,
            missed: worst.size() > 1.0,
            place: where_of(&worst.what, begins),
        })
    };
    kinds.into_iter().filter_map(row).collect()
}

/// What follows the kind of goal in its name: the state, and perhaps the wavelength.
fn where_of(what: &str, kind: &str) -> String {
    let rest = what.strip_prefix(kind).unwrap_or(what);
    rest.split_once(" of ").map_or_else(String::new, |(_, at)| at.to_owned())
}
