//! The assessment: every state's numbers and every limit, of a design as it stands.
//!
//! Nothing here is sampled as the optimiser samples: wavefronts are integrated to convergence.

mod element;
mod limit;
mod obstacle;
mod state;
mod surface;
mod warnings;

use serde::Serialize;
use surface_model::design::Design;

use crate::limit_item::{LimitItem, StateView};
use crate::wishes::Wishes;

pub use element::{ElementAssessment, GroupAssessment};
pub use limit::LimitAssessment;
pub use obstacle::{Obstacle, obstacle};
pub use state::{StateAssessment, WavefrontAssessment};
pub use surface::SurfaceAssessment;

/// What `assess` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Assessment {
    /// Always `drawtube-assessment/1`.
    pub format: &'static str,
    /// The design's title.
    pub title: String,
    /// Whether every goal and every limit is met in every state.
    pub meets: bool,
    /// The merit function, wavefronts integrated to convergence.
    pub merit: Merit,
    /// One entry a zoom state.
    pub states: Vec<StateAssessment>,
    /// One entry a group.
    pub groups: Vec<GroupAssessment>,
    /// One entry an element.
    pub elements: Vec<ElementAssessment>,
    /// One entry a limited quantity.
    pub limits: Vec<LimitAssessment>,
    /// What a careful reader should know and no limit says.
    pub warnings: Vec<String>,
}

/// The merit function's parts; `None` where a state cannot be evaluated.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Merit {
    /// Goals and limits together.
    pub total: Option<f64>,
    /// Σ over states of weight × Σ (miss/within)².
    pub goals: Option<f64>,
    /// What crossed limits add.
    pub limits: f64,
}

/// Assesses a design against what is wanted of it.
#[must_use]
pub fn assess(design: &Design, wishes: &Wishes) -> Assessment {
    let positions = design.all_positions_mm();
    let states: Vec<StateAssessment> = design
        .states
        .iter()
        .zip(&positions)
        .zip(&wishes.states)
        .map(|((state, positions), goals)| state::assess(design, state, positions, goals))
        .collect();
    let placed = design.states.iter().zip(positions);
    let views: Option<Vec<StateView>> =
        placed.map(|(state, positions)| state::view(design, state, positions)).collect();
    let views = views.unwrap_or_default();
    let items = LimitItem::all(design, &wishes.limits);
    let judged: Vec<(LimitAssessment, f64)> =
        items.iter().map(|item| limit::judge(item, design, &views)).collect();
    let limits_merit: f64 = judged.iter().map(|(_, merit)| merit).sum();
    let limits: Vec<LimitAssessment> = judged.into_iter().map(|(limit, _)| limit).collect();
    let goals: Option<f64> = states.iter().map(|state| state.merit).sum();
    let elements = element::assess(design, &views);
    Assessment {
        format: "drawtube-assessment/1",
        title: design.title.clone(),
        meets: states.iter().all(|state| state.met) && limits.iter().all(|limit| limit.met),
        merit: Merit {
            total: goals.map(|goals| goals + limits_merit),
            goals,
            limits: limits_merit,
        },
        warnings: warnings::warnings(design, &elements, &states),
        states,
        groups: element::assess_groups(design, &views),
        elements,
        limits,
    }
}

fn finite(value: f64) -> Option<f64> {
    value.is_finite().then_some(value)
}
