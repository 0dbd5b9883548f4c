//! The picture of a sweep: a curve over one axis, a map over two, and the trade that was asked for.

use std::collections::{HashMap, HashSet};

use driver::sweep::{PointResult, SweepResults};
use serde_json::Value;
use surface_model::document::Address;

use super::axis::Axis;
use super::bars::{Bar, bars};
use super::panel::Panel;
use super::sheets::{file_of, heading};
use super::sweep::{SweepCurve, SweepMap, Trade, TradedDesign, sweep_curve, sweep_map, trade};
use super::{PICTURE_WIDTH, Readings};
use crate::text::sweep::value;

/// Draws the finished points of a sweep, as SVG; `None` where neither one axis, a grid over two, nor
/// a trade gives anything to draw.
#[must_use]
pub fn sweep_picture(results: &SweepResults) -> Option<String> {
    let over_axes = match results.axes.as_slice() {
        [only] => Some(over_one(results, only)),
        [across, up] => over_two(results, across, up),
        _ => None,
    };
    let panels: Vec<Panel> = over_axes.into_iter().chain(traded(results)).collect();
    (!panels.is_empty()).then(|| file_of(heading(&results.title).into_iter().chain(panels)))
}

const MERIT: &str = "Merit at every point";

/// By factors where the values are positive and span more than one power of ten.
fn axis_of(name: &str, values: impl Iterator<Item = f64> + Clone) -> Axis {
    let least = values.clone().fold(f64::INFINITY, f64::min);
    let most = values.fold(f64::NEG_INFINITY, f64::max);
    let far = least > 0.0 && most > 10.0 * least;
    if far { Axis::logarithmic(name, "") } else { Axis::linear(name, "") }
}

fn merit(point: &PointResult) -> Option<f64> {
    point.reached.as_ref().map(|reached| reached.merit)
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
        x: Axis::linear(&axis.to_string(), ""),
        y: Axis::logarithmic("merit", ""),
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
    let merits: HashMap<[String; 2], f64> = results
        .points
        .iter()
        .filter_map(|point| Some(([word(point, 0)?, word(point, 1)?], merit(point)?)))
        .collect();
    let cell = |x: &Value, y: &Value| merits.get(&[x.to_string(), y.to_string()]).copied();
    let map = SweepMap {
        title: MERIT.to_owned(),
        x: Axis::linear(&across.to_string(), ""),
        x_values: xs.iter().map(value).collect(),
        y: Axis::linear(&up.to_string(), ""),
        y_values: ys.iter().map(value).collect(),
        value: Axis::logarithmic("merit", ""),
        cells: ys.iter().map(|y| xs.iter().map(|x| cell(x, y)).collect()).collect(),
    };
    Some(sweep_map(&map, PICTURE_WIDTH))
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
