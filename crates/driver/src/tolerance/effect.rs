//! What an error does to a train, and to first order to what is measured.

use surface_model::place::Place;
use surface_model::sequence::{Sequence, SurfaceId};
use surface_model::spoilt::FRINGE_NM;
use surface_model::train::Train;

use super::bench::{Bench, add};
use super::item::{Item, Target};
use super::kind::Kind;

/// What an error does to a train, found out once.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Effect {
    /// c becomes c/(1 + e/100).
    RadiusPercent {
        surface: usize,
    },
    /// c changes by so much a fringe, 1/mm.
    RadiusFringes {
        surface: usize,
        by: f64,
    },
    Irregularity {
        surface: usize,
    },
    /// A packed variable changes.
    Length {
        packed: usize,
    },
    /// A packed variable is set wrong.
    Setting {
        packed: usize,
    },
    Index {
        medium: usize,
    },
    Abbe {
        medium: usize,
    },
    Wedge {
        surface: usize,
    },
    ElementDecentre {
        element: usize,
    },
    ElementTilt {
        element: usize,
    },
    GroupDecentre {
        group: usize,
    },
    GroupTilt {
        group: usize,
    },
}

/// One tolerance on the bench.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct BenchItem {
    pub(crate) item: Item,
    pub(crate) effect: Effect,
}

impl Bench<'_> {
    /// Exact derivative of what is measured of state `k` by a round error, by its unit; `None`
    /// for one that is not round.
    pub(crate) fn by_error(&self, k: usize, effect: Effect) -> Option<Vec<f64>> {
        let state = &self.states[k];
        let quantities = self.quantities;
        let mut sum = vec![0.0; state.nominal.len()];
        match effect {
            Effect::RadiusPercent { surface } => {
                let by = -0.01 * state.trains[0].surfaces()[surface].curvature;
                add(&mut sum, by, &state.by_quantity[quantities.curvature(surface)]);
            }
            Effect::RadiusFringes { surface, by } => {
                add(&mut sum, by, &state.by_quantity[quantities.curvature(surface)]);
            }
            Effect::Length { packed } | Effect::Setting { packed } => {
                return Some(self.by_packed(k, packed));
            }
            Effect::Index { medium } => {
                add(&mut sum, 1.0, &state.by_quantity[quantities.index(medium)]);
            }
            Effect::Abbe { medium } => {
                let column = &state.by_quantity[quantities.index(medium)];
                let rays = self.roots.len();
                for (row, by) in column.iter().enumerate() {
                    // Ratio and exit slope are told at the first wavelength.
                    let train = if row < rays * state.trains.len() { row / rays } else { 0 };
                    sum[row] = -0.01 * self.dispersion(&state.trains[train], medium) * by;
                }
            }
            _ => return None,
        }
        Some(sum)
    }

    /// n − n_d of a medium in a train: what is in inverse proportion to the Abbe number.
    pub(crate) fn dispersion(&self, train: &Train, medium: usize) -> f64 {
        self.at_d_line[medium].map_or(0.0, |at_d| train.indices()[medium] - at_d)
    }

    /// What an error does. `None` for the setting of a spacing that follows from the others.
    pub(super) fn effect(&self, item: &Item, sequence: &Sequence) -> Option<Effect> {
        let surface_place = |id| sequence.place_of_surface(id);
        match item.target {
            Target::Surface(id) => {
                let surface = surface_place(id)?;
                Some(match item.kind {
                    Kind::RadiusPercent => Effect::RadiusPercent { surface },
                    Kind::RadiusFringes => {
                        Effect::RadiusFringes { surface, by: self.curvature_a_fringe(id)? }
                    }
                    _ => Effect::Irregularity { surface },
                })
            }
            Target::Glass { group, element, glass } => {
                // The surface behind the glass; the medium before it has the same number.
                let behind = surface_place(SurfaceId { group, element, surface: glass + 1 })?;
                Some(match item.kind {
                    Kind::ThicknessMm => {
                        let place = Place::Thickness { group, element, glass };
                        Effect::Length { packed: self.packed(place)? }
                    }
                    Kind::Index => Effect::Index { medium: behind },
                    Kind::AbbePercent => Effect::Abbe { medium: behind },
                    _ => Effect::Wedge { surface: behind },
                })
            }
            Target::Air { group, after } => {
                Some(Effect::Length { packed: self.packed(Place::Air { group, after })? })
            }
            Target::Element { group, element } => {
                let before: usize =
                    self.design.groups[..group].iter().map(|group| group.elements.len()).sum();
                let element = before + element;
                Some(match item.kind {
                    Kind::ElementDecentreMm => Effect::ElementDecentre { element },
                    _ => Effect::ElementTilt { element },
                })
            }
            Target::Group(group) => Some(match item.kind {
                Kind::GroupDecentreMm => Effect::GroupDecentre { group },
                _ => Effect::GroupTilt { group },
            }),
            Target::Spacing { state, after } => {
                Some(Effect::Setting { packed: self.packed(Place::Spacing { state, after })? })
            }
        }
    }

    /// Change of curvature that changes the sag at the clear semi-diameter a by one fringe, 1/mm:
    /// ∂z/∂c = (a² + z²)/(2w).
    fn curvature_a_fringe(&self, id: SurfaceId) -> Option<f64> {
        let surface = &self.design.groups[id.group].elements[id.element].surfaces[id.surface];
        let (a, c, k1) = (surface.semi_diameter, surface.curvature, 1.0 + surface.conic);
        let w = (1.0 - k1 * c * c * a * a).sqrt();
        let z = c * a * a / (1.0 + w);
        let by = FRINGE_NM * 1e-6 * 2.0 * w / (a * a + k1 * z * z);
        by.is_finite().then_some(by)
    }
}
