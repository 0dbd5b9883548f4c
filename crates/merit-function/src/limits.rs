//! Limits: lines that must not be crossed.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use surface_model::design::Design;
use surface_model::document::Address;

/// Limits as a design file writes them; each is optional.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct LimitsDocument {
    /// Axial distance between neighbouring surfaces of an element at its clear radius, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub edge_thickness_mm: Option<RangeDocument>,
    /// Thickness of each glass on axis, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub centre_thickness_mm: Option<RangeDocument>,
    /// Air between groups, vertex to vertex, in every state, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub spacing_mm: Option<RangeDocument>,
    /// Air inside groups, vertex to vertex, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub air_mm: Option<RangeDocument>,
    /// Air between facing surfaces at the smaller of their clear radii, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub edge_gap_mm: Option<RangeDocument>,
    /// Radius of curvature without its sign, mm; a flat is infinite.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub radius_mm: Option<RangeDocument>,
    /// Clear semi-diameter over radius without its sign.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub steepness: Option<RangeDocument>,
    /// Way of each group in the housing over all states, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub travel_mm: Option<RangeDocument>,
    /// Slope of each group's movement curve, without its sign, at every ratio from the smallest to
    /// the largest: d position/d ratio, mm a unit of ratio.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub slope_mm_per_ratio: Option<AtMostDocument>,
    /// Groups that never turn back on the way from the smallest ratio to the largest, by their
    /// addresses: `/groups/runner`, or `/groups/*` for every group that moves.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub monotonic: Vec<String>,
    /// "keep": the housing and the limits `spacing_mm`, `edge_gap_mm`, `travel_mm` and `track_mm`
    /// hold along the whole movement curve, not only in the states; and groups never touch.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub between_states: Option<BetweenDocument>,
    /// Angle of incidence of the outermost traced ray at every surface, degrees.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub incidence_deg: Option<RangeDocument>,
    /// First vertex to last vertex in every state, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub track_mm: Option<RangeDocument>,
    /// Peak energy density of a pulse, 2E/(πw²), at every surface in every state, J/cm²; needs
    /// `pulse_energy_mj` in the beam.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub fluence_j_cm2: Option<AtMostDocument>,
    /// Distance from glass of every focus of light that one surface reflects back, mm; a focus in
    /// glass counts as negative by its depth.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ghost_clearance_mm: Option<AtLeastDocument>,
    /// The same of light that two surfaces reflect, on its way to the exit.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub double_ghost_clearance_mm: Option<AtLeastDocument>,
    /// "forbid": no real focus between the first and the last surface, where a pulsed or strong
    /// beam would ionise the air or burn dust.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub internal_focus: Option<FocusDocument>,
}

/// A range; `min`, `max` or both.
#[derive(Debug, Clone, Copy, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct RangeDocument {
    /// Smallest value allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub min: Option<f64>,
    /// Largest value allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub max: Option<f64>,
}

/// A range without an upper end.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct AtLeastDocument {
    /// Smallest value allowed.
    pub min: f64,
}

/// A range without a lower end.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct AtMostDocument {
    /// Largest value allowed.
    pub max: f64,
}

impl From<AtLeastDocument> for RangeDocument {
    fn from(AtLeastDocument { min }: AtLeastDocument) -> Self {
        Self { min: Some(min), max: None }
    }
}

impl From<AtMostDocument> for RangeDocument {
    fn from(AtMostDocument { max }: AtMostDocument) -> Self {
        Self { min: None, max: Some(max) }
    }
}

/// Whether a real focus inside the expander is allowed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
#[serde(rename_all = "lowercase")]
pub enum FocusDocument {
    /// No real focus between the first and the last surface.
    Forbid,
    /// As if not given.
    Allow,
}

/// Whether limits on where groups stand hold between the states too.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
#[serde(rename_all = "lowercase")]
pub enum BetweenDocument {
    /// They hold along the whole movement curve.
    Keep,
    /// As if not given.
    Open,
}

/// The kinds of limit.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum LimitKind {
    /// Edge thickness of a glass.
    EdgeThicknessMm,
    /// Centre thickness of a glass.
    CentreThicknessMm,
    /// Air between groups.
    SpacingMm,
    /// Air inside a group.
    AirMm,
    /// Air at the edge between facing surfaces.
    EdgeGapMm,
    /// Radius of curvature.
    RadiusMm,
    /// Semi-diameter over radius.
    Steepness,
    /// Way of a group.
    TravelMm,
    /// Steepest slope of a group's movement curve.
    SlopeMmPerRatio,
    /// Least slope of a group that must not turn back, in the direction it moves.
    Monotonic,
    /// Angle of incidence.
    IncidenceDeg,
    /// Length of the train.
    TrackMm,
    /// Peak energy density of a pulse.
    #[serde(rename = "fluence_j_cm2")]
    FluenceJCm2,
    /// Distance from glass of ghosts of one reflection.
    GhostClearanceMm,
    /// Distance from glass of ghosts of two reflections.
    DoubleGhostClearanceMm,
    /// No real focus inside.
    InternalFocus,
    /// Clearance between the groups and the ends of the housing; always kept.
    HousingMm,
}

impl LimitKind {
    /// The word for it in files and tables.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::EdgeThicknessMm => "edge_thickness_mm",
            Self::CentreThicknessMm => "centre_thickness_mm",
            Self::SpacingMm => "spacing_mm",
            Self::AirMm => "air_mm",
            Self::EdgeGapMm => "edge_gap_mm",
            Self::RadiusMm => "radius_mm",
            Self::Steepness => "steepness",
            Self::TravelMm => "travel_mm",
            Self::SlopeMmPerRatio => "slope_mm_per_ratio",
            Self::Monotonic => "monotonic",
            Self::IncidenceDeg => "incidence_deg",
            Self::TrackMm => "track_mm",
            Self::FluenceJCm2 => "fluence_j_cm2",
            Self::GhostClearanceMm => "ghost_clearance_mm",
            Self::DoubleGhostClearanceMm => "double_ghost_clearance_mm",
            Self::InternalFocus => "internal_focus",
            Self::HousingMm => "housing_mm",
        }
    }

    /// How far a limit may be crossed and still counts as met, in its own unit: 1 µm for lengths
    /// (and a unit of ratio), 0.001° for angles, 0.001 J/cm², 0.00001 for pure numbers.
    #[must_use]
    pub fn tolerance(self) -> f64 {
        match self {
            Self::Steepness | Self::InternalFocus => 1e-5,
            Self::EdgeThicknessMm
            | Self::CentreThicknessMm
            | Self::SpacingMm
            | Self::AirMm
            | Self::EdgeGapMm
            | Self::RadiusMm
            | Self::TravelMm
            | Self::SlopeMmPerRatio
            | Self::Monotonic
            | Self::IncidenceDeg
            | Self::TrackMm
            | Self::FluenceJCm2
            | Self::GhostClearanceMm
            | Self::DoubleGhostClearanceMm
            | Self::HousingMm => 1e-3,
        }
    }

    /// What a limit crossed by `by` (in its own unit) adds to the merit: nothing within its
    /// tolerance, one unit at ten times its tolerance, growing with the square.
    #[must_use]
    pub(crate) fn merit_of_crossing(self, by: f64) -> f64 {
        if by <= self.tolerance() { 0.0 } else { (by / (10.0 * self.tolerance())).powi(2) }
    }
}

/// A range with at least one end, `min ≤ max`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Range {
    /// Smallest value allowed, or −∞.
    pub min: f64,
    /// Largest value allowed, or ∞.
    pub max: f64,
}

impl Range {
    /// By how much a value lies outside; 0 inside.
    #[must_use]
    pub(crate) fn crossed_by(self, value: f64) -> f64 {
        (self.min - value).max(value - self.max).max(0.0)
    }
}

/// Limits, resolved.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Limits {
    ranges: Vec<(LimitKind, Range)>,
    /// Whether a real focus between the first and the last surface is forbidden.
    pub forbid_internal_focus: bool,
    /// Addresses of groups that must not turn back.
    pub(crate) monotonic: Vec<Address>,
    /// Whether limits on where groups stand hold between the states too.
    pub(crate) between_states: bool,
}

impl Limits {
    pub(crate) fn new(ranges: Vec<(LimitKind, Range)>) -> Self {
        Self { ranges, ..Self::default() }
    }

    /// The ranges of these kinds alone.
    #[must_use]
    pub fn only(&self, kinds: &[LimitKind]) -> Self {
        let mine = self.ranges.iter().filter(|(kind, _)| kinds.contains(kind));
        Self::new(mine.copied().collect())
    }

    /// What these limits ask for in the states, without what is about the way between them.
    #[must_use]
    pub fn in_the_states(&self) -> Self {
        let mut ranges = self.ranges.clone();
        ranges.retain(|(kind, _)| *kind != LimitKind::SlopeMmPerRatio);
        let forbid_internal_focus = self.forbid_internal_focus;
        Self { forbid_internal_focus, ..Self::new(ranges) }
    }

    /// Whether anything is asked for between the states.
    #[must_use]
    pub fn about_the_way(&self) -> bool {
        let slope = self.range(LimitKind::SlopeMmPerRatio).is_some();
        self.between_states || slope || !self.monotonic.is_empty()
    }

    /// Whether a group must not turn back.
    #[must_use]
    pub fn is_monotonic(&self, design: &Design, group: usize) -> bool {
        self.monotonic.iter().any(|at| groups_at(design, at).contains(&group))
    }

    /// The range of one kind of limit, if it is given.
    #[must_use]
    pub fn range(&self, kind: LimitKind) -> Option<Range> {
        self.ranges.iter().find(|(other, _)| *other == kind).map(|&(_, range)| range)
    }
}

/// The groups of a design that an address names; none where it names something else.
pub(crate) fn groups_at(design: &Design, at: &Address) -> Vec<usize> {
    let steps = at.steps();
    let ["groups", step] = steps.as_slice() else { return Vec::new() };
    let count = design.groups.len();
    if *step == "*" {
        return (0..count).collect();
    }
    let index = step.parse().ok().filter(|&index: &usize| index < count);
    let named = || design.groups.iter().position(|group| group.name == *step);
    index.or_else(named).into_iter().collect()
}

impl LimitsDocument {
    /// The ranges as written, by kind.
    pub(crate) fn ranges(&self) -> [(LimitKind, Option<RangeDocument>); 14] {
        let Self {
            edge_thickness_mm,
            centre_thickness_mm,
            spacing_mm,
            air_mm,
            edge_gap_mm,
            radius_mm,
            steepness,
            travel_mm,
            slope_mm_per_ratio,
            incidence_deg,
            track_mm,
            fluence_j_cm2,
            ghost_clearance_mm,
            double_ghost_clearance_mm,
            // No ranges.
            monotonic: _,
            between_states: _,
            internal_focus: _,
        } = self;
        [
            (LimitKind::EdgeThicknessMm, *edge_thickness_mm),
            (LimitKind::CentreThicknessMm, *centre_thickness_mm),
            (LimitKind::SpacingMm, *spacing_mm),
            (LimitKind::AirMm, *air_mm),
            (LimitKind::EdgeGapMm, *edge_gap_mm),
            (LimitKind::RadiusMm, *radius_mm),
            (LimitKind::Steepness, *steepness),
            (LimitKind::TravelMm, *travel_mm),
            (LimitKind::SlopeMmPerRatio, slope_mm_per_ratio.map(RangeDocument::from)),
            (LimitKind::IncidenceDeg, *incidence_deg),
            (LimitKind::TrackMm, *track_mm),
            (LimitKind::FluenceJCm2, fluence_j_cm2.map(RangeDocument::from)),
            (LimitKind::GhostClearanceMm, ghost_clearance_mm.map(RangeDocument::from)),
            (LimitKind::DoubleGhostClearanceMm, double_ghost_clearance_mm.map(RangeDocument::from)),
        ]
    }
}
