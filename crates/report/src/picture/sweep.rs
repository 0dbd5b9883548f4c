//! Pictures of a sweep: a curve over one axis, a map over two, and the front of a trade.

use std::collections::BTreeSet;

use driver::front::front;

use super::axis::{Axis, Scale};
use super::chart::{Chart, Series, chart};
use super::ink::{FAINT, INK, MISS, Stroke, map_colour};
use super::panel::{Anchor, Panel, Word, width_of};

/// A result along an axis: value of the axis and of the result, `None` where there is none.
pub(crate) type Readings = Vec<(f64, Option<f64>)>;

/// A result over one swept axis.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct SweepCurve {
    /// What it shows.
    pub(crate) title: String,
    /// What was swept.
    pub(crate) x: Axis,
    /// What came of it.
    pub(crate) y: Axis,
    /// One or more results, each with its name; a missing value is a point that failed.
    pub(crate) results: Vec<(String, Readings)>,
}

/// Draws a result over one swept axis.
#[must_use]
pub(crate) fn sweep_curve(curve: &SweepCurve, width: f64) -> Panel {
    let series = curve.results.iter().enumerate().map(|(style, (name, points))| Series {
        name: name.clone(),
        points: points.clone(),
        style,
        dots: true,
    });
    let drawn = Chart {
        title: curve.title.clone(),
        x: curve.x.clone(),
        y: curve.y.clone(),
        y_holds: Vec::new(),
        series: series.collect(),
        levels: Vec::new(),
        names_room: 0.0,
        marks: Vec::new(),
    };
    chart(&drawn, width, 280.0)
}

/// What came of a point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Cell {
    /// The result; less is better.
    pub(crate) value: f64,
    /// Whether every goal and limit is met.
    pub(crate) meets: bool,
}

/// A result over two swept axes.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct SweepMap {
    /// What it shows.
    pub(crate) title: String,
    /// Along the bottom.
    pub(crate) x: Axis,
    /// The values along the bottom, as they are to be read.
    pub(crate) x_values: Vec<String>,
    /// Up the side.
    pub(crate) y: Axis,
    /// The values up the side, from the bottom, as they are to be read.
    pub(crate) y_values: Vec<String>,
    /// What came of it.
    pub(crate) value: Axis,
    /// Row by row from the bottom; a missing one is a point that failed.
    pub(crate) cells: Vec<Vec<Option<Cell>>>,
}

/// Room for the key beside a map, px.
pub(super) const KEY: f64 = 96.0;

/// Draws a map: dark is small, light is large, numbers written where there is room, the smallest
/// framed, those that meet everything dotted.
#[must_use]
pub(crate) fn sweep_map(map: &SweepMap, width: f64) -> Panel {
    let names = map.y_values.iter().map(|name| width_of(name, 11.0));
    let left = names.fold(30.0, f64::max) + 12.0;
    let (top, key) = (44.0, KEY);
    let columns = map.x_values.len().max(1) as f64;
    let rows = map.y_values.len().max(1) as f64;
    let cell = [(width - left - key) / columns, ((width - left - key) / columns).clamp(14.0, 34.0)];
    let bottom = top + cell[1] * rows;
    let mut panel = Panel::new(width, bottom + 40.0);
    panel.word([0.0, 12.0], &map.title, Word::TITLE);
    panel.word([0.0, 28.0], &map.y.caption(), Word::PLAIN.in_colour(FAINT));
    let values = || map.cells.iter().flatten().flatten().map(|cell| cell.value);
    if map.cells.iter().flatten().flatten().any(|cell| cell.meets) {
        let told = "a dot: every goal and limit is met";
        panel.word([width, 12.0], told, Word::SMALL.at(Anchor::End));
    }
    let shade = Scale::holding(&map.value, values(), 0.0, 1.0);
    for (row, cells) in map.cells.iter().enumerate() {
        let y = bottom - cell[1] * (row as f64 + 1.0);
        for (column, value) in cells.iter().enumerate() {
            let x = left + cell[0] * column as f64;
            draw_cell(&mut panel, [x, y], cell, value.map(|here| (here, shade.place(here.value))));
        }
        if let Some(name) = map.y_values.get(row) {
            let at = [left - 6.0, y + 0.5 * cell[1] + 4.0];
            panel.word(at, name, Word::PLAIN.at(Anchor::End));
        }
    }
    if let Some([x, y]) = lowest(&map.cells) {
        let at = [left + cell[0] * x as f64, bottom - cell[1] * (y as f64 + 1.0)];
        let [end, below] = [at[0] + cell[0], at[1] + cell[1]];
        let frame = [at, [end, at[1]], [end, below], [at[0], below]];
        let (_, ink) = map_colour(shade.place(map.cells[y][x].map_or(0.0, |cell| cell.value)));
        panel.outline(&frame, "none", 0.0, Stroke::solid(ink, 2.0));
    }
    let widest = map.x_values.iter().map(|name| width_of(name, 10.0)).fold(1.0, f64::max);
    let each = (widest / cell[0]).ceil().max(1.0) as usize;
    for (column, name) in map.x_values.iter().enumerate().step_by(each) {
        let x = left + cell[0] * (column as f64 + 0.5);
        panel.word([x, bottom + 14.0], name, Word::SMALL.at(Anchor::Middle));
    }
    let caption = map.x.caption();
    let end = width - key;
    panel.word([end, bottom + 30.0], &caption, Word::PLAIN.at(Anchor::End).in_colour(FAINT));
    draw_key(&mut panel, &map.value, values(), [end + 16.0, top], bottom);
    panel
}

/// Column and row of the smallest value.
fn lowest(cells: &[Vec<Option<Cell>>]) -> Option<[usize; 2]> {
    let row = |(y, row): (usize, &Vec<Option<Cell>>)| {
        let there = row.iter().enumerate();
        let there = there.filter_map(move |(x, cell)| Some(([x, y], cell.as_ref()?.value)));
        there.collect::<Vec<_>>()
    };
    let values = cells.iter().enumerate().flat_map(row);
    values.min_by(|a, b| a.1.total_cmp(&b.1)).map(|(at, _)| at)
}

/// One cell: its shade and, where there is room, its number; a cross where the point failed.
fn draw_cell(panel: &mut Panel, at: [f64; 2], size: [f64; 2], cell: Option<(Cell, f64)>) {
    let Some((Cell { value, meets }, share)) = cell else {
        let cross = Stroke::solid(MISS, 1.0);
        let (inset, end) = (4.0, [at[0] + size[0] - 4.0, at[1] + size[1] - 4.0]);
        panel.line([at[0] + inset, at[1] + inset], end, cross);
        panel.line([at[0] + inset, end[1]], [end[0], at[1] + inset], cross);
        return;
    };
    let (colour, ink) = map_colour(share);
    // A hair wider than the cell, so that no seam shows.
    panel.block(at, [size[0] + 0.3, size[1] + 0.3], &colour, 1.0);
    let told = crate::text::significant(value, 3);
    if width_of(&told, 10.0) + 4.0 <= size[0] {
        let middle = [at[0] + 0.5 * size[0], at[1] + 0.5 * size[1] + 3.5];
        panel.word(middle, &told, Word::SMALL.at(Anchor::Middle).in_colour(ink));
    }
    if meets {
        panel.dot([at[0] + 4.0, at[1] + 4.0], 1.6, ink, Stroke::solid(ink, 0.0));
    }
}

/// The scale of a map's shades, from `at` down to `bottom`.
pub(super) fn draw_key(
    panel: &mut Panel,
    axis: &Axis,
    values: impl Iterator<Item = f64>,
    at: [f64; 2],
    bottom: f64,
) {
    const STEPS: usize = 32;
    let scale = Scale::holding(axis, values, bottom, at[1]);
    let step = (bottom - at[1]) / STEPS as f64;
    for k in 0..STEPS {
        let (colour, _) = map_colour((k as f64 + 0.5) / STEPS as f64);
        let y = bottom - step * (k as f64 + 1.0);
        panel.block([at[0], y], [12.0, step + 0.3], &colour, 1.0);
    }
    for (value, label) in scale.ticks(4) {
        let y = scale.place(value);
        panel.line([at[0] + 12.0, y], [at[0] + 16.0, y], Stroke::solid(FAINT, 1.0));
        panel.word([at[0] + 19.0, y + 3.5], &label, Word::SMALL);
    }
    panel.word([at[0], at[1] - 8.0], &axis.caption(), Word::SMALL);
}

/// Two results of many designs, and which of them no other beats in both.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Trade {
    /// What it shows.
    pub(crate) title: String,
    /// One result; smaller is better.
    pub(crate) x: Axis,
    /// The other; smaller is better.
    pub(crate) y: Axis,
    /// The designs.
    pub(crate) designs: Vec<TradedDesign>,
}

/// One design of a trade.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct TradedDesign {
    /// Its name; written beside it if it is on the front.
    pub(crate) name: String,
    /// Both results.
    pub(crate) at: [f64; 2],
}

/// Draws a trade: every design a dot, the front a stair.
#[must_use]
pub(crate) fn trade(trade: &Trade, width: f64) -> Panel {
    let (left, top, right) = (58.0, 42.0, 24.0);
    let height = 300.0;
    let bottom = height - 38.0;
    let mut panel = Panel::new(width, height);
    panel.word([0.0, 12.0], &trade.title, Word::TITLE);
    panel.word([0.0, 28.0], &trade.y.caption(), Word::PLAIN.in_colour(FAINT));
    let values = |k: usize| trade.designs.iter().map(move |design| design.at[k]);
    let x = Scale::holding(&trade.x, values(0), left, width - right).roomy(0.05);
    let y = Scale::holding(&trade.y, values(1), bottom, top).roomy(0.05);
    super::chart::frame(&mut panel, &x, &y, [left, bottom], width - right);
    let caption = trade.x.caption();
    let end = [width - right, bottom + 30.0];
    panel.word(end, &caption, Word::PLAIN.at(Anchor::End).in_colour(FAINT));
    let at = |k: usize| [x.place(trade.designs[k].at[0]), y.place(trade.designs[k].at[1])];
    let front = front(&trade.designs.iter().map(|design| design.at).collect::<Vec<_>>());
    let mut stair: Vec<[f64; 2]> = Vec::new();
    for &k in &front {
        let here = at(k);
        if let Some(&[_, above]) = stair.last() {
            stair.push([here[0], above]);
        }
        stair.push(here);
    }
    panel.polyline(&stair, Stroke { width: 1.2, ..Stroke::series(0) });
    let on_front: BTreeSet<usize> = front.iter().copied().collect();
    for k in (0..trade.designs.len()).filter(|&k| trade.designs[k].at.iter().all(|v| v.is_finite()))
    {
        if !on_front.contains(&k) {
            panel.dot(at(k), 2.4, "#ffffff", Stroke::solid(FAINT, 1.0));
        }
    }
    let mut free = f64::NEG_INFINITY;
    for &k in &front {
        let [px, py] = at(k);
        panel.dot([px, py], 3.4, Stroke::series(0).colour, Stroke::solid(INK, 0.8));
        let name = &trade.designs[k].name;
        if px + 6.0 >= free && px + 6.0 + width_of(name, 10.0) <= width {
            panel.word([px + 6.0, py - 5.0], name, Word::SMALL);
            free = px + 12.0 + width_of(name, 10.0);
        }
    }
    panel
}
