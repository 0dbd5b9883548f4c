//! The table of limits.

use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, LimitAssessment};
use merit_function::limits::LimitKind;

use super::number::{as_written, fixed};
use super::table::{BLANK, Column, Table};
use super::{WIDTH, paragraph};

/// Which limits are told.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Scope {
    /// Of each kind the tightest, and every one that is crossed.
    #[default]
    Tightest,
    /// Every single one.
    All,
}

/// The table of limits; empty if the file has none.
pub(crate) fn limits(file: &DesignFile, assessment: &Assessment, scope: Scope) -> String {
    let mut table =
        Table::new([(Column::Left, "limit"), (Column::Right, "value "), (Column::Left, "at")]);
    for limit in chosen(&assessment.limits, scope) {
        table.row([
            format!("{} {}", name(limit.limit), allowed(limit)),
            format!("{}{}", value(limit), if limit.met { BLANK } else { '!' }),
            place(file, limit),
        ]);
    }
    let told = any_of(assessment, LimitKind::InternalFocus).then_some(FOCUS);
    let told = told.map_or_else(String::new, |told| format!("\n{}", paragraph(told, WIDTH, "")));
    format!("{}{told}", table.text())
}

/// What the number of the limit `internal_focus` is.
pub(crate) const FOCUS: &str = "internal_focus: the least height of the outermost ray, paraxial or \
                                exact, at any surface over its height at entry; below 0 the beam \
                                has crossed the axis.";

pub(crate) fn any_of(assessment: &Assessment, kind: LimitKind) -> bool {
    assessment.limits.iter().any(|limit| limit.limit == kind)
}

pub(crate) fn chosen(limits: &[LimitAssessment], scope: Scope) -> Vec<&LimitAssessment> {
    if scope == Scope::All {
        return limits.iter().collect();
    }
    let mut kinds: Vec<LimitKind> = Vec::new();
    for limit in limits {
        if !kinds.contains(&limit.limit) {
            kinds.push(limit.limit);
        }
    }
    let of_kind = |kind: LimitKind| {
        let tightest = limits
            .iter()
            .filter(|limit| limit.limit == kind)
            .min_by(|a, b| margin(a).total_cmp(&margin(b)));
        limits.iter().filter(move |limit| {
            limit.limit == kind && (!limit.met || tightest.is_some_and(|t| std::ptr::eq(t, *limit)))
        })
    };
    kinds.into_iter().flat_map(of_kind).collect()
}

/// Distance to the nearest end of what is allowed, negative outside.
pub(crate) fn margin(limit: &LimitAssessment) -> f64 {
    let Some(value) = limit.value else {
        // The radius of a flat and a ghost without a focus keep every minimum; what cannot be
        // measured keeps none.
        return if limit.met { f64::INFINITY } else { f64::NEG_INFINITY };
    };
    let below = limit.min.map_or(f64::INFINITY, |min| value - min);
    let above = limit.max.map_or(f64::INFINITY, |max| max - value);
    below.min(above)
}

/// A limit as the file calls it; what no file asks for, in words.
pub(crate) fn name(kind: LimitKind) -> &'static str {
    match kind {
        LimitKind::HousingMm => "ends of the tube, mm",
        kind => kind.word(),
    }
}

pub(crate) fn allowed(limit: &LimitAssessment) -> String {
    match (limit.min, limit.max) {
        (Some(min), Some(max)) => format!("{} to {}", as_written(min), as_written(max)),
        (Some(min), None) => format!("≥ {}", as_written(min)),
        (None, Some(max)) => format!("≤ {}", as_written(max)),
        (None, None) => String::new(),
    }
}

fn value(limit: &LimitAssessment) -> String {
    match limit.value {
        Some(value) => fixed(value, 4),
        None if limit.met && limit.limit == LimitKind::RadiusMm => "flat".to_owned(),
        None if limit.met => "none".to_owned(),
        None => "unknown".to_owned(),
    }
}

/// Where a limit applies, short: group and element as the table of elements has them.
pub(crate) fn place(file: &DesignFile, limit: &LimitAssessment) -> String {
    let at = limit.at.with_names(file.document().value());
    let short = match at.steps().as_slice() {
        ["groups", group, "elements", element, "radii_mm", surface] => {
            format!("{group} {element} surface {surface}")
        }
        ["groups", group, "elements", element, "thicknesses_mm", "0"] if is_single(file, limit) => {
            format!("{group} {element}")
        }
        ["groups", group, "elements", element, "thicknesses_mm", glass] => {
            format!("{group} {element} glass {glass}")
        }
        ["groups", group, "elements", element] => format!("{group} {element}"),
        ["groups", group, "airs_mm", air] => format!("{group} air {air}"),
        ["groups", group] => (*group).to_owned(),
        ["states", state, "spacings_mm", after] => {
            let names = after.parse().ok().and_then(|after: usize| {
                let (front, back) =
                    (file.design.groups.get(after)?, file.design.groups.get(after + 1)?);
                Some(format!("{} to {}", front.name, back.name))
            });
            format!("{state} {}", names.unwrap_or_else(|| format!("spacing {after}")))
        }
        ["states", state] => (*state).to_owned(),
        _ => at.to_string(),
    };
    match (&limit.state, limit.at_ratio) {
        (Some(state), _) if at.steps().first() != Some(&"states") => format!("{short} in {state}"),
        (None, Some(ratio)) => format!("{short} at {}x", fixed(ratio, 2)),
        _ => short,
    }
}

/// Whether the element that a limit is about has one glass.
fn is_single(file: &DesignFile, limit: &LimitAssessment) -> bool {
    let steps = limit.at.steps();
    let index = |step: usize| steps.get(step).and_then(|step| step.parse::<usize>().ok());
    let element = index(1)
        .zip(index(3))
        .and_then(|(group, element)| file.design.groups.get(group)?.elements.get(element));
    element.is_some_and(|element| element.glasses.len() == 1)
}
