//! One point of a sweep, optimised.

use merit_function::assessment::{Assessment, assess};
use serde::{Deserialize, Serialize};
use serde_json::Value;

use crate::design_file::DesignFile;

/// What became of a point.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct PointResult {
    /// Its number in the sweep.
    pub number: u64,
    /// Values of the axes, in their order.
    pub values: Vec<Value>,
    /// What it came to; null where there is no design.
    pub reached: Option<Reached>,
    /// Why it could not be optimised.
    pub fault: Option<String>,
    /// That no layout answers the brief, which is no fault: what stands against most of those that
    /// were looked at.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub no_layout: Option<String>,
}

/// What a point comes to.
pub(super) enum Outcome {
    Reached(Box<Reached>),
    /// The brief of the point has no layout; what stands against most.
    NoLayout(String),
    /// It cannot be optimised; why.
    Fault(String),
}

impl PointResult {
    pub(super) fn new(number: u64, values: Vec<Value>, outcome: Outcome) -> Self {
        let (reached, fault, no_layout) = match outcome {
            Outcome::Reached(reached) => (Some(*reached), None, None),
            Outcome::NoLayout(reason) => (None, None, Some(reason)),
            Outcome::Fault(reason) => (None, Some(reason), None),
        };
        Self { number, values, reached, fault, no_layout }
    }
}

/// A point that another may start from.
pub(super) struct Neighbour {
    pub(super) number: u64,
    pub(super) merit: f64,
    /// Its design file.
    pub(super) design: Value,
}

impl Neighbour {
    /// `None` where the point has no design.
    pub(super) fn of(point: &PointResult) -> Option<Self> {
        let reached = point.reached.as_ref()?;
        let (number, merit) = (point.number, reached.merit);
        Some(Self { number, merit, design: reached.design.clone() })
    }
}

/// What an optimised point reaches.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Reached {
    /// Merit, crossed limits included. Finite.
    pub merit: f64,
    /// Whether every goal and every limit is met.
    pub meets: bool,
    /// Limits crossed.
    pub limits_crossed: usize,
    /// Largest RMS wavefront error of any state and wavelength, waves.
    pub worst_rms_waves: Option<f64>,
    /// Largest ratio error of any state, per cent, without sign.
    pub worst_ratio_error_percent: Option<f64>,
    /// Largest exit slope of any state, µrad, without sign.
    pub worst_exit_slope_urad: Option<f64>,
    /// Longest track of any state, first vertex to last vertex, mm.
    pub track_mm: f64,
    /// The point whose design the best start was made of; null for the plan's own, or where a
    /// search found it.
    pub from_point: Option<u64>,
    /// Steps of the solver over all starts.
    pub iterations: u64,
    /// The design file.
    pub design: Value,
}

impl Reached {
    /// Assesses a design; `None` where rays fail.
    pub(super) fn of(file: &DesignFile, from_point: Option<u64>, iterations: u64) -> Option<Self> {
        let assessment = assess(&file.design, &file.wishes);
        Self::from_assessment(&assessment, file, from_point, iterations)
    }

    pub(super) fn from_assessment(
        assessment: &Assessment,
        file: &DesignFile,
        from_point: Option<u64>,
        iterations: u64,
    ) -> Option<Self> {
        let states = &assessment.states;
        let worst = |values: &mut dyn Iterator<Item = Option<f64>>| {
            values.flatten().map(f64::abs).reduce(f64::max)
        };
        let waves = states.iter().flat_map(|state| &state.wavefront);
        Some(Self {
            merit: assessment.merit.total.filter(|merit| merit.is_finite())?,
            meets: assessment.meets,
            limits_crossed: assessment.limits.iter().filter(|limit| !limit.met).count(),
            worst_rms_waves: worst(&mut waves.map(|wavefront| wavefront.rms_waves)),
            worst_ratio_error_percent: worst(&mut states.iter().map(|s| s.ratio_error_percent)),
            worst_exit_slope_urad: worst(&mut states.iter().map(|s| s.exit_slope_urad)),
            track_mm: states.iter().map(|state| state.track_mm).fold(0.0, f64::max),
            from_point,
            iterations,
            design: file.document().value().clone(),
        })
    }
}
