//! Ranges of single variables that follow from limits: these are kept by the step itself.

use surface_model::design::Design;
use surface_model::place::Place;
use surface_model::ranges::{LARGEST_COEFFICIENT, LARGEST_CONIC, LONGEST_MM, SMALLEST_RADIUS_MM};
use surface_model::sequence::SurfaceId;

use crate::block::Bounds;
use crate::limits::{LimitKind, Limits, Range};

/// The steepest a free surface may get at its clear diameter, as semi-diameter over radius, even
/// where no limit says so: beyond it, it would not reach its clear diameter at all.
const STEEPEST: f64 = 0.98;

/// The thinnest a free glass may get on axis, mm, even where no limit says so: what limits are
/// kept to. A glass of no thickness is not one.
const THINNEST_MM: f64 = 1e-3;

/// The range limits leave for one number, in the unit of [`Place::value`]; `None` when they
/// contradict each other. What is not limited is still kept possible: no glass without thickness,
/// no surface that ends inside its clear diameter, nothing that a design file could not hold.
pub(crate) fn bounds_of(place: Place, design: &Design, limits: &Limits) -> Option<Bounds> {
    let length = |kind, shortest_mm: f64| {
        let range = limits.range(kind).unwrap_or(Range { min: 0.0, max: f64::INFINITY });
        let bounds = Bounds { low: range.min.max(shortest_mm), high: range.max.min(LONGEST_MM) };
        (bounds.low <= bounds.high).then_some(bounds)
    };
    match place {
        // A glass that is thinner in the file may stay so.
        Place::Thickness { .. } => {
            length(LimitKind::CentreThicknessMm, THINNEST_MM.min(place.value(design)))
        }
        Place::Air { .. } => length(LimitKind::AirMm, 0.0),
        Place::Spacing { .. } => length(LimitKind::SpacingMm, 0.0),
        Place::Radius(id) => curvature_bounds(id, design, limits),
        Place::Conic(_) => Some(Bounds { low: -LARGEST_CONIC, high: LARGEST_CONIC }),
        Place::Asphere(..) => Some(Bounds { low: -LARGEST_COEFFICIENT, high: LARGEST_COEFFICIENT }),
    }
}

/// Limits on |radius| and on steepness as a range of curvature. A largest radius or a smallest
/// steepness cuts the range in two; the half the surface starts in is kept.
fn curvature_bounds(id: SurfaceId, design: &Design, limits: &Limits) -> Option<Bounds> {
    let surface = &design.groups[id.group].elements[id.element].surfaces[id.surface];
    let mut strongest = STEEPEST / surface.semi_diameter / (1.0 + surface.conic).max(1.0).sqrt();
    strongest = strongest.min(1.0 / SMALLEST_RADIUS_MM);
    let mut weakest: f64 = 0.0;
    if let Some(radius_mm) = limits.range(LimitKind::RadiusMm) {
        strongest = strongest.min(1.0 / radius_mm.min.max(0.0));
        weakest = weakest.max(1.0 / radius_mm.max);
    }
    if let Some(steepness) = limits.range(LimitKind::Steepness) {
        strongest = strongest.min(steepness.max / surface.semi_diameter);
        weakest = weakest.max(steepness.min / surface.semi_diameter);
    }
    if weakest <= 0.0 {
        return Some(Bounds { low: -strongest, high: strongest });
    }
    let half = if surface.curvature >= 0.0 {
        Bounds { low: weakest, high: strongest }
    } else {
        Bounds { low: -strongest, high: -weakest }
    };
    (half.low <= half.high).then_some(half)
}
