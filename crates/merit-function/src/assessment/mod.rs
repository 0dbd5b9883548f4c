//! The assessment: every state's numbers and every limit, of a design as it stands.
//!
//! Nothing here is sampled as the optimiser samples: wavefronts are integrated to convergence.

mod cautions;
mod element;
mod hazards;
mod limit;
mod obstacle;
mod readjust;
mod real_beam;
mod state;
mod surface;
mod warnings;

use serde::Serialize;
use surface_model::design::Design;

use crate::limit_item::{LimitItem, StateView};
use crate::movement::Way;
use crate::wishes::Wishes;

pub use element::{ElementAssessment, GroupAssessment};
pub use hazards::{
    Exposure, FocusHazard, GhostFocusHazard, GhostHazard, StateHazards, SurfaceHazard,
};
pub use limit::LimitAssessment;
pub use obstacle::{Obstacle, obstacle};
pub use readjust::Readjustment;
pub use real_beam::{
    BeamAssessment, BeamNumbers, FarFieldAssessment, PointingAssessment, RangeBeam, SurfaceBeam,
    real_beam,
};
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
    /// One entry a temperature beside 20 °C at which the goals hold too: the states untouched.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub at_temperatures: Vec<TemperatureAssessment>,
    /// One entry a group.
    pub groups: Vec<GroupAssessment>,
    /// One entry an element.
    pub elements: Vec<ElementAssessment>,
    /// One entry a limited quantity.
    pub limits: Vec<LimitAssessment>,
    /// The real beam in every state at every wavelength, where the file describes the laser.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub real_beam: Option<Vec<BeamAssessment>>,
    /// What every state's beam may damage, where power or pulse energy is given.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub hazards: Option<Vec<StateHazards>>,
    /// What must be said wherever power is; empty where none is given.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub cautions: Vec<String>,
    /// What a careful reader should know and no limit says.
    pub warnings: Vec<String>,
}

/// Every state at another temperature than 20 °C, nothing re-adjusted.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct TemperatureAssessment {
    /// Which, °C.
    pub temperature_c: f64,
    /// One entry a zoom state.
    pub states: Vec<StateAssessment>,
}

impl Assessment {
    /// Every state at every temperature: at 20 °C first.
    pub fn all_states(&self) -> impl Iterator<Item = (Option<f64>, &StateAssessment)> {
        let warm = self
            .at_temperatures
            .iter()
            .flat_map(|at| at.states.iter().map(|state| (Some(at.temperature_c), state)));
        self.states.iter().map(|state| (None, state)).chain(warm)
    }
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
    let about_the_way = items.iter().any(LimitItem::is_of_the_way);
    let way = if about_the_way { Way::solved(design) } else { None };
    let judged: Vec<(LimitAssessment, f64)> =
        items.iter().map(|item| limit::judge(item, design, &views, way.as_ref())).collect();
    let limits_merit: f64 = judged.iter().map(|(_, merit)| merit).sum();
    let limits: Vec<LimitAssessment> = judged.into_iter().map(|(limit, _)| limit).collect();
    let at_temperatures: Vec<TemperatureAssessment> = wishes
        .other_temperatures_c()
        .filter_map(|&temperature_c| at_temperature(design, wishes, temperature_c))
        .collect();
    let warm = || at_temperatures.iter().flat_map(|at| &at.states);
    let goals: Option<f64> = states.iter().chain(warm()).map(|state| state.merit).sum();
    let elements = element::assess(design, &views);
    let described = design.beam.laser.is_described();
    let hazards = hazards::hazards(design);
    Assessment {
        format: "drawtube-assessment/1",
        title: design.title.clone(),
        meets: states.iter().chain(warm()).all(|state| state.met)
            && limits.iter().all(|limit| limit.met),
        merit: Merit {
            total: goals.map(|goals| goals + limits_merit),
            goals,
            limits: limits_merit,
        },
        real_beam: described.then(|| real_beam(design, wishes, &[])),
        cautions: cautions::cautions(&design.beam.laser),
        warnings: warnings::warnings(design, &elements, &states)
            .into_iter()
            .chain(cautions::warnings(design, hazards.as_deref().unwrap_or_default()))
            .collect(),
        hazards,
        states,
        at_temperatures,
        groups: element::assess_groups(design, &views),
        elements,
        limits,
    }
}

/// Every state at another temperature; `None` where something does not say how it changes, which
/// a design file that names temperatures rules out.
fn at_temperature(
    design: &Design,
    wishes: &Wishes,
    temperature_c: f64,
) -> Option<TemperatureAssessment> {
    let warm = design.at_temperature(temperature_c).ok()?;
    let positions = warm.all_positions_mm();
    let states = warm.states.iter().zip(&positions).zip(&wishes.states);
    let assessed = states
        .map(|((state, positions), goals)| state::assess(&warm, state, positions, goals))
        .collect();
    Some(TemperatureAssessment { temperature_c, states: assessed })
}

fn finite(value: f64) -> Option<f64> {
    value.is_finite().then_some(value)
}
