//! The kinds of tolerance, their words in files, and the grades.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// What can be off.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Kind {
    /// Radius of a surface, per cent of it.
    RadiusPercent,
    /// Radius of a surface, fringes of sag over its clear diameter.
    RadiusFringes,
    /// Irregularity of a surface, fringes from peak to valley.
    IrregularityFringes,
    /// Centre thickness of a glass, mm.
    ThicknessMm,
    /// Air inside a group, mm.
    AirMm,
    /// Index of a glass.
    Index,
    /// Abbe number of a glass, per cent of it.
    AbbePercent,
    /// Wedge of a glass: turn of the surface behind it about its vertex, mrad.
    WedgeMrad,
    /// Element shifted across the axis of its group, mm.
    ElementDecentreMm,
    /// Element turned about its middle, mrad.
    ElementTiltMrad,
    /// Group shifted across the axis, mm.
    GroupDecentreMm,
    /// Group turned about its middle, mrad.
    GroupTiltMrad,
    /// How far off a spacing is set each time, after all re-adjustment, mm.
    SpacingMm,
}

/// How an error of a kind is drawn and found out.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Form {
    /// A number that keeps the system round: its effect follows from the reverse sweep.
    Round,
    /// A size and a direction across the axis.
    Across,
    /// A size and a direction that is the same after half a turn.
    TwoFold,
}

impl Kind {
    /// All kinds, in the order of a table.
    pub const ALL: [Self; 13] = [
        Self::RadiusPercent,
        Self::RadiusFringes,
        Self::IrregularityFringes,
        Self::ThicknessMm,
        Self::AirMm,
        Self::Index,
        Self::AbbePercent,
        Self::WedgeMrad,
        Self::ElementDecentreMm,
        Self::ElementTiltMrad,
        Self::GroupDecentreMm,
        Self::GroupTiltMrad,
        Self::SpacingMm,
    ];

    /// Its word in files.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::RadiusPercent => "radius_percent",
            Self::RadiusFringes => "radius_fringes",
            Self::IrregularityFringes => "irregularity_fringes",
            Self::ThicknessMm => "thickness_mm",
            Self::AirMm => "air_mm",
            Self::Index => "index",
            Self::AbbePercent => "abbe_percent",
            Self::WedgeMrad => "wedge_mrad",
            Self::ElementDecentreMm => "element_decentre_mm",
            Self::ElementTiltMrad => "element_tilt_mrad",
            Self::GroupDecentreMm => "group_decentre_mm",
            Self::GroupTiltMrad => "group_tilt_mrad",
            Self::SpacingMm => "spacing_mm",
        }
    }

    pub(crate) fn form(self) -> Form {
        match self {
            Self::IrregularityFringes => Form::TwoFold,
            Self::WedgeMrad
            | Self::ElementDecentreMm
            | Self::ElementTiltMrad
            | Self::GroupDecentreMm
            | Self::GroupTiltMrad => Form::Across,
            _ => Form::Round,
        }
    }

    /// The other way of giving the same tolerance: a finer word about one replaces the other.
    pub(crate) fn twin(self) -> Option<Self> {
        match self {
            Self::RadiusPercent => Some(Self::RadiusFringes),
            Self::RadiusFringes => Some(Self::RadiusPercent),
            _ => None,
        }
    }

    /// The largest tolerance that makes sense.
    pub(crate) fn largest(self) -> f64 {
        match self {
            Self::RadiusPercent | Self::AbbePercent => 20.0,
            Self::RadiusFringes | Self::IrregularityFringes => 1000.0,
            Self::Index => 0.1,
            Self::WedgeMrad | Self::ElementTiltMrad | Self::GroupTiltMrad => 100.0,
            _ => 10.0,
        }
    }
}

/// A named set of tolerances.
///
/// The values are common practice, no published source: what a workshop takes on without
/// question, with care, and at a price. Give your own where your workshop has told you its.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, Hash, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Grade {
    /// What a workshop takes on without question.
    Ordinary,
    /// With care: centred lenses in turned barrels.
    #[default]
    Fine,
    /// At a price: every piece measured, every group aligned.
    Finest,
}

impl Grade {
    /// Its word.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Ordinary => "ordinary",
            Self::Fine => "fine",
            Self::Finest => "finest",
        }
    }

    /// The tolerance of a kind; common practice, no published source. Radii are given in per cent,
    /// so those in fringes are none.
    #[must_use]
    pub fn tolerance(self, kind: Kind) -> Option<f64> {
        let [ordinary, fine, finest] = match kind {
            Kind::RadiusPercent => [0.2, 0.1, 0.05],
            Kind::RadiusFringes => return None,
            Kind::IrregularityFringes => [1.0, 0.5, 0.2],
            Kind::ThicknessMm | Kind::AirMm => [0.1, 0.05, 0.02],
            Kind::Index => [0.001, 0.0005, 0.0002],
            Kind::AbbePercent => [0.8, 0.5, 0.2],
            Kind::WedgeMrad => [1.0, 0.3, 0.1],
            Kind::ElementDecentreMm => [0.05, 0.02, 0.01],
            Kind::ElementTiltMrad => [1.0, 0.5, 0.2],
            Kind::GroupDecentreMm => [0.05, 0.02, 0.01],
            Kind::GroupTiltMrad => [1.0, 0.5, 0.2],
            Kind::SpacingMm => [0.05, 0.02, 0.01],
        };
        Some(match self {
            Self::Ordinary => ordinary,
            Self::Fine => fine,
            Self::Finest => finest,
        })
    }
}

/// How errors are spread within their tolerance.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, Hash, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Spread {
    /// A normal distribution whose two sigma are the tolerance, cut off there: what passes
    /// inspection (common practice, no published source).
    #[default]
    Normal,
    /// Everything within the tolerance alike; directions and sizes across the axis fill the disc.
    Uniform,
}

impl Spread {
    /// Its word.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Normal => "normal",
            Self::Uniform => "uniform",
        }
    }

    /// Mean square of a single number, in units of the tolerance squared.
    #[must_use]
    pub(crate) fn mean_square(self) -> f64 {
        match self {
            // σ²(1 − 2kφ(k)/(2Φ(k) − 1)) at k = 2, σ = ½ (N. L. Johnson, S. Kotz, N. Balakrishnan,
            // Continuous Univariate Distributions 1, 2nd ed., §10.1).
            Self::Normal => {
                let density = (-2.0_f64).exp() / std::f64::consts::TAU.sqrt();
                0.25 * (1.0 - 4.0 * density / WITHIN_TWO_SIGMA)
            }
            Self::Uniform => 1.0 / 3.0,
        }
    }

    /// Mean square length of a vector across the axis, in units of the tolerance squared.
    #[must_use]
    pub(crate) fn mean_square_across(self) -> f64 {
        match self {
            // The squared length of a plane normal vector is exponential, here cut at 2 (in units
            // of 2σ²): ∫₀² x e⁻ˣ dx / (1 − e⁻²), and 2σ² is a half.
            Self::Normal => 0.5 * (1.0 - 2.0 / (2.0_f64.exp() - 1.0)),
            Self::Uniform => 0.5,
        }
    }
}

/// 2Φ(2) − 1, the part of a normal distribution within two sigma.
const WITHIN_TWO_SIGMA: f64 = 0.954_499_736_103_641_6;
