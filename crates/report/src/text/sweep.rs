//! What `sweep` prints for people.

use std::cmp::Ordering;
use std::collections::BTreeSet;

use driver::sweep::{Plan, PointResult, SweepResults};
use serde_json::Value;
use surface_model::document::Address;

use super::number::{
    NONE, as_written, counted, fixed, fixed_or_dash, significant, significant_or_dash,
};
use super::table::{BLANK, Column, Table};
use super::{WIDTH, paragraph, sections};

/// Most points that are listed; of more only the best.
const MOST_LISTED: usize = 40;

/// The points of a plan, not optimised.
#[must_use]
pub fn points(plan: &Plan) -> String {
    let heads: Vec<String> = plan.axes.iter().map(axis_head).collect();
    let mut columns = vec![(Column::Right, "point")];
    columns.extend(heads.iter().map(|head| (Column::Right, head.as_str())));
    let mut table = Table::new(columns);
    for (number, values) in plan.points.iter().enumerate() {
        let mut row = vec![number.to_string()];
        row.extend(values.iter().map(value));
        table.row(row);
    }
    let title = paragraph(&plan.title, WIDTH, "");
    sections([title, table.text(), format!("{}.", counted(plan.points.len(), "point"))])
}

/// The finished points of a sweep: all, or if they are many those on the front, or the best.
#[must_use]
pub fn results(results: &SweepResults) -> String {
    let listed = listed(results);
    let heads: Vec<String> = results.axes.iter().map(axis_head).collect();
    let mut columns = vec![(Column::Right, "point")];
    columns.extend(heads.iter().map(|head| (Column::Right, head.as_str())));
    columns.extend([
        (Column::Right, "merit "),
        (Column::Right, "worst\nRMS\nwaves"),
        (Column::Right, "ratio\nerror %"),
        (Column::Right, "exit\nslope\nµrad"),
        (Column::Right, "track\nmm"),
    ]);
    let any_crossed = listed.iter().any(|point| crossed(point) > 0);
    columns.extend(any_crossed.then_some((Column::Right, "limits\ncrossed")));
    let mut table = Table::new(columns);
    for point in &listed {
        let limits = any_crossed.then(|| crossed(point).to_string());
        table.row(row(point).into_iter().chain(limits));
    }
    let faults: Vec<String> = results
        .points
        .iter()
        .filter_map(|point| Some(format!("point {}: {}", point.number, point.fault.as_ref()?)))
        .map(|line| paragraph(&line, WIDTH, "  "))
        .take(MOST_LISTED)
        .collect();
    let title = paragraph(&results.title, WIDTH, "");
    sections([
        title,
        table.text(),
        signs(&listed),
        faults.join("\n"),
        without_layout(results),
        front(results),
        closing(results, listed.len()),
    ])
}

fn listed(results: &SweepResults) -> Vec<&PointResult> {
    let mut all: Vec<&PointResult> = results.points.iter().collect();
    if all.len() <= MOST_LISTED {
        all.sort_by(|a, b| by_axes(&a.values, &b.values));
        return all;
    }
    let merit = |point: &PointResult| point.reached.as_ref().map_or(f64::INFINITY, |r| r.merit);
    let mut best: Vec<&PointResult> = if results.front.is_empty() {
        all
    } else {
        let front: BTreeSet<u64> = results.front.iter().copied().collect();
        all.into_iter().filter(|point| front.contains(&point.number)).collect()
    };
    best.sort_by(|a, b| merit(a).total_cmp(&merit(b)));
    best.truncate(MOST_LISTED);
    best
}

/// The order along the axes, the first before the others; of names the order of their letters.
fn by_axes(a: &[Value], b: &[Value]) -> Ordering {
    let pairs = a.iter().zip(b).map(|(a, b)| match (a.as_f64(), b.as_f64()) {
        (Some(a), Some(b)) => a.total_cmp(&b),
        _ => value(a).cmp(&value(b)),
    });
    pairs.fold(Ordering::Equal, Ordering::then)
}

fn row(point: &PointResult) -> Vec<String> {
    let mut row = vec![point.number.to_string()];
    row.extend(point.values.iter().map(value));
    match &point.reached {
        None => row.extend(std::iter::repeat_n(NONE.to_owned(), 5)),
        Some(reached) => row.extend([
            format!("{}{}", significant(reached.merit, 4), if reached.meets { BLANK } else { '!' }),
            significant_or_dash(reached.worst_rms_waves, 3),
            fixed_or_dash(reached.worst_ratio_error_percent, 4),
            fixed_or_dash(reached.worst_exit_slope_urad, 2),
            fixed(reached.track_mm, 2),
        ]),
    }
    row
}

fn crossed(point: &PointResult) -> usize {
    point.reached.as_ref().map_or(0, |reached| reached.limits_crossed)
}

fn signs(listed: &[&PointResult]) -> String {
    let missed = |point: &&&PointResult| point.reached.as_ref().is_some_and(|r| !r.meets);
    if listed.iter().any(|point| missed(&point)) {
        "! a goal missed or a limit crossed".to_owned()
    } else {
        String::new()
    }
}

/// Points whose brief has no layout, by what stands against most that were looked at.
fn without_layout(results: &SweepResults) -> String {
    let mut reasons: Vec<(&str, Vec<String>)> = Vec::new();
    for point in &results.points {
        let Some(reason) = point.no_layout.as_deref() else { continue };
        match reasons.iter_mut().find(|(known, _)| *known == reason) {
            Some((_, numbers)) => numbers.push(point.number.to_string()),
            None => reasons.push((reason, vec![point.number.to_string()])),
        }
    }
    let told = reasons.into_iter().map(|(reason, numbers)| {
        let points = if numbers.len() == 1 { "point" } else { "points" };
        let told = format!("no layout at {points} {}: mostly {reason}", numbers.join(", "));
        paragraph(&told, WIDTH, "  ")
    });
    told.collect::<Vec<_>>().join("\n")
}

fn front(results: &SweepResults) -> String {
    let Some([first, second]) = &results.front_of else { return String::new() };
    let numbers: Vec<String> = results.front.iter().map(u64::to_string).collect();
    let told = format!(
        "Between {first} and {second} no point beats these in both: {}.",
        if numbers.is_empty() { "none".to_owned() } else { numbers.join(", ") }
    );
    paragraph(&told, WIDTH, "")
}

fn closing(results: &SweepResults, listed: usize) -> String {
    let done = results.points.len();
    let meet = results
        .points
        .iter()
        .filter(|point| point.reached.as_ref().is_some_and(|reached| reached.meets))
        .count();
    let mut told = format!("{meet} of {} meet every goal and limit", counted(done, "point"));
    if results.failed > 0 {
        told.push_str(&format!("; {} could not be optimised", results.failed));
    }
    if results.without_layout > 0 {
        let have = if results.without_layout == 1 { "has" } else { "have" };
        told.push_str(&format!("; {} {have} no layout", results.without_layout));
    }
    if let Some(best) = results.best()
        && let Some(reached) = &best.reached
    {
        told.push_str(&format!(
            "; the best is point {}, merit {}",
            best.number,
            significant(reached.merit, 4)
        ));
    }
    if listed < done {
        told.push_str(&format!(". Listed are {listed} of them"));
    }
    paragraph(&format!("{told}."), WIDTH, "")
}

/// An axis by the last steps of its address, in short lines.
fn axis_head(at: &Address) -> String {
    let steps = at.steps();
    let last = steps.len().saturating_sub(2);
    let number = |step: &&str| step.bytes().all(|byte| byte.is_ascii_digit());
    let from = if steps.get(last + 1).is_some_and(number) { last.saturating_sub(2) } else { last };
    steps[from..].join("\n")
}

/// A value of an axis as people read it.
pub(crate) fn value(value: &Value) -> String {
    match value {
        Value::String(text) => text.clone(),
        Value::Array(list) => list.iter().map(self::value).collect::<Vec<_>>().join(", "),
        Value::Number(number) => number.as_f64().map_or_else(|| number.to_string(), short),
        other => other.to_string(),
    }
}

/// A number as written, if that is short.
fn short(number: f64) -> String {
    let written = as_written(number);
    if written.len() <= 8 {
        return written;
    }
    let rounded = significant(number, 6);
    rounded.parse().map_or(rounded, as_written)
}
