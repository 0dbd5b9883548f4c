//! Merit against what was counted while it fell.

use super::axis::Axis;
use super::chart::{Chart, Series, chart};
use super::panel::Panel;
use crate::text::significant;

/// Draws how the merit fell, a curve a method; `runs` are named lists of what is `counted`
/// (iterations, starts) and merit.
#[must_use]
pub(crate) fn merit_curve(counted: &str, runs: &[(String, Vec<(u64, f64)>)], width: f64) -> Panel {
    let series = runs.iter().enumerate().map(|(style, (name, points))| Series {
        name: name.clone(),
        points: thinned(points).map(|&(k, merit)| (k as f64, Some(merit))).collect(),
        style,
        dots: false,
    });
    let drawn = Chart {
        title: format!("Merit against {counted}{}", from_to(runs)),
        x: Axis::linear(counted, ""),
        y: Axis::logarithmic("merit", ""),
        y_holds: Vec::new(),
        series: series.collect(),
        levels: Vec::new(),
        names_room: 0.0,
        marks: Vec::new(),
    };
    chart(&drawn, width, 240.0)
}

/// Where the merit began, and the lowest end of a run.
fn from_to(runs: &[(String, Vec<(u64, f64)>)]) -> String {
    let first = runs.iter().find_map(|(_, points)| points.first());
    let ends = runs.iter().filter_map(|(_, points)| points.last());
    let end = ends.map(|(_, merit)| *merit).min_by(f64::total_cmp);
    match (first, end) {
        (Some((_, from)), Some(to)) => {
            format!(": from {} to {}", significant(*from, 4), significant(to, 4))
        }
        _ => String::new(),
    }
}

/// Most points that a curve is drawn through.
const POINTS: usize = 800;

/// Some of many points, the last among them.
fn thinned(points: &[(u64, f64)]) -> impl Iterator<Item = &(u64, f64)> {
    let each = points.len().div_ceil(POINTS).max(1);
    let last = points.len().saturating_sub(1);
    points.iter().enumerate().filter(move |(k, _)| k % each == 0 || *k == last).map(|(_, p)| p)
}
