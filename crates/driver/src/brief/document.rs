//! A brief as it is written.

use std::collections::BTreeMap;

use merit_function::goals::GoalsDocument;
use merit_function::limits::LimitsDocument;
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use surface_model::glass::GlassDocument;
use surface_model::laser::{CoatingDocument, ThresholdsDocument};
use surface_model::optics_document::{BeamDocument, HousingDocument};

/// A requirement: what a zoom beam expander has to do, without a lens.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct BriefDocument {
    /// Which version of the file format this is.
    pub format: BriefFormat,
    /// What the design is for.
    #[serde(default)]
    pub title: String,
    /// The laser beam that enters, collimated.
    pub beam: BeamDocument,
    /// The coating of every surface that faces air; without it they are taken as uncoated.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub coating: Option<CoatingDocument>,
    /// What coatings and glass bear, from their maker's damage data.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub damage_thresholds: Option<ThresholdsDocument>,
    /// Glasses of this brief's own: melts, measured or constant indices.
    #[serde(default)]
    pub glasses: BTreeMap<String, GlassDocument>,
    /// The ratios wanted, each a number, or an object where there is more to say about it.
    #[schemars(length(min = 1))]
    pub ratios: Vec<RatioDocument>,
    /// The tube, and the groups that do not move in it.
    pub housing: HousingDocument,
    /// Lens groups from left to right. Left out, the program chooses their number, and calls the
    /// first "entry" and the last "exit".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    #[schemars(length(min = 2, max = 4))]
    pub groups: Option<Vec<GroupBriefDocument>>,
    /// Names of the glasses that lenses may be made of: from the catalogue ("N-BK7", "Schott:F2")
    /// or from `glasses`.
    #[schemars(length(min = 1))]
    pub glasses_allowed: Vec<String>,
    /// Goals of all ratios.
    #[serde(default)]
    pub goals: GoalsDocument,
    /// Limits. Where they name no least edge thickness, centre thickness, spacing or air inside a
    /// group, what is usual is kept: 0.8, 1, 0.5 and 0.3 mm.
    #[serde(default)]
    pub limits: LimitsDocument,
    /// Temperatures in °C at which the goals hold too, nothing re-adjusted; designs are drawn at
    /// 20 °C, which always counts.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub temperatures_c: Vec<f64>,
}

/// The version of the brief format.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub enum BriefFormat {
    /// The first version.
    #[serde(rename = "drawtube-brief/1")]
    V1,
}

/// A ratio wanted.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
#[serde(untagged)]
pub enum RatioDocument {
    /// Beam diameter out over in; negative is an inverted beam with an internal focus.
    Ratio(f64),
    /// A ratio with wishes of its own.
    Own(OwnRatioDocument),
}

/// A ratio that differs from the others in more than its number.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct OwnRatioDocument {
    /// Beam diameter out over in; negative is an inverted beam with an internal focus.
    pub ratio: f64,
    /// What its zoom state is called; "2x" for a ratio of 2 if left out.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub name: Option<String>,
    /// Wavelengths at this ratio in nm, where they differ from the beam's.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    #[schemars(length(min = 1))]
    pub wavelengths_nm: Option<Vec<f64>>,
    /// How much the ratio counts in the merit; 1 if not given.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub weight: Option<f64>,
    /// Goals at this ratio that differ from those of all.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub goals: Option<GoalsDocument>,
}

/// A group that a brief asks for.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct GroupBriefDocument {
    /// Its name, unique among the groups.
    pub name: String,
    /// How many elements it has, a cemented pair being one. One if left out: the program tries no
    /// other number by itself.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    #[schemars(range(min = 1, max = 6))]
    pub elements: Option<usize>,
    /// How many of them are cemented pairs. If left out: all, where the beam has more than one
    /// wavelength and the glasses allow it; otherwise none.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    #[schemars(range(min = 0, max = 6))]
    pub pairs: Option<usize>,
}

impl RatioDocument {
    /// The number.
    pub(crate) fn ratio(&self) -> f64 {
        match self {
            Self::Ratio(ratio) => *ratio,
            Self::Own(own) => own.ratio,
        }
    }

    /// What there is to say beside the number.
    pub(crate) fn own(&self) -> Option<&OwnRatioDocument> {
        match self {
            Self::Ratio(_) => None,
            Self::Own(own) => Some(own),
        }
    }

    /// What its zoom state is called.
    pub(crate) fn name(&self) -> String {
        let own = self.own().and_then(|own| own.name.clone());
        own.unwrap_or_else(|| format!("{}x", self.ratio()))
    }
}
