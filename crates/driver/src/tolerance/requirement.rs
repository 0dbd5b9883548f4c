//! What a built system must reach in a state: the state's goals, and what `require` says instead.

use merit_function::goals::Goals;
use serde::Serialize;

use super::document::RequirementDocument;

/// What a state of a built system must reach; what is absent is not judged.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Requirement {
    /// RMS wavefront error without tilt, waves.
    pub wavefront_rms_waves: Option<f64>,
    /// Ratio error, per cent.
    pub ratio_percent: Option<f64>,
    /// Exit slope, µrad.
    pub exit_slope_urad: Option<f64>,
    /// Direction of the beam against the axis, µrad.
    pub boresight_urad: Option<f64>,
}

/// One of the numbers a state is judged by.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Quantity {
    /// RMS wavefront error without tilt, waves.
    WavefrontRmsWaves,
    /// Ratio error, per cent.
    RatioPercent,
    /// Exit slope, µrad.
    ExitSlopeUrad,
    /// Direction of the beam against the axis, µrad.
    BoresightUrad,
}

impl Quantity {
    /// All of them, in the order of a table.
    pub const ALL: [Self; 4] =
        [Self::WavefrontRmsWaves, Self::RatioPercent, Self::ExitSlopeUrad, Self::BoresightUrad];
}

impl Requirement {
    pub(crate) fn of(goals: &Goals, require: &RequirementDocument) -> Self {
        Self {
            wavefront_rms_waves: require
                .wavefront_rms_waves
                .map(|goal| goal.within)
                .or(goals.wavefront_rms_waves),
            ratio_percent: require.ratio_percent.map(|goal| goal.within).or(goals.ratio_percent),
            exit_slope_urad: require
                .exit_slope_urad
                .map(|goal| goal.within)
                .or(goals.exit_slope_urad),
            boresight_urad: require.boresight_urad.map(|goal| goal.within),
        }
    }

    /// What is allowed of a quantity.
    #[must_use]
    pub(crate) fn within(&self, quantity: Quantity) -> Option<f64> {
        match quantity {
            Quantity::WavefrontRmsWaves => self.wavefront_rms_waves,
            Quantity::RatioPercent => self.ratio_percent,
            Quantity::ExitSlopeUrad => self.exit_slope_urad,
            Quantity::BoresightUrad => self.boresight_urad,
        }
    }

    /// Per row of what is measured (`rays` a wavelength, then ratio and slope), what it counts in
    /// the re-adjustment.
    pub(crate) fn row_weights(&self, rays: usize) -> Vec<f64> {
        let one_over = |within: Option<f64>| within.map_or(0.0, |within| 1.0 / within);
        let mut weights = vec![one_over(self.wavefront_rms_waves); rays];
        weights.push(one_over(self.ratio_percent));
        weights.push(one_over(self.exit_slope_urad));
        weights
    }
}
