//! A sweep plan as it is written.

use schemars::{JsonSchema, Schema};
use serde::{Deserialize, Serialize};
use serde_json::Value;
use surface_model::document::union;

use crate::document_kind::part;

/// What is swept over what.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub(super) struct PlanDocument {
    /// Which version of the plan format this is.
    pub(super) format: PlanFormat,
    /// What the sweep is for.
    #[serde(default)]
    pub(super) title: String,
    /// The design file that every point changes and optimises, seen from the folder of the plan.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) design: Option<String>,
    /// Instead of a design the brief that every point changes and begins anew, seen from the
    /// folder of the plan.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) brief: Option<String>,
    /// What is varied. Without `sample` every value of each axis is combined with every value of
    /// the others.
    #[schemars(length(min = 1, max = 64))]
    pub(super) axes: Vec<AxisDocument>,
    /// Draw points from the ranges of all axes together instead of combining their steps.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) sample: Option<SampleDocument>,
    /// Starts of each point, from 1 to 1000; 1 if left out. Of a design: the best neighbour, then
    /// the design of the plan, then the neighbour shaken at random. Of a brief: starts of the
    /// search, as `overnight` makes them, the best neighbour besides.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) starts: Option<u32>,
    /// Seed of the random numbers; 0 if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) seed: Option<u64>,
    /// Two results to weigh against each other, the less the better: "merit",
    /// "worst_rms_waves", "worst_ratio_error_percent", "worst_exit_slope_urad", "track_mm", or the
    /// address of a number of the design; of a brief, that of an axis.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) front: Option<[String; 2]>,
}

/// The version of the plan format.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub(super) enum PlanFormat {
    /// The first version.
    #[serde(rename = "drawtube-plan/1")]
    V1,
}

/// One axis: `values` or `range`.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub(super) struct AxisDocument {
    /// An address of the design or brief. A number of a design that is swept is held in every
    /// point.
    pub(super) at: String,
    /// The values, in order: numbers, words, anything that may stand there.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    #[schemars(length(min = 1))]
    pub(super) values: Option<Vec<Value>>,
    /// A range of numbers.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) range: Option<RangeDocument>,
}

/// A range of numbers, both ends in it.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub(super) struct RangeDocument {
    /// First number.
    pub(super) from: f64,
    /// Last number.
    pub(super) to: f64,
    /// How many numbers, ends and all; left out where points are drawn.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) steps: Option<u32>,
    /// How they are spaced; "linear" if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub(super) scale: Option<ScaleDocument>,
}

/// How numbers are spaced.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Deserialize, Serialize, JsonSchema)]
#[serde(rename_all = "lowercase")]
pub(super) enum ScaleDocument {
    /// Equal differences.
    #[default]
    Linear,
    /// Equal ratios.
    Logarithmic,
}

/// Points drawn instead of combined.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub(super) struct SampleDocument {
    /// How they are drawn.
    pub(super) kind: SampleKind,
    /// How many.
    pub(super) points: u32,
}

/// How points are drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub(super) enum SampleKind {
    /// Sobol's low-discrepancy points.
    #[serde(rename = "sobol")]
    Sobol,
    /// A Latin hypercube: every axis evenly spread over the points.
    #[serde(rename = "latin-hypercube")]
    LatinHypercube,
}

/// JSON Schema of sweep plans.
#[must_use]
pub fn plan_schema() -> Schema {
    union("A drawtube sweep plan", &[part::<PlanDocument>()])
}
