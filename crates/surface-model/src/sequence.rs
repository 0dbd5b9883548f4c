//! Where each surface and each gap of a design stands in its flat train.

use crate::design::Group;

/// A surface, named by group, element and place in the element, all counted from 0.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct SurfaceId {
    /// Which group.
    pub group: usize,
    /// Which element of the group.
    pub element: usize,
    /// Which surface of the element.
    pub surface: usize,
}

/// What the gap behind a surface is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum GapId {
    /// Glass `glass` of an element.
    Thickness {
        /// Which group.
        group: usize,
        /// Which element of the group.
        element: usize,
        /// Which glass of the element.
        glass: usize,
    },
    /// Air behind element `after` of a group.
    Air {
        /// Which group.
        group: usize,
        /// The element it follows.
        after: usize,
    },
    /// Air behind group `after`: each state has its own.
    Spacing {
        /// The group it follows.
        after: usize,
    },
}

/// The order of surfaces and gaps in a train.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Sequence {
    /// Surfaces from left to right.
    pub surfaces: Vec<SurfaceId>,
    /// Gaps from left to right, one fewer.
    pub gaps: Vec<GapId>,
    /// Per group, the place of its first surface; then the number of surfaces.
    group_starts: Vec<usize>,
}

impl Sequence {
    pub(crate) fn of(groups: &[Group]) -> Self {
        let (mut surfaces, mut gaps, mut group_starts) = (Vec::new(), Vec::new(), Vec::new());
        for (group, parts) in groups.iter().enumerate() {
            group_starts.push(surfaces.len());
            for (element, part) in parts.elements.iter().enumerate() {
                let ids = 0..part.surfaces.len();
                surfaces.extend(ids.map(|surface| SurfaceId { group, element, surface }));
                let ids = 0..part.glasses.len();
                gaps.extend(ids.map(|glass| GapId::Thickness { group, element, glass }));
                if element + 1 < parts.elements.len() {
                    gaps.push(GapId::Air { group, after: element });
                }
            }
            if group + 1 < groups.len() {
                gaps.push(GapId::Spacing { after: group });
            }
        }
        group_starts.push(surfaces.len());
        Self { surfaces, gaps, group_starts }
    }

    /// Place in the train of the first surface of a group; of the group count, the number of
    /// surfaces.
    #[must_use]
    pub fn first_surface(&self, group: usize) -> usize {
        self.group_starts[group]
    }

    /// Number of groups.
    #[must_use]
    pub fn groups(&self) -> usize {
        self.group_starts.len() - 1
    }

    /// Place in the train of a surface.
    #[must_use]
    pub fn place_of_surface(&self, id: SurfaceId) -> Option<usize> {
        self.surfaces.iter().position(|&other| other == id)
    }

    /// Place in the train of a gap.
    #[must_use]
    pub fn place_of_gap(&self, id: GapId) -> Option<usize> {
        self.gaps.iter().position(|&other| other == id)
    }
}
