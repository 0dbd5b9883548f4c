//! The numbers of a design that can change, each by a typed place and by its address in the file.

use crate::design::Design;
use crate::document::Address;
use crate::sequence::SurfaceId;
use crate::surface::{ASPHERE_TERMS, asphere_power};

/// One number of a design that the optimiser may change.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Place {
    /// Vertex radius of a surface (curvature inside the program).
    Radius(SurfaceId),
    /// Conic constant of a surface.
    Conic(SurfaceId),
    /// Asphere coefficient of a surface; term 0 is that of r⁴.
    Asphere(SurfaceId, usize),
    /// Centre thickness of one glass of an element.
    Thickness {
        /// Which group.
        group: usize,
        /// Which element of the group.
        element: usize,
        /// Which glass of the element.
        glass: usize,
    },
    /// Air inside a group.
    Air {
        /// Which group.
        group: usize,
        /// The element it follows.
        after: usize,
    },
    /// Spacing of one state.
    Spacing {
        /// Which state.
        state: usize,
        /// The group it follows.
        after: usize,
    },
}

fn element_address(group: usize, element: usize) -> Address {
    Address::root().key("groups").index(group).key("elements").index(element)
}

impl Place {
    /// Every place of a design, in the order of the file: shared ones first, then the spacings.
    #[must_use]
    pub fn all(design: &Design) -> Vec<Self> {
        let mut places = Vec::new();
        for (g, group) in design.groups.iter().enumerate() {
            for (e, element) in group.elements.iter().enumerate() {
                for s in 0..element.surfaces.len() {
                    let id = SurfaceId { group: g, element: e, surface: s };
                    places.push(Self::Radius(id));
                    places.push(Self::Conic(id));
                    places.extend((0..ASPHERE_TERMS).map(|term| Self::Asphere(id, term)));
                }
                let thickness = |glass| Self::Thickness { group: g, element: e, glass };
                places.extend((0..element.glasses.len()).map(thickness));
            }
            places.extend((0..group.airs_mm.len()).map(|after| Self::Air { group: g, after }));
        }
        for (k, state) in design.states.iter().enumerate() {
            let spacing = |after| Self::Spacing { state: k, after };
            places.extend((0..state.spacings_mm.len()).map(spacing));
        }
        places
    }

    /// Where the number stands in the design file, steps into lists as numbers.
    #[must_use]
    pub fn address(self) -> Address {
        match self {
            Self::Radius(id) => {
                element_address(id.group, id.element).key("radii_mm").index(id.surface)
            }
            Self::Conic(id) => {
                element_address(id.group, id.element).key("shapes").index(id.surface).key("conic")
            }
            Self::Asphere(id, term) => element_address(id.group, id.element)
                .key("shapes")
                .index(id.surface)
                .key("asphere")
                .key(asphere_power(term).to_string()),
            Self::Thickness { group, element, glass } => {
                element_address(group, element).key("thicknesses_mm").index(glass)
            }
            Self::Air { group, after } => {
                Address::root().key("groups").index(group).key("airs_mm").index(after)
            }
            Self::Spacing { state, after } => {
                Address::root().key("states").index(state).key("spacings_mm").index(after)
            }
        }
    }

    /// The surface whose shape it is a number of, beside its radius; `None` for anything else.
    #[must_use]
    pub fn shapes(self) -> Option<SurfaceId> {
        match self {
            Self::Conic(id) | Self::Asphere(id, _) => Some(id),
            Self::Radius(_) | Self::Thickness { .. } | Self::Air { .. } | Self::Spacing { .. } => {
                None
            }
        }
    }

    /// The number itself: 1/mm for a radius (its curvature), mm for lengths, mm^(1−power) for an
    /// asphere coefficient.
    #[must_use]
    pub fn value(self, design: &Design) -> f64 {
        let surface =
            |id: SurfaceId| &design.groups[id.group].elements[id.element].surfaces[id.surface];
        match self {
            Self::Radius(id) => surface(id).curvature,
            Self::Conic(id) => surface(id).conic,
            Self::Asphere(id, term) => surface(id).asphere[term],
            Self::Thickness { group, element, glass } => {
                design.groups[group].elements[element].thicknesses_mm[glass]
            }
            Self::Air { group, after } => design.groups[group].airs_mm[after],
            Self::Spacing { state, after } => design.states[state].spacings_mm[after],
        }
    }

    /// Sets the number, in the unit of [`Self::value`].
    pub fn set(self, design: &mut Design, value: f64) {
        let groups = &mut design.groups;
        match self {
            Self::Radius(SurfaceId { group, element, surface }) => {
                groups[group].elements[element].surfaces[surface].curvature = value;
            }
            Self::Conic(SurfaceId { group, element, surface }) => {
                groups[group].elements[element].surfaces[surface].conic = value;
            }
            Self::Asphere(SurfaceId { group, element, surface }, term) => {
                groups[group].elements[element].surfaces[surface].asphere[term] = value;
            }
            Self::Thickness { group, element, glass } => {
                groups[group].elements[element].thicknesses_mm[glass] = value;
            }
            Self::Air { group, after } => groups[group].airs_mm[after] = value,
            Self::Spacing { state, after } => design.states[state].spacings_mm[after] = value,
        }
    }
}
