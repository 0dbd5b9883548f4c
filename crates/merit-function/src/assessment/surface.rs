//! One surface in one state: where its third-order aberrations and its steepest ray come from.

use serde::Serialize;
use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::place::Place;
use surface_model::seidel::{SeidelRays, SeidelSums, seidel};
use surface_model::skew::{RayStart, trace_ray};
use surface_model::train::Train;

/// Slope of the chief ray that the off-axis Seidel sums are told for: 1 mrad, the order of a
/// laser's pointing error (common practice, no published source).
const CHIEF_SLOPE: f64 = 1e-3;

/// One surface's numbers at the first wavelength of the state.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SurfaceAssessment {
    /// Its place in the design file.
    pub at: Address,
    /// Angle of incidence of the outermost traced ray, degrees; `None` when the ray fails.
    pub incidence_deg: Option<f64>,
    /// Seidel sums S_I … S_V (spherical aberration, coma, astigmatism, field curvature,
    /// distortion), mm, for a marginal ray at the 1/e² radius, a chief ray of 1 mrad and the stop
    /// at the first surface; `None` where they cannot be worked out.
    pub seidel_mm: Option<[f64; 5]>,
}

/// Assesses the surfaces of a state's train.
pub(super) fn assess(design: &Design, train: &Train) -> Vec<SurfaceAssessment> {
    let rays = SeidelRays {
        marginal_height_mm: design.beam.radius_mm(),
        marginal_slope: 0.0,
        chief_slope: CHIEF_SLOPE,
    };
    let sums = seidel(train, rays).ok();
    let edge = trace_ray(train, RayStart::parallel(design.beam.edge_mm()));
    let angles: Vec<f64> = edge.map_or_else(
        |_| Vec::new(),
        |ray| ray.points().iter().map(|point| point.incidence_rad.to_degrees()).collect(),
    );
    let ids = design.sequence().surfaces;
    let surface = |(place, id)| SurfaceAssessment {
        at: Place::Radius(id).address(),
        incidence_deg: angles.get(place).copied(),
        seidel_mm: sums.as_ref().and_then(|sums| sums.surfaces.get(place)).map(in_order),
    };
    ids.into_iter().enumerate().map(surface).collect()
}

fn in_order(sums: &SeidelSums) -> [f64; 5] {
    let SeidelSums { spherical_mm, coma_mm, astigmatism_mm, petzval_mm, distortion_mm } = *sums;
    [spherical_mm, coma_mm, astigmatism_mm, petzval_mm, distortion_mm]
}
