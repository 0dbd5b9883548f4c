//! The geometry of a state as it is drawn: outlines of the glass with true sags, and exact rays.

use surface_model::design::{Design, Element, ZoomState};
use surface_model::skew::{RayStart, trace_ray};
use surface_model::surface::Surface;

/// Points of a surface's profile from the axis to its edge.
const PROFILE: usize = 12;

/// A ray: height and axial place, mm, from where it comes in to where it is lost sight of.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct DrawnRay {
    /// Height at entry in 1/e² radii.
    pub(crate) height: f64,
    /// z and y, mm.
    pub(crate) points_mm: Vec<[f64; 2]>,
}

/// A surface's profile from below the axis to above, z from its vertex and y, mm. It ends where
/// the surface does.
fn profile(surface: &Surface) -> Vec<[f64; 2]> {
    let steps = -(PROFILE as i32)..=PROFILE as i32;
    let height = |i: i32| surface.semi_diameter * f64::from(i) / PROFILE as f64;
    steps.filter_map(|i| Some([surface.sag(height(i))?, height(i)])).collect()
}

/// The pieces of glass of an element: closed outlines, z from the element's first vertex, mm.
#[must_use]
pub(crate) fn outlines(element: &Element) -> Vec<Vec<[f64; 2]>> {
    let mut z = 0.0;
    let mut pieces = Vec::new();
    for (pair, thickness) in element.surfaces.windows(2).zip(&element.thicknesses_mm) {
        let shift = |at: f64| move |[sag, y]: [f64; 2]| [at + sag, y];
        let mut outline: Vec<[f64; 2]> = profile(&pair[0]).into_iter().map(shift(z)).collect();
        let back = profile(&pair[1]).into_iter().rev();
        outline.extend(back.map(shift(z + thickness)));
        pieces.push(outline);
        z += thickness;
    }
    pieces
}

/// Heights that rays are drawn at, in 1/e² radii.
#[must_use]
pub(crate) fn heights(design: &Design) -> [f64; 4] {
    let edge = design.beam.traced_to;
    [1.0, -1.0, edge, -edge]
}

/// Exact rays of a state in the housing, from `lead_mm` before the first vertex to as far behind
/// the last. A ray that fails is left out.
#[must_use]
pub(crate) fn rays(
    design: &Design,
    state: &ZoomState,
    front_mm: f64,
    lead_mm: f64,
) -> Vec<DrawnRay> {
    let Some(train) = state.wavelengths_nm.first().and_then(|&nm| design.train(state, nm).ok())
    else {
        return Vec::new();
    };
    let length = train.length();
    let ray = |height: f64| {
        let y = height * design.beam.radius_mm();
        let path = trace_ray(&train, RayStart::parallel(y)).ok()?;
        let mut points_mm = vec![[front_mm - lead_mm, y]];
        let mut vertex = front_mm;
        let gaps = train.gaps().iter().copied().chain([0.0]);
        for (point, gap) in path.points().iter().zip(gaps) {
            points_mm.push([vertex + point.position_mm[2], point.position_mm[1]]);
            vertex += gap;
        }
        let exit = path.exit();
        let [_, m] = exit.direction;
        let slope = m / (1.0 - m * m).sqrt();
        points_mm.push([front_mm + length + lead_mm, exit.position_mm[1] + slope * lead_mm]);
        Some(DrawnRay { height, points_mm })
    };
    heights(design).into_iter().filter_map(ray).collect()
}
