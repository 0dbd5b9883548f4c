//! The layout: every state one above the other, to scale, with rays; the groups that move joined
//! from state to state by their movement curves.

use driver::cam::{CurvePoint, MovementCurve};
use surface_model::design::{Design, ZoomState};

use super::ink::{FAINT, GLASS, HAIR, INK, RAY, Stroke, WORDS};
use super::panel::{Anchor, Panel, Word, width_of};
use super::train::{heights, outlines, rays};

/// Most states that are drawn; of more, so many are picked.
const MOST_STATES: usize = 9;
/// Room beside the tube for rays that come and go, as a part of the track.
const LEAD: f64 = 0.05;
/// Air between two states, px.
const BETWEEN: f64 = 16.0;
const HEAD: f64 = 44.0;

/// Draws the layout of a design, `width` px wide.
#[must_use]
pub(crate) fn layout(design: &Design, curve: Option<&MovementCurve>, width: f64) -> Panel {
    let shown = shown(design);
    let names = shown.iter().map(|&k| design.states[k].name.as_str());
    let left = names.map(|name| width_of(name, WORDS)).fold(30.0, f64::max) + 12.0;
    let lead_mm = LEAD * design.housing.track_mm;
    let scale = (width - left) / (design.housing.track_mm + 2.0 * lead_mm);
    let half_mm = half_height_mm(design);
    let strip = 2.0 * half_mm * scale + BETWEEN;
    let height = HEAD + strip * shown.len() as f64 + 50.0;
    let mut panel = Panel::new(width, height);
    let place = Place { left, lead_mm, scale, strip };
    panel.word([0.0, 12.0], "Layout, to scale", Word::TITLE);
    if shown.len() < design.states.len() {
        let told = format!("{} of {} states", shown.len(), design.states.len());
        panel.word([width, 12.0], &told, Word::SMALL.at(Anchor::End));
    }
    place.housing(design, shown.len(), &mut panel);
    // The curve of a design that is far from collimated stands elsewhere than its states.
    if let Some(curve) = curve.filter(|curve| is_near(design, curve)) {
        place.movement(design, &shown, curve, &mut panel);
    }
    let positions = design.all_positions_mm();
    for (row, &k) in shown.iter().enumerate() {
        place.state(design, &design.states[k], &positions[k], row, &mut panel);
    }
    place.names(design, &positions[shown[0]], &mut panel);
    place.bar(design, height - 8.0, &mut panel);
    panel
}

/// Whether the curve passes the designed states within a hundredth of the track.
fn is_near(design: &Design, curve: &MovementCurve) -> bool {
    let off = curve.states.iter().flat_map(|state| &state.curve_less_design_mm);
    off.map(|by| by.abs()).fold(0.0, f64::max) <= 0.01 * design.housing.track_mm
}

/// Which states are drawn: all, or some evenly.
fn shown(design: &Design) -> Vec<usize> {
    let count = design.states.len();
    if count <= MOST_STATES {
        return (0..count).collect();
    }
    (0..MOST_STATES).map(|i| i * (count - 1) / (MOST_STATES - 1)).collect()
}

fn half_height_mm(design: &Design) -> f64 {
    let elements = design.groups.iter().flat_map(|group| &group.elements);
    elements.map(|element| 0.5 * element.diameter_mm).fold(design.beam.edge_mm(), f64::max)
}

/// Where things stand on the panel.
struct Place {
    left: f64,
    lead_mm: f64,
    scale: f64,
    strip: f64,
}

impl Place {
    fn x(&self, z_mm: f64) -> f64 {
        self.left + (z_mm + self.lead_mm) * self.scale
    }

    /// The axis of a row, px.
    fn axis(&self, row: f64) -> f64 {
        HEAD + self.strip * (row + 0.5)
    }

    fn at(&self, [z, y]: [f64; 2], row: usize) -> [f64; 2] {
        [self.x(z), self.axis(row as f64) - y * self.scale]
    }

    /// The ends of the tube.
    fn housing(&self, design: &Design, rows: usize, panel: &mut Panel) {
        let bottom = HEAD + self.strip * rows as f64;
        for z in [0.0, design.housing.track_mm] {
            let x = self.x(z);
            panel.line([x, HEAD - 6.0], [x, bottom], Stroke::dashed(FAINT, 0.8, "6 3 1 3"));
        }
        let track = design.housing.track_mm;
        let front = self.x(0.0);
        panel.word([front + 4.0, bottom + 4.0], "front datum, 0 mm", Word::SMALL);
        let end = format!("end of the tube, {track} mm");
        panel.word([self.x(track) - 4.0, bottom + 4.0], &end, Word::SMALL.at(Anchor::End));
    }

    /// Movement curves: from the axis of one state to that of the next, the ratio running evenly.
    fn movement(&self, design: &Design, shown: &[usize], curve: &MovementCurve, panel: &mut Panel) {
        for (row, pair) in shown.windows(2).enumerate() {
            let ratios = [pair[0], pair[1]].map(|k| design.states[k].ratio);
            let (low, high) = (ratios[0].min(ratios[1]), ratios[0].max(ratios[1]));
            let inside = |point: &&CurvePoint| (low..=high).contains(&point.ratio);
            let points: Vec<&CurvePoint> = curve.fine.iter().filter(inside).collect();
            for group in curve.moving() {
                let line: Vec<[f64; 2]> = points
                    .iter()
                    .map(|point| {
                        let share = (point.ratio - ratios[0]) / (ratios[1] - ratios[0]);
                        let y = self.axis(row as f64 + share);
                        [self.x(point.groups[group].position_mm), y]
                    })
                    .collect();
                panel.polyline(&line, Stroke { width: 1.3, ..Stroke::series(group) });
            }
        }
    }

    fn state(
        &self,
        design: &Design,
        state: &ZoomState,
        positions_mm: &[f64],
        row: usize,
        panel: &mut Panel,
    ) {
        let axis = self.axis(row as f64);
        let end = self.x(design.housing.track_mm + self.lead_mm);
        panel.line([self.left, axis], [end, axis], Stroke::dashed(HAIR, 0.8, "9 2 2 2"));
        panel.word([0.0, axis + 4.0], &state.name, Word { bold: true, ..Word::PLAIN });
        let front = positions_mm.first().copied().unwrap_or(0.0);
        for ray in rays(design, state, front, self.lead_mm) {
            let line: Vec<[f64; 2]> =
                ray.points_mm.iter().map(|&point| self.at(point, row)).collect();
            let inner = ray.height.abs() <= 1.0;
            let dash = if inner { "" } else { "4 2" };
            panel.polyline(&line, Stroke::dashed(RAY, 0.8, dash));
        }
        for (group, &position) in design.groups.iter().zip(positions_mm) {
            let mut z = position;
            for (e, element) in group.elements.iter().enumerate() {
                for outline in outlines(element) {
                    let line: Vec<[f64; 2]> =
                        outline.iter().map(|&[dz, y]| self.at([z + dz, y], row)).collect();
                    panel.outline(&line, GLASS, 0.28, Stroke::solid(INK, 0.9));
                }
                z += element.thicknesses_mm.iter().sum::<f64>();
                z += group.airs_mm.get(e).copied().unwrap_or(0.0);
            }
        }
    }

    /// Names of the groups over the first state, pushed apart where they would meet.
    fn names(&self, design: &Design, positions_mm: &[f64], panel: &mut Panel) {
        let mut free = f64::NEG_INFINITY;
        let fixed = design.housing.fixed.iter();
        for (g, ((group, &z), &fixed)) in
            design.groups.iter().zip(positions_mm).zip(fixed).enumerate()
        {
            let name = if fixed { format!("{} (fixed)", group.name) } else { group.name.clone() };
            let middle = self.x(z + 0.5 * group.length_mm());
            let half = 0.5 * width_of(&name, WORDS);
            let end = self.x(design.housing.track_mm + self.lead_mm);
            let x = (middle - half).max(free).min(end - 2.0 * half).max(0.0);
            free = x + 2.0 * half + 8.0;
            let colour = if fixed { FAINT } else { Stroke::series(g).colour };
            let word = Word { bold: true, ..Word::PLAIN.in_colour(colour) };
            panel.word([x, HEAD - 14.0], &name, word);
        }
    }

    /// The bar of the scale, and what the rays are.
    fn bar(&self, design: &Design, y: f64, panel: &mut Panel) {
        let target = design.housing.track_mm / 6.0;
        let power = 10.0_f64.powf(target.log10().floor());
        let steps = [5.0, 2.0, 1.0].map(|by| by * power);
        let length = steps.into_iter().find(|step| *step <= target).unwrap_or(power);
        let (from, to) = (self.x(0.0), self.x(length));
        panel.line([from, y - 12.0], [to, y - 12.0], Stroke::solid(INK, 1.4));
        for x in [from, to] {
            panel.line([x, y - 16.0], [x, y - 8.0], Stroke::solid(INK, 1.0));
        }
        panel.word([to + 6.0, y - 8.0], &format!("{length} mm"), Word::SMALL);
        let [one, _, edge, _] = heights(design);
        let track = design.housing.track_mm;
        let long = format!(
            "rays at the 1/e² radius ({one:.0} w, solid) and at the edge traced ({edge} w, dashed)"
        );
        let short = format!("rays at w and {edge} w");
        let room = self.x(track + self.lead_mm) - to - 70.0;
        let told = if width_of(&long, WORDS - 1.0) <= room { long } else { short };
        let end = self.x(design.housing.track_mm + self.lead_mm);
        panel.word([end, y - 8.0], &told, Word::SMALL.at(Anchor::End));
    }
}
