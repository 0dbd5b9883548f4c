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

/// Draws the wavefronts of every state on one scale, `width` px wide.
#[must_use]
pub(crate) fn wavefronts(design: &Design, width: f64) -> Panel {
    let columns = design.states.len().clamp(1, 3);
    let gap = 18.0;
    let each = (width - gap * (columns as f64 - 1.0)) / columns as f64;
    let shown = &design.states[..design.states.len().min(MOST_STATES)];
    let curves: Vec<Vec<Series>> = shown.iter().map(|state| curves(design, state)).collect();
    let all = curves.iter().flatten().flat_map(|curve| &curve.points);
    let all: Vec<f64> = all.filter_map(|(_, waves)| *waves).collect();
    let ends = [f64::min, f64::max].map(|end| all.iter().copied().reduce(end));
    let holds: Vec<f64> = ends.into_iter().flatten().collect();
    let fields = shown.iter().zip(curves);
    let fields = fields.map(|(state, curves)| field(design, state, curves, &holds, each));
    let mut head = Panel::new(width, 32.0);
    let title = if shown.len() < design.states.len() {
        format!("Exit wavefront against ray height, {} of {}", shown.len(), design.states.len())
    } else {
        "Exit wavefront against ray height".to_owned()
    };
    head.word([0.0, 12.0], &title, Word::TITLE);
    let told = "optical path less the axial ray's, all on one scale; the beam's 1/e² radius is \
                marked w";
    head.word([0.0, 27.0], told, Word::PLAIN.in_colour(FAINT));
    Panel::stack([head, Panel::grid(fields.collect(), columns, gap)], 6.0)
}

/// A curve a wavelength; none where rays fail.
fn curves(design: &Design, state: &ZoomState) -> Vec<Series> {
    let curves = state.wavelengths_nm.iter().enumerate().map(|(style, &nm)| {
        let points = samples(design, state, nm);
        let name = if state.wavelengths_nm.len() > 1 { format!("{nm} nm") } else { String::new() };
        Series { name, points, style, dots: false }
    });
    curves.filter(|curve| !curve.points.is_empty()).collect()
}

fn field(
    design: &Design,
    state: &ZoomState,
    series: Vec<Series>,
    holds: &[f64],
    width: f64,
) -> Panel {
    let fails = series.is_empty();
    let field = Chart {
        title: if fails { format!("{}: rays fail", state.name) } else { state.name.clone() },
        x: Axis::linear("height at entry", "mm"),
        y: Axis::linear("", "waves"),
        y_holds: holds.to_vec(),
        series,
        levels: Vec::new(),
        names_room: 0.0,
        marks: vec![(design.beam.radius_mm(), "w".to_owned())],
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
