//! Bars: what counts how much, the largest first.

use super::axis::{Axis, Scale};
use super::ink::{FAINT, HAIR, Stroke, WORDS};
use super::panel::{Anchor, Panel, Word, width_of};
use crate::text::significant;

/// One bar.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Bar {
    /// What it is about.
    pub(crate) name: String,
    /// Its value; its sign is drawn.
    pub(crate) value: f64,
}

const ROW: f64 = 18.0;

/// Draws bars, the largest first, at most so many.
#[must_use]
pub(crate) fn bars(title: &str, axis: &Axis, bars: &[Bar], most: usize, width: f64) -> Panel {
    let mut sorted: Vec<&Bar> = bars.iter().filter(|bar| bar.value.is_finite()).collect();
    sorted.sort_by(|a, b| b.value.abs().total_cmp(&a.value.abs()));
    let left_out = sorted.len().saturating_sub(most);
    sorted.truncate(most);
    let names = sorted.iter().map(|bar| width_of(&bar.name, WORDS));
    let left = names.fold(40.0, f64::max).min(0.5 * width) + 10.0;
    let top = 40.0;
    let bottom = top + ROW * sorted.len() as f64;
    let mut panel = Panel::new(width, bottom + 36.0);
    panel.word([0.0, 12.0], title, Word::TITLE);
    if left_out > 0 {
        let told = format!("{left_out} smaller ones are left out");
        panel.word([width, 12.0], &told, Word::SMALL.at(Anchor::End));
    }
    let values = sorted.iter().map(|bar| bar.value).chain([0.0]);
    let scale = Scale::holding(axis, values, left, width - 62.0);
    for (value, label) in scale.ticks(5) {
        let x = scale.place(value);
        panel.line([x, top - 4.0], [x, bottom], Stroke::solid(HAIR, 0.6));
        panel.word([x, bottom + 13.0], &label, Word::SMALL.at(Anchor::Middle));
    }
    let zero = scale.place(0.0);
    for (row, bar) in sorted.iter().enumerate() {
        let y = top + ROW * row as f64;
        let end = scale.place(bar.value);
        let style = Stroke::series(usize::from(bar.value < 0.0));
        panel.block([zero.min(end), y + 3.0], [(end - zero).abs(), ROW - 7.0], style.colour, 0.85);
        panel.word([left - 8.0, y + 12.0], &bar.name, Word::PLAIN.at(Anchor::End));
        let told = significant(bar.value, 3).replace('-', "\u{2212}");
        panel.word([zero.max(end) + 5.0, y + 12.0], &told, Word::SMALL);
    }
    panel.line([zero, top - 4.0], [zero, bottom], Stroke::solid(FAINT, 1.0));
    let caption = axis.caption();
    panel.word([width, bottom + 28.0], &caption, Word::PLAIN.at(Anchor::End).in_colour(FAINT));
    panel
}
