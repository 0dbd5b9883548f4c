//! Points of a sweep that are no grid: in the plane of two axes, or along each of several.

use super::PICTURE_WIDTH;
use super::axis::{Axis, Scale};
use super::chart::{cross, frame, levels};
use super::ink::{FAINT, INK, Stroke, map_colour};
use super::panel::{Anchor, Panel, Word, width_of};
use super::sweep::{Cell, KEY, draw_key};

/// Points in the plane of two swept axes.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Plane {
    /// What it shows.
    pub(super) title: String,
    /// Along the bottom.
    pub(super) x: Axis,
    /// Up the side.
    pub(super) y: Axis,
    /// What came of the points; less is better.
    pub(super) value: Axis,
    /// Where each point lies, and what came of it; missing where it failed.
    pub(super) points: Vec<([f64; 2], Option<Cell>)>,
}

const LEFT: f64 = 58.0;
const TOP: f64 = 44.0;
const BOTTOM: f64 = 38.0;

/// Draws points in their plane, shaded as a map; the best wears a ring.
pub(super) fn plane(plane: &Plane) -> Panel {
    let (width, height) = (PICTURE_WIDTH, 340.0);
    let (right, bottom) = (width - KEY, height - BOTTOM);
    let mut panel = headed(&plane.title, &plane.y, [width, height]);
    let along = |k: usize| plane.points.iter().map(move |(at, _)| at[k]);
    let x = Scale::holding(&plane.x, along(0), LEFT, right).roomy(0.03);
    let y = Scale::holding(&plane.y, along(1), bottom, TOP).roomy(0.03);
    frame(&mut panel, &x, &y, [LEFT, bottom], right);
    across(&mut panel, &plane.x, [right, bottom]);
    let cells = || plane.points.iter().map(|(_, cell)| cell.as_ref());
    let values = || cells().flatten().map(|cell| cell.value);
    if cells().flatten().any(|cell| cell.meets) {
        let told = "large: every goal and limit is met; ringed: the best";
        panel.word([width, 12.0], told, Word::SMALL.at(Anchor::End));
    }
    let shade = Scale::holding(&plane.value, values(), 0.0, 1.0);
    let place = |at: [f64; 2]| [x.place(at[0]), y.place(at[1])];
    for (at, cell) in &plane.points {
        match cell {
            Some(Cell { value, meets }) => {
                let (colour, _) = map_colour(shade.place(*value));
                let radius = if *meets { 5.5 } else { 3.5 };
                panel.dot(place(*at), radius, &colour, Stroke::solid(FAINT, 0.5));
            }
            None => cross(&mut panel, place(*at)),
        }
    }
    if let Some(best) = best(cells().map(|cell| cell.map(|cell| cell.value))) {
        let at = place(plane.points[best].0);
        panel.ring(at, 8.5, Stroke::solid(INK, 1.4));
    }
    draw_key(&mut panel, &plane.value, values(), [right + 16.0, TOP], bottom);
    panel
}

/// A swept axis with what came of every point at its values.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Strip {
    /// The axis.
    pub(super) axis: Axis,
    /// What came of the points; less is better.
    pub(super) value: Axis,
    /// Where the points lie along the axis.
    pub(super) along: Along,
    /// What came of each point; missing where it failed.
    pub(super) values: Vec<Option<f64>>,
}

/// Where points lie along an axis.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Along {
    /// At numbers.
    Numbers(Vec<f64>),
    /// At names, each point at the one with this index.
    Names(Vec<String>, Vec<usize>),
}

/// Draws what came of every point over one of several axes; the best wears a ring.
pub(super) fn strip(strip: &Strip, width: f64) -> Panel {
    let height = 190.0;
    let (right, bottom) = (width - 14.0, height - BOTTOM);
    let mut panel = headed(&strip.axis.caption(), &strip.value, [width, height]);
    let reached = strip.values.iter().flatten().copied();
    let y = Scale::holding(&strip.value, reached, bottom, TOP).roomy(0.06);
    let x: Vec<f64> = match &strip.along {
        Along::Numbers(numbers) => {
            let x = Scale::holding(&strip.axis, numbers.iter().copied(), LEFT, right).roomy(0.03);
            frame(&mut panel, &x, &y, [LEFT, bottom], right);
            numbers.iter().map(|number| x.place(*number)).collect()
        }
        Along::Names(names, at) => {
            let each = (right - LEFT) / names.len().max(1) as f64;
            let middle = |k: usize| LEFT + each * (k as f64 + 0.5);
            levels(&mut panel, &y, [LEFT, bottom], right);
            for (k, name) in names.iter().enumerate() {
                if width_of(name, 10.0) <= each {
                    let word = Word::SMALL.at(Anchor::Middle);
                    panel.word([middle(k), bottom + 15.0], name, word);
                }
            }
            at.iter().map(|&k| middle(k)).collect()
        }
    };
    for (x, value) in x.iter().zip(&strip.values) {
        match value {
            Some(value) => {
                let at = [*x, y.place(*value)];
                panel.dot(at, 2.4, Stroke::series(0).colour, Stroke::solid("#ffffff", 0.5));
            }
            None => cross(&mut panel, [*x, bottom]),
        }
    }
    if let Some(best) = best(strip.values.iter().copied())
        && let Some(value) = strip.values[best]
    {
        panel.ring([x[best], y.place(value)], 5.5, Stroke::solid(INK, 1.2));
    }
    panel
}

/// The index of the least value there is.
fn best(values: impl Iterator<Item = Option<f64>>) -> Option<usize> {
    let there = values.enumerate().filter_map(|(k, value)| Some((k, value?)));
    there.min_by(|a, b| a.1.total_cmp(&b.1)).map(|(k, _)| k)
}

fn headed(title: &str, up: &Axis, [width, height]: [f64; 2]) -> Panel {
    let mut panel = Panel::new(width, height);
    panel.word([0.0, 12.0], title, Word::TITLE);
    panel.word([0.0, 28.0], &up.caption(), Word::PLAIN.in_colour(FAINT));
    panel
}

fn across(panel: &mut Panel, axis: &Axis, [right, bottom]: [f64; 2]) {
    let word = Word::PLAIN.at(Anchor::End).in_colour(FAINT);
    panel.word([right, bottom + 30.0], &axis.caption(), word);
}
