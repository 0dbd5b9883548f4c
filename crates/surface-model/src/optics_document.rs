//! The optics part of a design file, as it is written: `format` … `states`.
//!
//! The structs are what the file may hold; the JSON Schema is generated from them and the file is
//! checked against it before it is read, so that reading is a formality. What a schema cannot
//! say (counts that must fit, names that must exist) is checked by [`OpticsDocument::resolve`].

use std::collections::BTreeMap;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use crate::glass::GlassDocument;
use crate::laser::{CoatingDocument, ThresholdsDocument};

/// The optics of a zoom beam expander: beam, glass, groups, housing and zoom states.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct OpticsDocument {
    /// Which version of the file format this is.
    pub format: DesignFormat,
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
    /// Glasses of this design's own: melts, measured or constant indices.
    #[serde(default)]
    pub glasses: BTreeMap<String, GlassDocument>,
    /// Lens groups from left to right; light travels left to right.
    #[schemars(length(min = 1))]
    pub groups: Vec<GroupDocument>,
    /// The tube, and the groups that do not move in it.
    pub housing: HousingDocument,
    /// Zoom states, one a ratio.
    #[schemars(length(min = 1))]
    pub states: Vec<StateDocument>,
}

/// The version of the design format.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub enum DesignFormat {
    /// The first version.
    #[serde(rename = "drawtube/1")]
    V1,
}

/// The laser beam that enters.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct BeamDocument {
    /// Wavelengths in nm, in air. Ratio and exit slope are told at the first.
    #[schemars(length(min = 1))]
    pub wavelengths_nm: Vec<f64>,
    /// 1/e² diameter in mm.
    pub diameter_mm: f64,
    /// How far out rays are traced, in 1/e² radii; 1.5 holds 98.9 % of a Gaussian beam's power.
    #[serde(default = "default_reach")]
    pub traced_to: f64,
    /// Beam propagation factor M² (ISO 11146-1), at least 1. Of `m_squared`, `divergence_mrad`,
    /// `waist_diameter_mm` and `waist_distance_mm` at most two may stand: the rest follows. With
    /// none, M² is 1 and the waist is at the first surface.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub m_squared: Option<f64>,
    /// Divergence as the data sheet gives it: full angle between 1/e² points far away, mrad.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub divergence_mrad: Option<f64>,
    /// 1/e² diameter of the waist, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub waist_diameter_mm: Option<f64>,
    /// From the waist to the first surface, mm; negative when the beam converges as it enters.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub waist_distance_mm: Option<f64>,
    /// Mean power, W.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub power_w: Option<f64>,
    /// Energy of a pulse, mJ.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub pulse_energy_mj: Option<f64>,
    /// Effective length of a pulse, ns: its energy over its peak power (ISO 21254-1).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub pulse_length_ns: Option<f64>,
    /// Largest angle between beam and axis, mrad; the beam turns about the first vertex.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub pointing_mrad: Option<f64>,
}

fn default_reach() -> f64 {
    1.5
}

/// Elements that move together.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct GroupDocument {
    /// Its name, unique among the groups.
    pub name: String,
    /// Elements from left to right.
    #[schemars(length(min = 1))]
    pub elements: Vec<ElementDocument>,
    /// Air between neighbouring elements, vertex to vertex, mm; one fewer than elements.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub airs_mm: Vec<f64>,
    /// Linear expansion of the group's mount, 1/K, where it differs from the housing's.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub mount_expansion_per_k: Option<f64>,
}

/// One piece of glass, or a cemented stack.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ElementDocument {
    /// Its name, unique in the group.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub name: Option<String>,
    /// Radii of curvature from left to right in mm, positive with the centre to the right, or
    /// "flat"; one more than glasses.
    #[schemars(length(min = 2))]
    pub radii_mm: Vec<RadiusDocument>,
    /// Glass names: from the catalogue ("N-BK7", "Schott:F2") or from `glasses`.
    #[schemars(length(min = 1))]
    pub glasses: Vec<String>,
    /// Centre thicknesses, mm; one a glass.
    #[schemars(length(min = 1))]
    pub thicknesses_mm: Vec<f64>,
    /// Clear diameter, mm.
    pub diameter_mm: f64,
    /// Per surface its conic constant and even asphere coefficients, or null for a sphere.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub shapes: Option<Vec<Option<ShapeDocument>>>,
}

/// A radius in mm, or the word "flat".
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
#[serde(untagged)]
pub enum RadiusDocument {
    /// Radius of curvature in mm, positive when the centre is to the right.
    Mm(f64),
    /// A plane.
    Flat(FlatWord),
}

/// The word for a plane.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize, Serialize, JsonSchema)]
pub enum FlatWord {
    /// A plane surface.
    #[serde(rename = "flat")]
    Flat,
}

/// What makes a surface differ from a sphere.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ShapeDocument {
    /// Conic constant: 0 sphere, −1 paraboloid, below −1 hyperboloid.
    #[serde(default)]
    pub conic: f64,
    /// Even asphere coefficients by power of r, "4" to "20": sag in mm, r in mm.
    #[serde(default, skip_serializing_if = "BTreeMap::is_empty")]
    pub asphere: BTreeMap<String, f64>,
}

/// The tube.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct HousingDocument {
    /// From the front datum, z = 0, to the last vertex at most, mm.
    pub track_mm: f64,
    /// Names of the groups that do not move.
    #[serde(default)]
    pub fixed: Vec<String>,
    /// Linear expansion of the tube and the mounts, 1/K: what temperatures other than 20 °C need.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub expansion_per_k: Option<f64>,
}

/// One ratio with its spacings.
#[derive(Debug, Clone, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct StateDocument {
    /// Its name, unique among the states.
    pub name: String,
    /// Beam diameter out over in; negative is an inverted beam with an internal focus.
    pub ratio: f64,
    /// Air between neighbouring groups, vertex to vertex, mm; one fewer than groups.
    pub spacings_mm: Vec<f64>,
    /// Wavelengths of this state in nm, where they differ from the beam's.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    #[schemars(length(min = 1))]
    pub wavelengths_nm: Option<Vec<f64>>,
}
