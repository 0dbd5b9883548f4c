//! One element in section, with its measures, for a sheet.

use surface_model::design::Element;

use super::ink::{FAINT, GLASS, INK, Stroke};
use super::panel::{Anchor, Panel, Word};
use super::train::outlines;

/// Draws an element in section, to scale, `width` px wide: clear diameter, centre thicknesses.
#[must_use]
pub(crate) fn element_drawing(element: &Element, width: f64) -> Panel {
    let pieces = outlines(element);
    let points = || pieces.iter().flatten();
    let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
    for &[z, _] in points() {
        (low, high) = (low.min(z), high.max(z));
    }
    if low > high {
        return Panel::new(width, 20.0);
    }
    let half = points().map(|&[_, y]| y.abs()).fold(0.0, f64::max);
    let scale = (0.62 * width / (high - low).max(0.1)).min(300.0 / (2.0 * half).max(0.1));
    let height = 2.0 * half * scale + 90.0;
    let middle = 0.5 * height - 10.0;
    let left = 0.5 * (width - (high - low) * scale);
    let x = |z: f64| left + (z - low) * scale;
    let mut panel = Panel::new(width, height);
    for outline in &pieces {
        let line: Vec<[f64; 2]> =
            outline.iter().map(|&[z, y]| [x(z), middle - y * scale]).collect();
        panel.outline(&line, GLASS, 0.22, Stroke::solid(INK, 1.4));
    }
    let axis = Stroke::dashed(FAINT, 0.8, "12 3 3 3");
    panel.line([left - 30.0, middle], [x(high) + 30.0, middle], axis);
    let thin = Stroke::solid(INK, 0.7);
    // The clear diameter, at the left.
    let side = left - 44.0;
    let ends = [middle - half * scale, middle + half * scale];
    panel.line([side, ends[0]], [side, ends[1]], thin);
    for y in ends {
        panel.line([side - 4.0, y], [left - 6.0, y], thin);
    }
    let told = format!("clear Ø {}", element.diameter_mm);
    panel.word([side - 7.0, middle + 4.0], &told, Word::PLAIN.at(Anchor::End));
    // The centre thicknesses, below.
    let mut z = 0.0;
    let mut row = ends[1] + 20.0;
    for thickness in &element.thicknesses_mm {
        let (from, to) = (x(z), x(z + thickness));
        for at in [from, to] {
            panel.line([at, middle], [at, row + 4.0], Stroke::solid(FAINT, 0.5));
        }
        panel.line([from, row], [to, row], thin);
        panel.word([x(high) + 12.0, row + 4.0], &format!("{thickness:.4}"), Word::PLAIN);
        panel.line([to, row], [x(high) + 9.0, row], Stroke::dashed(FAINT, 0.5, "2 2"));
        z += thickness;
        row += 15.0;
    }
    panel
}
