//! Whether a design keeps its limits and lets its rays through, and nothing else: no wavefront is
//! integrated, so that thousands of designs can be sifted.

use surface_model::design::Design;

use super::state;
use crate::limit_item::{LimitItem, StateView};
use crate::limits::{LimitKind, Limits};

/// The first thing that stands against a design.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Obstacle {
    /// The outermost ray fails in a state.
    Rays,
    /// A limit is crossed by more than its tolerance, or cannot be measured.
    Limit(LimitKind),
}

/// The first obstacle to a design, if there is any: the outermost ray of every state at its first
/// wavelength, then the limits in the order of the file, the housing last. What is about the way
/// between the states is not looked at.
#[must_use]
pub fn obstacle(design: &Design, limits: &Limits) -> Option<Obstacle> {
    let placed = design.states.iter().zip(design.all_positions_mm());
    let views: Option<Vec<StateView>> =
        placed.map(|(state, positions)| state::view(design, state, positions)).collect();
    let Some(views) = views.filter(|views| views.iter().all(|view| view.edge_ray.is_some())) else {
        return Some(Obstacle::Rays);
    };
    let crossed = |item: &LimitItem| {
        let by = item.value(design, &views).map(|value| item.range.crossed_by(value));
        !by.is_some_and(|by| by <= item.kind.tolerance())
    };
    let first = LimitItem::all(design, &limits.in_the_states()).into_iter().find(crossed);
    first.map(|item| Obstacle::Limit(item.kind))
}
