//! Several designs side by side.

use maud::{Markup, html};
use merit_function::assessment::Assessment;

use super::{Subject, figure, name_of, parts};
use crate::picture::layout;
use crate::text::number::NONE;
use crate::text::{fixed, significant, significant_or_dash};

/// A table with a column a design, their layouts, and a sentence at the end.
pub(super) fn compare(subjects: &[Subject<'_>]) -> Markup {
    let mut heads = vec!["".to_owned()];
    heads.extend(subjects.iter().map(|subject| subject.name.clone()));
    let heads: Vec<&str> = heads.iter().map(String::as_str).collect();
    html! {
        h2 { "Side by side" }
        (parts::table_of(&heads, &rows(subjects).into_iter().map(dashed).collect::<Vec<_>>()))
        p { strong { (sentence(subjects)) } }
        div.pair {
            @for subject in subjects {
                div {
                    h3 { (subject.name) }
                    p.faint { (name_of(subject)) }
                    (figure(layout(&subject.file.design, subject.curve.as_ref().ok().copied(), 480.0), &subject.name))
                }
            }
        }
    }
}

fn rows(subjects: &[Subject<'_>]) -> Vec<Vec<String>> {
    let row = |name: &str, value: &dyn Fn(&Subject<'_>) -> String| {
        let values = subjects.iter().map(value);
        std::iter::once(name.to_owned()).chain(values).collect::<Vec<String>>()
    };
    let worst =
        |assessment: &Assessment,
         value: fn(&merit_function::assessment::StateAssessment) -> Option<f64>| {
            let values: Option<Vec<f64>> = assessment.states.iter().map(value).collect();
            significant_or_dash(values.map(|v| v.iter().map(|v| v.abs()).fold(0.0, f64::max)), 3)
        };
    vec![
        row("requirement", &|s| if s.assessment.meets { "met" } else { "not met" }.to_owned()),
        row("merit", &|s| significant_or_dash(s.assessment.merit.total, 4)),
        row("worst RMS wavefront, waves", &|s| {
            worst(s.assessment, |state| {
                state
                    .wavefront
                    .iter()
                    .map(|w| w.rms_waves)
                    .try_fold(0.0, |most: f64, rms| Some(most.max(rms?)))
            })
        }),
        row("worst error of the ratio, %", &|s| {
            worst(s.assessment, |state| state.ratio_error_percent)
        }),
        row("worst exit slope, µrad", &|s| worst(s.assessment, |state| state.exit_slope_urad)),
        row("limits crossed", &|s| {
            s.assessment.limits.iter().filter(|l| !l.met).count().to_string()
        }),
        row("states", &|s| s.file.design.states.len().to_string()),
        row("ratios", &|s| {
            let ratios = || s.file.design.states.iter().map(|state| state.ratio);
            let (low, high) =
                ratios().fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), r| (l.min(r), h.max(r)));
            format!("{low} to {high}")
        }),
        row("groups, elements", &|s| {
            let groups = &s.file.design.groups;
            let elements: usize = groups.iter().map(|group| group.elements.len()).sum();
            format!("{}, {elements}", groups.len())
        }),
        row("tube, mm", &|s| fixed(s.file.design.housing.track_mm, 2)),
        row("largest travel, mm", &|s| match s.curve {
            Ok(curve) => {
                fixed(curve.groups.iter().map(|group| group.travel_mm).fold(0.0, f64::max), 2)
            }
            Err(_) => "–".into(),
        }),
        row("mass of glass, g", &|s| {
            let masses: Option<f64> =
                s.assessment.elements.iter().map(|element| element.mass_g).sum();
            significant_or_dash(masses, 3)
        }),
    ]
}

/// A number that has no meaning is a dash, as everywhere on the page.
fn dashed(row: Vec<String>) -> Vec<String> {
    row.into_iter().map(|cell| if cell == NONE { "–".to_owned() } else { cell }).collect()
}

/// The best held against the others.
fn sentence(subjects: &[Subject<'_>]) -> String {
    let merit = |s: &&Subject<'_>| s.assessment.merit.total;
    let mut told: Vec<(&Subject<'_>, f64)> =
        subjects.iter().filter_map(|s| Some((s, merit(&s)?))).collect();
    told.sort_by(|a, b| a.1.total_cmp(&b.1));
    let [(best, lowest), (next, second), ..] = told.as_slice() else {
        return "Without the merit of at least two designs there is nothing to compare.".into();
    };
    let longer = best.file.design.housing.track_mm - next.file.design.housing.track_mm;
    let length = match longer {
        by if by > 0.0 => format!(", {} mm longer", significant(by, 3)),
        by if by < 0.0 => format!(", {} mm shorter", significant(-by, 3)),
        _ => ", as long".to_owned(),
    };
    let times = if *lowest > 0.0 { second / lowest } else { f64::INFINITY };
    let better = if times.is_finite() && times < 1e6 {
        format!("has a merit {} times smaller than", significant(times, 2))
    } else {
        "has a merit far smaller than".to_owned()
    };
    format!("{} {better} {}{length}.", best.name, next.name)
}
