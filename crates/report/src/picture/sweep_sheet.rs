//! The picture of a sweep: a curve over one axis, a map over two, and the trade that was asked for.

use std::collections::{HashMap, HashSet};

use driver::sweep::{PointResult, SweepResults};
use serde_json::Value;
use surface_model::document::Address;

use super::axis::Axis;
use super::axis_name::{axis, axis_at};
use super::bars::{Bar, bars};
use super::panel::{Panel, Word};
use super::scattered::{Along, Plane, Strip, plane, strip};
use super::sheets::{file_of, heading};
use super::sweep::{
    Cell, SweepCurve, SweepMap, Trade, TradedDesign, sweep_curve, sweep_map, trade,
};
use super::{PICTURE_WIDTH, Readings};
use crate::text::fixed;
use crate::text::sweep::value;

/// Draws the finished points of a sweep, as SVG: a curve over one axis, a map of a grid over two,
/// points in the plane of two, else a strip an axis; and the trade that was asked for. `None`
/// without an axis and without a trade.
#[must_use]
pub fn sweep_picture(results: &SweepResults) -> Option<String> {
    let over_axes = match results.axes.as_slice() {
        [] => None,
        [only] => Some(over_one(results, only)),
        [across, up] => over_two(results, across, up).or_else(|| in_plane(results, across, up)),
        _ => None,
    };
    let over_axes = over_axes.or_else(|| along_each(results));
    let panels: Vec<Panel> = over_axes.into_iter().chain(traded(results)).collect();
    (!panels.is_empty()).then(|| file_of(heading(&results.title).into_iter().chain(panels)))
}

const MERIT: &str = "Merit at every point";

/// By factors where the values are positive and span more than one power of ten.
fn axis_of(word: &str, values: impl Iterator<Item = f64> + Clone) -> Axis {
    let least = values.clone().fold(f64::INFINITY, f64::min);
    let most = values.fold(f64::NEG_INFINITY, f64::max);
    axis(word, least > 0.0 && most > 10.0 * least)
}

fn merit_axis() -> Axis {
    Axis::logarithmic("merit", "")
}

fn merit(point: &PointResult) -> Option<f64> {
    point.reached.as_ref().map(|reached| reached.merit)
}

fn reached(point: &PointResult) -> Option<Cell> {
    let reached = point.reached.as_ref()?;
    Some(Cell { value: reached.merit, meets: reached.meets })
}

/// A curve where the axis has numbers, bars where it has names.
fn over_one(results: &SweepResults, axis: &Address) -> Panel {
    let at = |point: &PointResult| point.values.first().and_then(Value::as_f64);
    let mut readings: Readings =
        results.points.iter().filter_map(|point| Some((at(point)?, merit(point)))).collect();
    if readings.len() < results.points.len() {
        let named = results.points.iter().filter_map(|point| {
            Some(Bar { name: point.values.first().map(value)?, value: merit(point)? })
        });
        let named: Vec<Bar> = named.collect();
        let most = named.len();
        return bars(MERIT, &Axis::linear("merit", ""), &named, most, PICTURE_WIDTH);
    }
    readings.sort_by(|a, b| a.0.total_cmp(&b.0));
    let curve = SweepCurve {
        title: MERIT.to_owned(),
        x: axis_at(axis),
        y: merit_axis(),
        results: vec![("merit".to_owned(), readings)],
    };
    sweep_curve(&curve, PICTURE_WIDTH)
}

/// A map with a cell for every pair of values of a grid; points that were drawn have none.
fn over_two(results: &SweepResults, across: &Address, up: &Address) -> Option<Panel> {
    let (xs, ys) = (distinct(results, 0), distinct(results, 1));
    if xs.len() * ys.len() > results.points_of_plan {
        return None;
    }
    let merits: HashMap<[String; 2], Cell> = results
        .points
        .iter()
        .filter_map(|point| Some(([word(point, 0)?, word(point, 1)?], reached(point)?)))
        .collect();
    let cell = |x: &Value, y: &Value| merits.get(&[x.to_string(), y.to_string()]).copied();
    let map = SweepMap {
        title: MERIT.to_owned(),
        x: axis_at(across),
        x_values: labels(&xs),
        y: axis_at(up),
        y_values: labels(&ys),
        value: merit_axis(),
        cells: ys.iter().map(|y| xs.iter().map(|x| cell(x, y)).collect()).collect(),
    };
    Some(sweep_map(&map, PICTURE_WIDTH))
}

/// Points drawn over two axes; names have no place in a plane.
fn in_plane(results: &SweepResults, across: &Address, up: &Address) -> Option<Panel> {
    let number = |point: &PointResult, k: usize| point.values.get(k).and_then(Value::as_f64);
    let place =
        |point: &PointResult| Some(([number(point, 0)?, number(point, 1)?], reached(point)));
    let points: Option<Vec<_>> = results.points.iter().map(place).collect();
    Some(plane(&Plane {
        title: MERIT.to_owned(),
        x: axis_at(across),
        y: axis_at(up),
        value: merit_axis(),
        points: points?,
    }))
}

/// A strip an axis, two beside each other.
fn along_each(results: &SweepResults) -> Option<Panel> {
    const GAP: f64 = 18.0;
    if results.axes.is_empty() || results.points.is_empty() {
        return None;
    }
    let strips = results.axes.iter().enumerate().map(|(k, at)| {
        let drawn = Strip {
            axis: axis_at(at),
            value: merit_axis(),
            along: along(results, k),
            values: results.points.iter().map(merit).collect(),
        };
        strip(&drawn, 0.5 * (PICTURE_WIDTH - GAP))
    });
    let mut head = Panel::new(PICTURE_WIDTH, 14.0);
    head.word([0.0, 12.0], "Merit of every point over each axis, the best ringed", Word::TITLE);
    Some(Panel::stack([head, Panel::grid(strips.collect(), 2, GAP)], 10.0))
}

/// Where the points lie along an axis.
fn along(results: &SweepResults, axis: usize) -> Along {
    let at = |point: &PointResult| point.values.get(axis).and_then(Value::as_f64);
    if let Some(numbers) = results.points.iter().map(at).collect() {
        return Along::Numbers(numbers);
    }
    let names = distinct(results, axis);
    let index = |point: &PointResult| {
        let value = point.values.get(axis);
        value.and_then(|value| names.iter().position(|name| name == value)).unwrap_or(0)
    };
    Along::Names(names.iter().map(value).collect(), results.points.iter().map(index).collect())
}

/// Values as they are to be read: numbers with as many decimals as tell them apart.
fn labels(values: &[Value]) -> Vec<String> {
    let numbers: Option<Vec<f64>> = values.iter().map(Value::as_f64).collect();
    let Some(numbers) = numbers else { return values.iter().map(value).collect() };
    let gaps = numbers.windows(2).map(|pair| (pair[1] - pair[0]).abs());
    let gap = gaps.fold(f64::INFINITY, f64::min);
    let is_near = |decimals: usize| {
        let by = 10.0_f64.powi(decimals as i32);
        numbers.iter().all(|v| ((v * by).round() / by - v).abs() <= 0.05 * gap)
    };
    match (0..=6).find(|&decimals| is_near(decimals)) {
        Some(decimals) if gap.is_finite() => {
            numbers.iter().map(|&number| fixed(number, decimals)).collect()
        }
        _ => values.iter().map(value).collect(),
    }
}

/// The value of a point on an axis, as JSON.
fn word(point: &PointResult, axis: usize) -> Option<String> {
    point.values.get(axis).map(Value::to_string)
}

/// Values along an axis, numbers in their order, anything else as it comes.
fn distinct(results: &SweepResults, axis: usize) -> Vec<Value> {
    let mut seen = HashSet::new();
    let all = results.points.iter().filter_map(|point| point.values.get(axis));
    let mut values: Vec<Value> =
        all.filter(|value| seen.insert(value.to_string())).cloned().collect();
    if values.iter().all(Value::is_number) {
        let number = |value: &Value| value.as_f64().unwrap_or(f64::INFINITY);
        values.sort_by(|a, b| number(a).total_cmp(&number(b)));
    }
    values
}

fn traded(results: &SweepResults) -> Option<Panel> {
    let [x, y] = results.front_of.as_ref()?;
    let designs = results
        .weighed
        .iter()
        .map(|(number, at)| TradedDesign { name: number.to_string(), at: *at });
    let picture = Trade {
        title: "The trade; points that no other beats are numbered".to_owned(),
        x: axis_of(x, results.weighed.iter().map(|(_, at)| at[0])),
        y: axis_of(y, results.weighed.iter().map(|(_, at)| at[1])),
        designs: designs.collect(),
    };
    (!picture.designs.is_empty()).then(|| trade(&picture, PICTURE_WIDTH))
}
