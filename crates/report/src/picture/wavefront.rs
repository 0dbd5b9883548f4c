//! The exit wavefront against the height of the ray, a field a state, a curve a wavelength.

use surface_model::design::{Design, ZoomState};
use surface_model::traced_beam::TracedBeam;
use surface_model::wavefront::wavefront_samples;

use super::axis::Axis;
use super::chart::{Chart, Series, chart};
use super::ink::FAINT;
use super::panel::{Panel, Word};

/// Heights each curve is drawn through.
const SAMPLES: usize = 49;
/// Most states that are drawn.
const MOST_STATES: usize = 12;

/// Draws the wavefronts of every state, `width` px wide.
#[must_use]
pub fn wavefronts(design: &Design, width: f64) -> Panel {
    let columns = design.states.len().clamp(1, 3);
    let gap = 18.0;
    let each = (width - gap * (columns as f64 - 1.0)) / columns as f64;
    let states = design.states.iter().take(MOST_STATES);
    let fields: Vec<Panel> = states.map(|state| field(design, state, each)).collect();
    let mut head = Panel::new(width, 32.0);
    head.word([0.0, 12.0], "Exit wavefront against ray height", Word::TITLE);
    let told = "optical path less the axial ray's; the beam's 1/e² radius is marked w";
    head.word([0.0, 27.0], told, Word::PLAIN.in_colour(FAINT));
    Panel::stack([head, Panel::grid(fields, columns, gap)], 6.0)
}

fn field(design: &Design, state: &ZoomState, width: f64) -> Panel {
    let series = state.wavelengths_nm.iter().enumerate().map(|(style, &nm)| {
        let points = samples(design, state, nm);
        let name = if state.wavelengths_nm.len() > 1 { format!("{nm} nm") } else { String::new() };
        Series { name, points, style, dots: false }
    });
    let mut series: Vec<Series> = series.collect();
    let any = series.iter().any(|series| !series.points.is_empty());
    if !any {
        series.clear();
    }
    let title = if any { state.name.clone() } else { format!("{}: rays fail", state.name) };
    let marks = vec![(design.beam.radius_mm(), "w".to_owned())];
    let field = Chart {
        title,
        x: Axis::linear("height at entry", "mm"),
        y: Axis::linear("", "waves"),
        series,
        levels: Vec::new(),
        marks,
    };
    chart(&field, width, 180.0)
}

fn samples(design: &Design, state: &ZoomState, wavelength_nm: f64) -> Vec<(f64, Option<f64>)> {
    let beam = &design.beam;
    let traced = TracedBeam::new(beam.radius_mm(), beam.traced_to, wavelength_nm).ok();
    let train = design.train(state, wavelength_nm).ok();
    let (Some(traced), Some(train)) = (traced, train) else { return Vec::new() };
    let Ok(samples) = wavefront_samples(&train, &traced, SAMPLES) else { return Vec::new() };
    samples.iter().map(|sample| (sample.height_mm, Some(sample.waves))).collect()
}
