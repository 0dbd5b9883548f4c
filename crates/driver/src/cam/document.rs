//! The movement curve as people and programs get it.

use merit_function::assessment::WavefrontAssessment;
use serde::Serialize;

use super::barrel::{Barrel, Groove};
use super::finding::Finding;

/// What `cam --json` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct MovementCurve {
    /// Always `drawtube-cam/1`.
    pub format: &'static str,
    /// The design's title.
    pub title: String,
    /// Wavelength at which ratio and collimation are held, nm.
    pub wavelength_nm: f64,
    /// What is held along the curve.
    pub held: Hold,
    /// Where the beam should come to a focus all along the curve, m behind the last vertex; absent
    /// for a collimated beam.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub exit_focus_m: Option<f64>,
    /// The barrel the grooves are cut in, if one was given.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub barrel: Option<Barrel>,
    /// One entry a group.
    pub groups: Vec<GroupWay>,
    /// One entry a designed state that the curve goes through, by ascending ratio.
    pub states: Vec<DesignedState>,
    /// The curve at the ratios asked for and at those of the states, ascending. Where it breaks
    /// off, points are missing.
    pub points: Vec<CurvePoint>,
    /// The same at every ratio looked at.
    #[serde(skip)]
    pub fine: Vec<CurvePoint>,
    /// What is wrong along it, and what should be known of it.
    pub findings: Vec<Finding>,
    /// Whether nothing is wrong.
    pub sound: bool,
}

/// What is held along a curve.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Hold {
    /// Ratio and collimation.
    RatioAndCollimation,
    /// Ratio and the focus that the states want.
    RatioAndFocus,
    /// The ratio alone: only one group moves.
    Ratio,
}

/// How a group takes part in the movement.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Part {
    /// It stands still.
    Still,
    /// Its position follows from what is held.
    Solved,
    /// It follows the monotone cubic through the designed states: ratio and collimation leave it
    /// free.
    Guided,
}

/// The way of one group.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct GroupWay {
    /// Its name.
    pub name: String,
    /// How it takes part.
    pub part: Part,
    /// Foremost and rearmost position of its first vertex, mm.
    pub from_to_mm: [f64; 2],
    /// The distance between the two, mm.
    pub travel_mm: f64,
    /// Steepest slope on the way, mm a unit of ratio.
    pub steepest_mm_per_ratio: f64,
}

/// A designed state beside the curve.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct DesignedState {
    /// Its name.
    pub name: String,
    /// Its ratio.
    pub ratio: f64,
    /// Per group, the curve's position less the designed one, mm.
    pub curve_less_design_mm: Vec<f64>,
}

/// The curve at one ratio.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurvePoint {
    /// The ratio.
    pub ratio: f64,
    /// Name of the designed state of this ratio.
    pub state: Option<String>,
    /// How far the barrel has turned, degrees.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub barrel_deg: Option<f64>,
    /// One entry a group.
    pub groups: Vec<GroupAtRatio>,
    /// Air between the groups, mm.
    pub spacings_mm: Vec<f64>,
    /// Slope that the best sphere of the exit wavefront gives the ray at the 1/e² radius, µrad;
    /// where a focus is wanted, less the slope that leads there.
    pub collimation_urad: f64,
    /// Paraxial ratio less the one wanted, per cent.
    pub ratio_error_percent: Option<f64>,
    /// Paraxial exit slope, µrad.
    pub exit_slope_urad: Option<f64>,
    /// The same less the slope that leads to the focus that is wanted, µrad.
    #[serde(skip)]
    pub paraxial_off_urad: Option<f64>,
    /// Where the paraxial ray at the 1/e² radius crosses the axis, m behind the last vertex, where
    /// a focus is wanted.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub exit_focus_m: Option<f64>,
    /// One entry a wavelength.
    pub wavefront: Vec<WavefrontAssessment>,
}

/// A group at one ratio.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct GroupAtRatio {
    /// Its name.
    pub name: String,
    /// Its first vertex, from the front datum, mm.
    pub position_mm: f64,
    /// d position/d ratio, mm.
    pub slope_mm_per_ratio: f64,
    /// What the collimation changes by when this group alone is out of place, µrad per µm.
    pub collimation_urad_per_um: f64,
    /// Its groove on the barrel.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub groove: Option<Groove>,
}

impl MovementCurve {
    /// The groups that move.
    pub fn moving(&self) -> impl Iterator<Item = usize> + '_ {
        let moves = |&group: &usize| self.groups[group].part != Part::Still;
        (0..self.groups.len()).filter(moves)
    }

    /// Smallest and largest ratio of the designed states.
    #[must_use]
    pub fn ends(&self) -> [f64; 2] {
        let ratio = |state: Option<&DesignedState>| state.map_or(0.0, |state| state.ratio);
        [ratio(self.states.first()), ratio(self.states.last())]
    }
}
