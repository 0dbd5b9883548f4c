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
    /// Divergence of the real beam behind the design: full angle between 1/e² points far away, in
    /// mrad, at the first wavelength. The smaller the better; `within` is the most that is met.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub divergence_mrad: Option<WithinDocument>,
    /// 1/e² diameter of the real beam at a distance, first wavelength.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub diameter_at_range_mm: Option<RangeGoalDocument>,
    /// Where the beam comes to a focus instead of leaving collimated, in m behind the last vertex;
    /// negative for a beam that diverges from a point before it. First wavelength, for the ray at
    /// the 1/e² radius. A wavefront goal then is about the sphere around that point.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub exit_focus_m: Option<FocusGoalDocument>,
}

/// A diameter wanted at a distance.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct RangeGoalDocument {
    /// Distance behind the last vertex, m.
    pub range_m: f64,
    /// Diameter wanted there, mm; 0, as small as can be, if left out.
    #[serde(default)]
    pub wanted: f64,
    /// A miss by this much, in mm, counts as one unit of merit and is the most that is still met.
    pub within: f64,
}

/// A focus wanted at a distance.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct FocusGoalDocument {
    /// Distance behind the last vertex, m; negative before it.
    pub wanted: f64,
    /// How far off it may be, m. What is judged is the vergence 1/distance, so that a collimated
    /// beam has a finite miss: one unit is within/wanted².
    pub within: f64,
}

/// A diameter wanted at a distance, resolved.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RangeGoal {
    /// Distance behind the last vertex, m.
    pub range_m: f64,
    /// Diameter wanted there, mm.
    pub wanted_mm: f64,
    /// Miss that counts as one, mm.
    pub within_mm: f64,
}

impl RangeGoal {
    /// Miss of a diameter (mm) in units of `within`.
    #[must_use]
    pub(crate) fn miss(&self, diameter_mm: f64) -> f64 {
        (diameter_mm - self.wanted_mm) / self.within_mm
    }
}

/// A focus wanted at a distance, resolved.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FocusGoal {
    /// Distance behind the last vertex, m.
    pub wanted_m: f64,
    /// Miss that counts as one, m.
    pub within_m: f64,
}

impl FocusGoal {
    /// What a miss of 1/m in vergence counts, in units of `within`.
    #[must_use]
    pub(crate) fn weight_m(&self) -> f64 {
        self.wanted_m * self.wanted_m / self.within_m
    }

    /// Miss of a vergence (1/m, positive when the beam converges) in units of `within`.
    #[must_use]
    pub(crate) fn miss(&self, vergence_per_m: f64) -> f64 {
        (vergence_per_m - 1.0 / self.wanted_m) * self.weight_m()
    }
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
    /// Divergence of the real beam, mrad.
    pub divergence_mrad: Option<f64>,
    /// Diameter of the real beam at a distance.
    pub diameter_at_range_mm: Option<RangeGoal>,
    /// Focus instead of collimation.
    pub exit_focus_m: Option<FocusGoal>,
    /// Weight of the state in the merit.
    pub weight: f64,
}

impl Goals {
    /// The goals of a state: its own where it has them, else those of all states. A focus of its
    /// own takes the place of an exit slope that all states should have.
    #[must_use]
    pub fn of_state(all: &GoalsDocument, own: Option<&GoalsDocument>, weight: f64) -> Self {
        let pick = |goal: fn(&GoalsDocument) -> Option<WithinDocument>| {
            own.and_then(goal).or(goal(all)).map(|goal| goal.within)
        };
        let range = own.and_then(|own| own.diameter_at_range_mm).or(all.diameter_at_range_mm);
        let focus = own.and_then(|own| own.exit_focus_m).or(all.exit_focus_m);
        let own_slope = own.and_then(|own| own.exit_slope_urad);
        let focus = focus
            .filter(|_| own_slope.is_none() || own.is_some_and(|own| own.exit_focus_m.is_some()));
        Self {
            wavefront_rms_waves: pick(|goals| goals.wavefront_rms_waves),
            ratio_percent: pick(|goals| goals.ratio_percent),
            exit_slope_urad: pick(|goals| goals.exit_slope_urad).filter(|_| focus.is_none()),
            divergence_mrad: pick(|goals| goals.divergence_mrad),
            diameter_at_range_mm: range.map(|goal| RangeGoal {
                range_m: goal.range_m,
                wanted_mm: goal.wanted,
                within_mm: goal.within,
            }),
            exit_focus_m: focus
                .map(|goal| FocusGoal { wanted_m: goal.wanted, within_m: goal.within }),
            weight,
        }
    }

    /// Whether anything at all is wanted.
    #[must_use]
    pub fn any(&self) -> bool {
        self.wavefront_rms_waves.is_some() || self.paraxial() + self.of_the_real_beam() > 0
    }

    /// How many goals are about the paraxial ray at the 1/e² radius.
    #[must_use]
    pub(crate) fn paraxial(&self) -> usize {
        usize::from(self.ratio_percent.is_some()) + usize::from(self.exit_slope_urad.is_some())
    }

    /// How many goals are about the real beam.
    #[must_use]
    pub(crate) fn of_the_real_beam(&self) -> usize {
        usize::from(self.divergence_mrad.is_some())
            + usize::from(self.diameter_at_range_mm.is_some())
            + usize::from(self.exit_focus_m.is_some())
    }
}
