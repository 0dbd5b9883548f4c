//! One limited quantity: its value, and whether the limit is kept.

use serde::Serialize;
use surface_model::design::Design;
use surface_model::document::Address;

use super::finite;
use crate::limit_item::{LimitItem, StateView};
use crate::limits::LimitKind;
use crate::movement::Way;

/// One limited quantity.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LimitAssessment {
    /// Which limit.
    pub limit: LimitKind,
    /// What it applies to.
    pub at: Address,
    /// Name of the state, where the value is one state's.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub state: Option<String>,
    /// The ratio at which the value is met, where the limit holds along the whole movement curve.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub at_ratio: Option<f64>,
    /// The value; `None` where it cannot be measured, or is infinite (the radius of a flat).
    pub value: Option<f64>,
    /// Smallest value allowed.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub min: Option<f64>,
    /// Largest value allowed.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub max: Option<f64>,
    /// Whether it is kept, to the tolerance of its kind.
    pub met: bool,
}

/// A limit's assessment, and what it adds to the merit. A limit that cannot be measured is not
/// met, and adds what one crossed by its whole range would.
pub(super) fn judge(
    item: &LimitItem,
    design: &Design,
    views: &[StateView],
    way: Option<&Way>,
) -> (LimitAssessment, f64) {
    let on_the_way = way.and_then(|way| item.worst_on_the_way(design, views, way));
    let in_the_states = || if views.is_empty() { None } else { item.value(design, views) };
    let value = on_the_way.map(|(value, _)| value).or_else(in_the_states);
    let crossed_by = value.map(|value| item.range.crossed_by(value));
    let tolerance = item.kind.tolerance();
    let at_names_state = item.at.steps().first() == Some(&"states");
    let state = item.state.filter(|_| !at_names_state).map(|k| design.states[k].name.clone());
    let merit = crossed_by.map_or(UNMEASURED, |by| item.kind.merit_of_crossing(by));
    let assessment = LimitAssessment {
        limit: item.kind,
        at: item.at.clone(),
        state,
        at_ratio: on_the_way.map(|(_, ratio)| ratio),
        value: value.and_then(finite),
        min: finite(item.range.min),
        max: finite(item.range.max),
        met: crossed_by.is_some_and(|by| by <= tolerance),
    };
    (assessment, merit)
}

/// What a limit adds to the merit that cannot be measured at all.
const UNMEASURED: f64 = 1e6;
