//! Elements and groups: what they are to first order, how thick and how heavy.

use std::ops::Range;

use serde::Serialize;
use surface_model::design::{Design, Element};
use surface_model::document::Address;
use surface_model::first_order::{FocalData, first_order};
use surface_model::solid::Solid;
use surface_model::train::Train;

use crate::limit_item::StateView;

/// One element's numbers.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ElementAssessment {
    /// Its place in the design file.
    pub at: Address,
    /// Axial distance of neighbouring surfaces at the clear radius, mm; `None` where a surface does
    /// not reach it.
    pub edge_thicknesses_mm: Vec<Option<f64>>,
    /// Centre thicknesses, mm.
    pub centre_thicknesses_mm: Vec<f64>,
    /// Effective focal length at the first wavelength, mm; `None` without power.
    pub focal_length_mm: Option<f64>,
    /// Mass of the glass ground to its clear diameter, g; `None` where a density is not known.
    pub mass_g: Option<f64>,
    /// Largest diameter that traced rays take up on its surfaces, over all states, mm.
    pub footprint_mm: Option<f64>,
}

/// One group's first-order numbers, at the first wavelength of the first state.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct GroupAssessment {
    /// Its place in the design file.
    pub at: Address,
    /// Its name.
    pub name: String,
    /// First vertex to last vertex, mm.
    pub length_mm: f64,
    /// Effective focal length, mm; `None` without power.
    pub focal_length_mm: Option<f64>,
    /// From the first vertex to the front principal plane, mm, positive to the right.
    pub front_principal_mm: Option<f64>,
    /// From the last vertex to the rear principal plane, mm, positive to the right.
    pub rear_principal_mm: Option<f64>,
    /// Mass of its glass, g.
    pub mass_g: Option<f64>,
}

fn focal(train: &Train, part: Range<usize>) -> Option<FocalData> {
    first_order(train, part).ok()?.focal
}

/// Mass of an element's glass, g.
fn mass_g(element: &Element) -> Option<f64> {
    let pairs = element.surfaces.windows(2).zip(&element.thicknesses_mm);
    let glasses = pairs.zip(&element.glasses).map(|((pair, &axial_mm), glass)| {
        let solid = Solid { front: &pair[0], back: &pair[1], axial_mm };
        solid.mass_g(0.5 * element.diameter_mm, glass.density_g_cm3()?).ok()
    });
    glasses.sum()
}

/// Assesses every group.
pub(super) fn assess_groups(design: &Design, views: &[StateView]) -> Vec<GroupAssessment> {
    let sequence = design.sequence();
    let assess = |(g, group): (usize, &surface_model::design::Group)| {
        let part = sequence.first_surface(g)..sequence.first_surface(g + 1);
        let focal = views.first().and_then(|view| focal(&view.train, part));
        GroupAssessment {
            at: Address::root().key("groups").index(g),
            name: group.name.clone(),
            length_mm: group.length_mm(),
            focal_length_mm: focal.map(|focal| focal.effective_focal_length_mm),
            front_principal_mm: focal.map(|focal| focal.front_principal_mm),
            rear_principal_mm: focal.map(|focal| focal.rear_principal_mm),
            mass_g: group.elements.iter().map(mass_g).sum(),
        }
    };
    design.groups.iter().enumerate().map(assess).collect()
}

/// Assesses every element.
pub(super) fn assess(design: &Design, views: &[StateView]) -> Vec<ElementAssessment> {
    let Some(view) = views.first() else { return Vec::new() };
    let edge_mm = design.beam.edge_mm();
    let mut place = 0;
    let mut out = Vec::new();
    for (g, group) in design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let surfaces = place..place + element.surfaces.len();
            place = surfaces.end;
            let gaps = surfaces.start..surfaces.end - 1;
            let rays = views.iter().map(|view| {
                let heights = view.edge_ray.as_ref()?;
                Some(surfaces.clone().map(|s| heights[s].abs()).fold(0.0, f64::max))
            });
            let footprint: Option<f64> =
                rays.collect::<Option<Vec<f64>>>().map(|r| r.into_iter().fold(0.0, f64::max));
            out.push(ElementAssessment {
                at: Address::root().key("groups").index(g).key("elements").index(e),
                edge_thicknesses_mm: gaps
                    .map(|gap| crate::edge::edge_mm(&view.train, gap))
                    .collect(),
                centre_thicknesses_mm: element.thicknesses_mm.clone(),
                focal_length_mm: focal(&view.train, surfaces)
                    .map(|focal| focal.effective_focal_length_mm),
                mass_g: mass_g(element),
                footprint_mm: footprint.map(|height| 2.0 * height * edge_mm),
            });
        }
    }
    out
}
