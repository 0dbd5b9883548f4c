//! What a careful reader should know about a design though no limit says so.

use surface_model::design::Design;

use super::{ElementAssessment, StateAssessment};

/// Warnings in plain sentences, each naming its place and what to do.
pub(super) fn warnings(
    design: &Design,
    elements: &[ElementAssessment],
    states: &[StateAssessment],
) -> Vec<String> {
    let mut out = Vec::new();
    let parts = design.groups.iter().enumerate().flat_map(|(g, group)| {
        group.elements.iter().enumerate().map(move |(e, part)| (design.element_address(g, e), part))
    });
    for (element, (at, part)) in elements.iter().zip(parts) {
        if let Some(footprint) = element.footprint_mm
            && footprint > part.diameter_mm
        {
            out.push(format!(
                "{at}: traced rays take up {footprint:.2} mm, more than its clear diameter of {} mm; \
                 make it larger, or trace less of the beam",
                part.diameter_mm
            ));
        }
        if element.edge_thicknesses_mm.iter().flatten().any(|&edge| edge <= 0.0) {
            out.push(format!(
                "{at}: its surfaces cross inside the clear diameter; give it an edge_thickness_mm \
                 limit and optimise"
            ));
        }
    }
    let inverted: Vec<&str> = states
        .iter()
        .filter(|state| state.ratio.is_some_and(|ratio| ratio < 0.0))
        .map(|state| state.name.as_str())
        .collect();
    if !inverted.is_empty() {
        out.push(format!(
            "states {} invert the beam: it comes to a real focus inside the expander, where a pulsed \
             or strong laser can ionise the air or burn dust; have it judged by your laser safety \
             officer",
            inverted.join(", ")
        ));
    }
    out
}
