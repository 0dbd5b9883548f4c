//! The way over all designed states, and where no continuous movement leads from one to the next.

use merit_function::movement::{Equations, Point, Slide, Stop};
use surface_model::design::Design;

use super::finding::{Finding, FindingKind};
use super::stations::Station;

/// Two solutions at one ratio are the same when no group is farther off than this, mm.
const SAME_PLACE_MM: f64 = 1e-4;

/// Goes from state to state; where the way forward ends, comes back from the next one.
pub(super) fn walk(
    design: &Design,
    equations: &mut Equations,
    knots: &[usize],
    roots: &[Point],
    stations: &[Station],
) -> (Vec<(Station, Point)>, Vec<Finding>) {
    let mut reached: Vec<(Station, Point)> = Vec::new();
    let mut findings = Vec::new();
    let mut rest = stations;
    for (pair, ends) in roots.windows(2).zip(knots.windows(2)) {
        let (from, to) = (&pair[0], &pair[1]);
        let count = rest.iter().position(|station| station.state == Some(ends[1])).unwrap_or(0);
        let (inner, next) = (&rest[1..count], &rest[count..]);
        reached.push((rest[0], from.clone()));
        let ratios: Vec<f64> =
            inner.iter().map(|station| station.ratio).chain([to.ratio]).collect();
        let (mut points, stopped) = equations.follow(from, &ratios);
        let name = |k: usize| design.states[k].name.as_str();
        let names = (name(ends[0]), name(ends[1]));
        if stopped.is_none() {
            let end = points.pop();
            if let Some(end) = end.filter(|end| away_mm(end, to) > SAME_PLACE_MM) {
                findings.push(other_branch(names, from, to, &end, &equations.slide, design));
            }
        }
        reached.extend(inner.iter().copied().zip(points.iter().cloned()));
        if let Some((last, stop)) = stopped {
            let missing = &inner[points.len().min(inner.len())..];
            let back: Vec<f64> = missing.iter().rev().map(|station| station.ratio).collect();
            let (points, stopped) = equations.follow(to, &back);
            let first = stopped.map_or(back.last().copied().unwrap_or(to.ratio), |(at, _)| at);
            findings.push(broken(names, last, first, stop));
            let behind = missing[missing.len() - points.len()..].iter().copied();
            reached.extend(behind.zip(points.into_iter().rev()));
        }
        rest = next;
    }
    if let (Some(station), Some(root)) = (rest.first(), roots.last()) {
        reached.push((*station, root.clone()));
    }
    (reached, findings)
}

fn away_mm(a: &Point, b: &Point) -> f64 {
    let pairs = a.moving_mm.iter().zip(&b.moving_mm);
    pairs.map(|(a, b)| (a - b).abs()).fold(0.0, f64::max)
}

/// Two states whose curves do not meet.
fn other_branch(
    (from_name, to_name): (&str, &str),
    from: &Point,
    to: &Point,
    end: &Point,
    slide: &Slide,
    design: &Design,
) -> Finding {
    let places: Vec<String> = slide
        .moving()
        .iter()
        .zip(end.moving_mm.iter().zip(&to.moving_mm))
        .map(|(&group, (here, there))| {
            format!("{} at {here:.3} mm, not {there:.3} mm", design.groups[group].name)
        })
        .collect();
    Finding {
        kind: FindingKind::BranchChange,
        wrong: true,
        ratios: [from.ratio, to.ratio],
        what: format!("{from_name}, {to_name}"),
        worst: Some(away_mm(end, to)),
        told: format!(
            "no continuous movement leads from {from_name} to {to_name}: followed from \
             {from_name}, the curve ends with {}",
            places.join(", ")
        ),
    }
}

/// A curve that ends between two states.
fn broken((from, to): (&str, &str), last: f64, first: f64, stop: Stop) -> Finding {
    let why = match stop {
        Stop::NoSolution => "the curve turns back there".to_owned(),
        Stop::Fault(fault) => fault.to_string(),
    };
    Finding {
        kind: FindingKind::BranchChange,
        wrong: true,
        ratios: [last.min(first), first.max(last)],
        what: format!("{from}, {to}"),
        worst: None,
        told: format!(
            "no continuous movement leads from {from} to {to}: from {from} the curve reaches only \
             {last:.4}x, from {to} {first:.4}x ({why})"
        ),
    }
}
