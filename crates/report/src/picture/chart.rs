//! Curves over an axis, each with its name at its end.

use super::axis::{Axis, Scale};
use super::ink::{FAINT, HAIR, INK, MISS, Stroke, WORDS};
use super::panel::{Anchor, Panel, Word, width_of};

/// One curve.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Series {
    /// Its name, written at its end.
    pub(crate) name: String,
    /// Its points; where the value is missing the curve is interrupted.
    pub(crate) points: Vec<(f64, Option<f64>)>,
    /// Which colour and dash, by number.
    pub(crate) style: usize,
    /// Whether every point gets a dot.
    pub(crate) dots: bool,
}

/// A value that curves are held against.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Level {
    /// Its name.
    pub(crate) name: String,
    /// The value.
    pub(crate) value: f64,
}

/// Curves over an axis.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Chart {
    /// What it shows.
    pub(crate) title: String,
    /// Along the bottom.
    pub(crate) x: Axis,
    /// Up the side.
    pub(crate) y: Axis,
    /// Values that the side holds besides those of the curves: the same for charts to be compared.
    pub(crate) y_holds: Vec<f64>,
    /// The curves.
    pub(crate) series: Vec<Series>,
    /// Goals and limits.
    pub(crate) levels: Vec<Level>,
    /// The least room for names at the right, px: the same for charts below each other.
    pub(crate) names_room: f64,
    /// Abscissae that stand out, each with a name: the designed states.
    pub(crate) marks: Vec<(f64, String)>,
}

/// Room around the field, px.
const LEFT: f64 = 58.0;
const TOP: f64 = 50.0;
const BOTTOM: f64 = 36.0;

/// Draws a chart.
#[must_use]
pub(crate) fn chart(chart: &Chart, width: f64, height: f64) -> Panel {
    let names = chart.series.iter().map(|series| series.name.as_str());
    let names = names.chain(chart.levels.iter().map(|level| level.name.as_str()));
    let right = names.map(room_of).fold(chart.names_room.max(28.0), f64::max);
    let field = Field::of(chart, [LEFT, TOP], [width - right, height - BOTTOM]);
    let mut panel = Panel::new(width, height);
    panel.word([0.0, 12.0], &chart.title, Word::TITLE);
    field.axes(chart, &mut panel);
    for level in &chart.levels {
        let y = field.y.place(level.value);
        panel.line([LEFT, y], [field.end[0], y], Stroke::dashed(MISS, 1.0, "1 3"));
    }
    for series in &chart.series {
        field.curve(series, &mut panel);
    }
    field.names(chart, &mut panel);
    panel
}

/// The room that a name at the end of a curve takes, px.
pub(super) fn room_of(name: &str) -> f64 {
    width_of(name, WORDS) + 14.0
}

/// The field that curves are drawn on.
struct Field {
    x: Scale,
    y: Scale,
    end: [f64; 2],
}

impl Field {
    fn of(chart: &Chart, start: [f64; 2], end: [f64; 2]) -> Self {
        let points = || chart.series.iter().flat_map(|series| &series.points);
        let marks = chart.marks.iter().map(|(x, _)| *x);
        let x = Scale::holding(&chart.x, points().map(|(x, _)| *x).chain(marks), start[0], end[0]);
        let levels = chart.levels.iter().map(|level| level.value);
        let values = points().filter_map(|(_, y)| *y).chain(levels);
        let values = values.chain(chart.y_holds.iter().copied());
        let y = Scale::holding(&chart.y, values, end[1], start[1]).roomy(0.06);
        Self { x, y, end }
    }

    fn axes(&self, chart: &Chart, panel: &mut Panel) {
        let [right, bottom] = self.end;
        frame(panel, &self.x, &self.y, [LEFT, bottom], right);
        for (mark, name) in &chart.marks {
            let x = self.x.place(*mark);
            panel.line([x, TOP], [x, bottom], Stroke::dashed(HAIR, 0.8, "4 3"));
            panel.word([x, TOP - 4.0], name, Word::SMALL.at(Anchor::Middle));
        }
        let caption = chart.x.caption();
        panel.word([right, bottom + 30.0], &caption, Word::PLAIN.at(Anchor::End).in_colour(FAINT));
        let unit = chart.y.caption();
        panel.word([0.0, 26.0], &unit, Word::PLAIN.in_colour(FAINT));
    }

    fn at(&self, x: f64, y: f64) -> [f64; 2] {
        [self.x.place(x), self.y.place(y)]
    }

    fn curve(&self, series: &Series, panel: &mut Panel) {
        let stroke = Stroke::series(series.style);
        let mut run = Vec::new();
        for (x, y) in &series.points {
            match y {
                Some(y) if y.is_finite() => run.push(self.at(*x, *y)),
                _ => {
                    panel.polyline(&run, stroke);
                    run.clear();
                }
            }
        }
        panel.polyline(&run, stroke);
        for (x, y) in series.points.iter().filter(|_| series.dots) {
            if let Some(y) = y {
                panel.dot(self.at(*x, *y), 2.4, stroke.colour, Stroke::solid("#ffffff", 0.6));
            }
        }
    }

    /// Names at the ends of their curves, pushed apart where they would meet.
    fn names(&self, chart: &Chart, panel: &mut Panel) {
        let last = |series: &Series| series.points.iter().rev().find_map(|(_, y)| *y);
        let mut names: Vec<(f64, &str, &'static str)> = chart
            .series
            .iter()
            .filter_map(|series| {
                let colour = Stroke::series(series.style).colour;
                Some((self.y.place(last(series)?), series.name.as_str(), colour))
            })
            .collect();
        let levels = chart.levels.iter();
        names.extend(levels.map(|l| (self.y.place(l.value), l.name.as_str(), FAINT)));
        names.retain(|(_, name, _)| !name.is_empty());
        names.sort_by(|a, b| a.0.total_cmp(&b.0));
        let ends: Vec<f64> = names.iter().map(|name| name.0).collect();
        let room = [TOP, self.end[1] - 2.0];
        let right = self.end[0];
        for ((end, name, colour), y) in names.iter().zip(spread(&ends, 12.0, room)) {
            panel.line([right + 1.0, *end], [right + 8.0, y], Stroke::solid(colour, 0.8));
            let colour = if *colour == "#E69F00" || *colour == "#56B4E9" { INK } else { colour };
            panel.word([right + 10.0, y + 3.5], name, Word::PLAIN.in_colour(colour));
        }
    }
}

/// A cross where something failed.
pub(super) fn cross(panel: &mut Panel, [x, y]: [f64; 2]) {
    const ARM: f64 = 2.6;
    panel.line([x - ARM, y - ARM], [x + ARM, y + ARM], Stroke::solid(MISS, 1.0));
    panel.line([x - ARM, y + ARM], [x + ARM, y - ARM], Stroke::solid(MISS, 1.0));
}

/// The frame of a field whose corner is at `[left, bottom]`: hairlines across, ticks below.
pub(crate) fn frame(panel: &mut Panel, x: &Scale, y: &Scale, corner: [f64; 2], right: f64) {
    levels(panel, y, corner, right);
    let [left, bottom] = corner;
    let about = ((right - left) / 70.0).clamp(2.0, 10.0) as usize;
    for (value, label) in x.ticks(about) {
        let at = x.place(value);
        panel.line([at, bottom], [at, bottom + 4.0], Stroke::solid(FAINT, 1.0));
        panel.word([at, bottom + 15.0], &label, Word::SMALL.at(Anchor::Middle));
    }
}

/// The hairlines across a field and its bottom.
pub(super) fn levels(panel: &mut Panel, y: &Scale, [left, bottom]: [f64; 2], right: f64) {
    for (value, label) in y.ticks(5) {
        let at = y.place(value);
        panel.line([left, at], [right, at], Stroke::solid(HAIR, 0.6));
        panel.word([left - 6.0, at + 3.5], &label, Word::SMALL.at(Anchor::End));
    }
    panel.line([left, bottom], [right, bottom], Stroke::solid(FAINT, 1.0));
}

/// Places at least `apart` from each other, in order and as near as that lets them be to where
/// they belong, within `room` if it is large enough.
pub(crate) fn spread(wanted: &[f64], apart: f64, room: [f64; 2]) -> Vec<f64> {
    let mut places: Vec<f64> = wanted.iter().map(|y| y.clamp(room[0], room[1])).collect();
    for i in 1..places.len() {
        places[i] = places[i].max(places[i - 1] + apart);
    }
    let mut most = room[1];
    for place in places.iter_mut().rev() {
        *place = place.min(most);
        most = *place - apart;
    }
    places
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_do_not_meet() {
        assert_eq!(spread(&[10.0, 11.0, 60.0], 12.0, [0.0, 100.0]), [10.0, 22.0, 60.0]);
        assert_eq!(spread(&[95.0, 99.0], 12.0, [0.0, 100.0]), [88.0, 100.0]);
    }
}
