//! Ranges of single variables that follow from limits: these are kept by the step itself.

use surface_model::design::Design;
use surface_model::place::Place;
use surface_model::sequence::SurfaceId;

use crate::block::Bounds;
use crate::limits::{LimitKind, Limits, Range};

/// The steepest a free surface may get at its clear diameter, as semi-diameter over radius, even
/// where no limit says so: beyond it, it would not reach its clear diameter at all.
const STEEPEST: f64 = 0.98;

/// The range limits leave for one number, in the unit of [`Place::value`]; `None` when they
/// contradict each other. What is not limited is still kept possible: no negative thickness,
/// no surface that ends inside its clear diameter.
pub(crate) fn bounds_of(place: Place, design: &Design, limits: &Limits) -> Option<Bounds> {
    let at_least_zero = |kind| {
        let range = limits.range(kind).unwrap_or(Range { min: 0.0, max: f64::INFINITY });
        Some(Bounds { low: range.min.max(0.0), high: range.max })
    };
    match place {
        Place::Thickness { .. } => at_least_zero(LimitKind::CentreThicknessMm),
        Place::Air { .. } => at_least_zero(LimitKind::AirMm),
        Place::Spacing { .. } => at_least_zero(LimitKind::SpacingMm),
        Place::Radius(id) => curvature_bounds(id, design, limits),
        Place::Conic(_) | Place::Asphere(..) => Some(Bounds::FREE),
    }
}

/// Limits on |radius| and on steepness as a range of curvature. A largest radius or a smallest
/// steepness cuts the range in two; the half the surface starts in is kept.
fn curvature_bounds(id: SurfaceId, design: &Design, limits: &Limits) -> Option<Bounds> {
    let surface = &design.groups[id.group].elements[id.element].surfaces[id.surface];
    let mut strongest = STEEPEST / surface.semi_diameter / (1.0 + surface.conic).max(1.0).sqrt();
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
