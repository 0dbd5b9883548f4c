//! Gaps at the edge: the axial distance of two neighbouring surfaces at the smaller of their
//! clear radii. In glass this is the edge thickness, in air the edge clearance.

use surface_model::quantities::Quantities;
use surface_model::solid::Solid;
use surface_model::train::Train;

/// A gap as the space between its surfaces, and the height of its edge in mm.
fn space(train: &Train, gap: usize) -> (Solid<'_>, f64) {
    let (front, back) = (&train.surfaces()[gap], &train.surfaces()[gap + 1]);
    let height_mm = front.semi_diameter.min(back.semi_diameter);
    (Solid { front, back, axial_mm: train.gaps()[gap] }, height_mm)
}

/// Length of a gap at its edge, mm; `None` where a surface does not reach it.
pub(crate) fn edge_mm(train: &Train, gap: usize) -> Option<f64> {
    let (space, height_mm) = space(train, gap);
    space.thickness(height_mm).ok()
}

/// Hands on the derivatives of a gap's edge, each with the place of its quantity. Returns the
/// length, or `None` where a surface does not reach the edge.
pub(crate) fn edge_gradient(
    train: &Train,
    gap: usize,
    quantities: Quantities,
    mut put: impl FnMut(usize, f64),
) -> Option<f64> {
    let (space, height_mm) = space(train, gap);
    let gradient = space.thickness_gradient(height_mm).ok()?;
    put(quantities.gap(gap), 1.0);
    for (surface, by) in [(gap, gradient.by_front), (gap + 1, gradient.by_back)] {
        put(quantities.curvature(surface), by.curvature);
        if quantities.shapes().has(surface) {
            put(quantities.conic(surface), by.conic);
            for (term, by) in by.asphere.into_iter().enumerate() {
                put(quantities.asphere(surface, term), by);
            }
        }
    }
    Some(gradient.thickness_mm)
}
