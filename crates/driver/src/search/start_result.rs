//! What a start ends with.

use merit_function::assessment::assess;
use serde::{Deserialize, Serialize};
use serde_json::Value;

use super::shape::Shape;
use crate::design_file::DesignFile;

/// What came of one start.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct StartResult {
    /// The start's number.
    pub number: u64,
    /// Local optimisations it took.
    pub optimisations: u64,
    /// The best design it found; `None` where no point could be traced.
    pub found: Option<Found>,
}

/// A design a start found, with figures to rank it by.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Found {
    /// Its merit as `assess` tells it: wavefronts integrated to convergence, crossed limits
    /// included. Finite.
    pub merit: f64,
    /// Whether every limit is kept.
    pub limits_kept: bool,
    /// Whether every goal and limit is met.
    pub meets: bool,
    /// Largest RMS wavefront error of any state and wavelength, waves.
    pub worst_rms_waves: Option<f64>,
    /// Longest track of any state, first vertex to last vertex, mm.
    pub track_mm: f64,
    /// Number of elements.
    pub elements: usize,
    /// Glasses, from left to right.
    pub glasses: Vec<String>,
    /// What makes it the design it is.
    pub shape: Shape,
    /// The design file.
    pub design: Value,
}

impl Found {
    /// Assesses a design; `None` if a state cannot be evaluated.
    pub(super) fn of(file: &DesignFile) -> Option<Self> {
        let design = &file.design;
        let assessment = assess(design, &file.wishes);
        let waves = assessment.states.iter().flat_map(|state| &state.wavefront);
        let elements = || design.groups.iter().flat_map(|group| &group.elements);
        let lengths = design.states.iter().map(|state| design.length_mm(state));
        Some(Self {
            merit: assessment.merit.total.filter(|merit| merit.is_finite())?,
            limits_kept: assessment.limits.iter().all(|limit| limit.met),
            meets: assessment.meets,
            worst_rms_waves: waves.filter_map(|wavefront| wavefront.rms_waves).reduce(f64::max),
            track_mm: lengths.fold(0.0, f64::max),
            elements: elements().count(),
            glasses: elements()
                .flat_map(|element| &element.glasses)
                .map(|glass| glass.name().to_owned())
                .collect(),
            shape: Shape::of(design),
            design: file.document().value().clone(),
        })
    }
}
