//! The layout with a slider along the movement curve.
//!
//! A drawing inside a page is not HTML: its elements are closed, empty or not. Frames are worked out here, at the ratios the curve was looked at; the script only shows them.

use driver::cam::{CurvePoint, MovementCurve};
use maud::{Markup, PreEscaped, html};
use serde::Serialize;
use surface_model::design::{Design, ZoomState};

use super::{Subject, WIDTH};
use crate::picture::train::{heights, outlines, rays};
use crate::text::cam::off_word;
use crate::text::{fixed, fixed_or_dash, significant_or_dash};

/// Most frames.
const FRAMES: usize = 240;
/// Room beside the tube, as a part of the track.
const LEAD: f64 = 0.05;

/// What the script shows at one ratio.
#[derive(Debug, Serialize)]
struct Frame {
    /// Per group, how far to the right of its drawn place, px.
    shift: Vec<f64>,
    /// Per ray, its points.
    rays: Vec<String>,
    /// The readings, in their order.
    readings: Vec<String>,
}

/// The stage of a design with a movement curve; nothing without one.
pub(super) fn stage(subject: &Subject<'_>, number: usize) -> Markup {
    let Ok(curve) = subject.curve else { return html! {} };
    let each = curve.fine.len().div_ceil(FRAMES).max(1);
    let points: Vec<&CurvePoint> = curve
        .fine
        .iter()
        .enumerate()
        .filter(|(k, point)| k % each == 0 || point.state.is_some())
        .map(|(_, point)| point)
        .collect();
    let Some(first) = points.first() else { return html! {} };
    let view = View::of(&subject.file.design);
    let frames: Vec<Frame> = points.iter().map(|point| view.frame(first, point)).collect();
    let json = serde_json::to_string(&frames).unwrap_or_else(|_| "[]".into());
    let states = points.iter().enumerate().filter_map(|(k, p)| Some((k, p.state.as_ref()?)));
    let names = reading_names(curve, first);
    html! {
        div.stage id=(format!("stage-{number}")) {
            div.controls hidden {
                label for=(format!("slider-{number}")) { "ratio" }
                input type="range" id=(format!("slider-{number}")) min="0" max=(points.len() - 1) value="0" step="1";
                @for (k, state) in states { button type="button" data-frame=(k) { (state) } }
            }
            ul.readings {
                @for (name, told) in names.iter().zip(&frames[0].readings) {
                    li { (name) " " b data-reading=(name) { (told) } }
                }
            }
            (PreEscaped(view.drawing(first, &frames[0])))
            // A "<" inside would end the script.
            script type="application/json" { (PreEscaped(json.replace('<', "\\u003c"))) }
        }
    }
}

fn reading_names(curve: &MovementCurve, point: &CurvePoint) -> Vec<String> {
    let off = format!("{} µrad", off_word(curve));
    let mut names = vec!["ratio".to_owned(), off, "paraxial µrad".to_owned()];
    let wavefronts = point.wavefront.iter();
    names.extend(wavefronts.map(|at| format!("RMS waves at {} nm", at.wavelength_nm)));
    names.extend(point.groups.iter().map(|group| format!("{} at mm", group.name)));
    names
}

fn readings(point: &CurvePoint) -> Vec<String> {
    let mut readings = vec![
        fixed(point.ratio, 4),
        fixed(point.collimation_urad, 2),
        fixed_or_dash(point.paraxial_off_urad, 2),
    ];
    let wavefronts = point.wavefront.iter();
    readings.extend(wavefronts.map(|at| significant_or_dash(at.rms_waves, 3)));
    readings.extend(point.groups.iter().map(|group| fixed(group.position_mm, 4)));
    readings
}

/// From the housing to px.
struct View<'a> {
    design: &'a Design,
    lead_mm: f64,
    scale: f64,
    height: f64,
}

impl<'a> View<'a> {
    fn of(design: &'a Design) -> Self {
        let lead_mm = LEAD * design.housing.track_mm;
        let scale = WIDTH / (design.housing.track_mm + 2.0 * lead_mm);
        let elements = design.groups.iter().flat_map(|group| &group.elements);
        let largest = elements.map(|element| element.diameter_mm).fold(0.0, f64::max);
        Self { design, lead_mm, scale, height: (largest * scale + 24.0).min(420.0) }
    }

    fn x(&self, z_mm: f64) -> f64 {
        (z_mm + self.lead_mm) * self.scale
    }

    fn points(&self, list: &[[f64; 2]]) -> String {
        let place = |&[z, y]: &[f64; 2]| {
            format!("{:.2},{:.2}", self.x(z), 0.5 * self.height - y * self.scale)
        };
        list.iter().map(place).collect::<Vec<_>>().join(" ")
    }

    fn frame(&self, first: &CurvePoint, point: &CurvePoint) -> Frame {
        let wavelengths_nm = point.wavefront.iter().map(|at| at.wavelength_nm).collect();
        let state = ZoomState {
            name: String::new(),
            ratio: point.ratio,
            spacings_mm: point.spacings_mm.clone(),
            wavelengths_nm,
        };
        let front = point.groups.first().map_or(0.0, |group| group.position_mm);
        let drawn = rays(self.design, &state, front, self.lead_mm);
        let pairs = point.groups.iter().zip(&first.groups);
        let shift = pairs.map(|(here, there)| {
            let px = (here.position_mm - there.position_mm) * self.scale;
            (px * 100.0).round() / 100.0
        });
        let line = |height: f64| {
            let ray = drawn.iter().find(|ray| ray.height == height);
            ray.map_or_else(String::new, |ray| self.points(&ray.points_mm))
        };
        Frame {
            shift: shift.collect(),
            rays: heights(self.design).into_iter().map(line).collect(),
            readings: readings(point),
        }
    }

    /// The drawing at the first frame.
    fn drawing(&self, first: &CurvePoint, frame: &Frame) -> String {
        let (height, track) = (self.height, self.design.housing.track_mm);
        let middle = 0.5 * height;
        let ends = [0.0, track].map(|z| self.x(z));
        html! {
            svg role="img" aria-label="Layout at the ratio chosen" width=(WIDTH) height=(height)
                viewBox=(format!("0 0 {WIDTH} {height}")) {
                @for x in ends {
                    line x1=(x) x2=(x) y1="2" y2=(height - 2.0) stroke="#6e6e6e" stroke-dasharray="6 3 1 3" {}
                }
                line x1="0" x2=(WIDTH) y1=(middle) y2=(middle) stroke="#c4c4c4" stroke-dasharray="9 2 2 2" {}
                @for (points, height) in frame.rays.iter().zip(heights(self.design)) {
                    polyline data-ray="" points=(points) fill="none" stroke="#D55E00"
                        stroke-dasharray=[(height.abs() > 1.0).then_some("4 2")] {}
                }
                @for (group, place) in self.design.groups.iter().zip(&first.groups) {
                    g data-group=(group.name) { (self.glass(group, place.position_mm)) }
                }
            }
        }
        .into_string()
    }

    fn glass(&self, group: &surface_model::design::Group, position_mm: f64) -> Markup {
        let mut z = position_mm;
        let mut pieces = Vec::new();
        for (e, element) in group.elements.iter().enumerate() {
            for outline in outlines(element) {
                let shifted: Vec<[f64; 2]> = outline.iter().map(|&[dz, y]| [z + dz, y]).collect();
                pieces.push(self.points(&shifted));
            }
            z += element.thicknesses_mm.iter().sum::<f64>();
            z += group.airs_mm.get(e).copied().unwrap_or(0.0);
        }
        html! {
            @for piece in pieces {
                polygon points=(piece) fill="#56B4E9" fill-opacity="0.28" stroke="#1b1b1b" {}
            }
        }
    }
}
