//! Goals: values wanted in every state, each with the miss that counts as one unit of merit.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// Goals as a design file writes them: of all states, or overriding in one.
#[derive(Debug, Clone, Copy, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct GoalsDocument {
    /// RMS wavefront error wanted, in waves, at every wavelength.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wavefront_rms_waves: Option<WithinDocument>,
    /// Error of the ratio, in per cent of the ratio wanted.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ratio_percent: Option<WithinDocument>,
    /// Paraxial slope behind the last surface of the ray that enters at the 1/e² radius, in µrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub exit_slope_urad: Option<WithinDocument>,
}

/// A goal's tolerance.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct WithinDocument {
    /// A miss by this much counts as one unit of merit and is the most that is still met.
    pub within: f64,
}

/// The goals of one state, resolved: each is its `within`, or absent.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Goals {
    /// RMS wavefront error, waves.
    pub wavefront_rms_waves: Option<f64>,
    /// Ratio error, per cent.
    pub ratio_percent: Option<f64>,
    /// Exit slope, µrad.
    pub exit_slope_urad: Option<f64>,
    /// Weight of the state in the merit.
    pub weight: f64,
}

impl Goals {
    /// The goals of a state: its own where it has them, else those of all states.
    #[must_use]
    pub fn of_state(all: &GoalsDocument, own: Option<&GoalsDocument>, weight: f64) -> Self {
        let pick = |goal: fn(&GoalsDocument) -> Option<WithinDocument>| {
            own.and_then(goal).or(goal(all)).map(|goal| goal.within)
        };
        Self {
            wavefront_rms_waves: pick(|goals| goals.wavefront_rms_waves),
            ratio_percent: pick(|goals| goals.ratio_percent),
            exit_slope_urad: pick(|goals| goals.exit_slope_urad),
            weight,
        }
    }
}
