//! `tolerances.shop` of a design file: what a drawing says of elements that no ray knows of.
//!
//! The quantities are those that ISO 10110 has indications for: protective chamfers (part 10),
//! surface imperfections (part 7), stress birefringence (part 2), bubbles and inclusions (part 3),
//! inhomogeneity and striae (part 4), coating (part 9). From memory of the standard's parts.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use surface_model::design::Design;
use surface_model::document::Address;

/// What a drawing says of what stands at an address and within; it has no effect on systems.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ShopDocument {
    /// What it is about.
    pub at: String,
    /// Diameter elements are ground to, mm; at least their clear diameter.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub outer_diameter_mm: Option<f64>,
    /// How far that may be off, lower and upper, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub outer_diameter_off_mm: Option<[f64; 2]>,
    /// Protective chamfers at the edges of surfaces, width of the bevel.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub chamfer_mm: Option<ChamferDocument>,
    /// Imperfections of surfaces.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub imperfections: Option<ImperfectionsDocument>,
    /// Long scratches on surfaces.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub scratches: Option<ScratchesDocument>,
    /// How far chips may reach in from the edge of surfaces, mm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub edge_chips_mm: Option<f64>,
    /// Coating of surfaces that face air, in your own words.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub coating: Option<String>,
    /// Stress birefringence of glasses, nm of path difference a cm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub stress_birefringence_nm_cm: Option<f64>,
    /// Bubbles and inclusions in glasses.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub bubbles: Option<ImperfectionsDocument>,
    /// Class of inhomogeneity of glasses, 0 to 5.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub inhomogeneity_class: Option<u8>,
    /// Class of striae of glasses, 1 to 5.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub striae_class: Option<u8>,
}

/// Width of a bevel.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ChamferDocument {
    /// At least, mm.
    pub min: f64,
    /// At most, mm.
    pub max: f64,
}

/// How many imperfections, and how large.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ImperfectionsDocument {
    /// At most so many of the largest that are allowed.
    pub count: u16,
    /// Grade: square root of the area of the largest that are allowed, mm.
    pub grade_mm: f64,
}

/// How many long scratches, and how wide.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct ScratchesDocument {
    /// At most so many.
    pub count: u16,
    /// Width of the widest that are allowed, mm.
    pub width_mm: f64,
}

/// What a word of an entry is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum About {
    Element,
    Surface,
    Glass,
}

/// A number that is out of range: the steps to it, what was found, what was expected.
pub(super) type OutOfRange = (&'static [&'static str], String, String);

impl ShopDocument {
    /// The words that are given, and what they are about.
    pub(super) fn words(&self) -> Vec<(&'static str, About)> {
        use About::{Element, Glass, Surface};
        let all = [
            ("outer_diameter_mm", Element, self.outer_diameter_mm.is_some()),
            ("outer_diameter_off_mm", Element, self.outer_diameter_off_mm.is_some()),
            ("chamfer_mm", Surface, self.chamfer_mm.is_some()),
            ("imperfections", Surface, self.imperfections.is_some()),
            ("scratches", Surface, self.scratches.is_some()),
            ("edge_chips_mm", Surface, self.edge_chips_mm.is_some()),
            ("coating", Surface, self.coating.is_some()),
            ("stress_birefringence_nm_cm", Glass, self.stress_birefringence_nm_cm.is_some()),
            ("bubbles", Glass, self.bubbles.is_some()),
            ("inhomogeneity_class", Glass, self.inhomogeneity_class.is_some()),
            ("striae_class", Glass, self.striae_class.is_some()),
        ];
        all.into_iter().filter(|(.., given)| *given).map(|(word, about, _)| (word, about)).collect()
    }

    /// Every number out of range.
    pub(super) fn out_of_range(&self) -> Vec<OutOfRange> {
        let mut wrong: Vec<OutOfRange> = Vec::new();
        let mut number =
            |steps: &'static [&'static str], found: Option<f64>, [low, high]: [f64; 2]| {
                if let Some(found) = found.filter(|found| !(low..=high).contains(found)) {
                    let expected = format!("a number from {low} to {high}");
                    wrong.push((steps, found.to_string(), expected));
                }
            };
        number(&["outer_diameter_mm"], self.outer_diameter_mm, [0.1, 1e4]);
        number(&["edge_chips_mm"], self.edge_chips_mm, [0.0, 10.0]);
        number(&["stress_birefringence_nm_cm"], self.stress_birefringence_nm_cm, [0.0, 1e3]);
        number(
            &["imperfections", "grade_mm"],
            self.imperfections.map(|all| all.grade_mm),
            [1e-3, 10.0],
        );
        number(&["bubbles", "grade_mm"], self.bubbles.map(|all| all.grade_mm), [1e-3, 10.0]);
        number(&["scratches", "width_mm"], self.scratches.map(|all| all.width_mm), [1e-4, 10.0]);
        number(&["inhomogeneity_class"], self.inhomogeneity_class.map(f64::from), [0.0, 5.0]);
        number(&["striae_class"], self.striae_class.map(f64::from), [1.0, 5.0]);
        let mut ordered = |steps, [low, high]: [f64; 2], [least, most]: [f64; 2]| {
            if !(least <= low && low <= high && high <= most) {
                let expected = format!("two numbers from {least} to {most}, the smaller first");
                wrong.push((steps, format!("{low} and {high}"), expected));
            }
        };
        if let Some(off) = self.outer_diameter_off_mm {
            ordered(&["outer_diameter_off_mm"], off, [-10.0, 10.0]);
        }
        if let Some(ChamferDocument { min, max }) = self.chamfer_mm {
            ordered(&["chamfer_mm"], [min, max], [0.0, 10.0]);
        }
        wrong
    }
}

/// Addresses of everything of a design that entries can be about.
pub(super) fn everything(design: &Design) -> Vec<(About, Address, f64)> {
    let mut all = Vec::new();
    for (g, group) in design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let elements = Address::root().key("groups").index(g).key("elements");
            let at = elements.index(e);
            let wide = element.diameter_mm;
            let list = |about, key, count| {
                let at = at.clone().key(key);
                (0..count).map(move |k| (about, at.clone().index(k), wide))
            };
            all.push((About::Element, at.clone(), wide));
            all.extend(list(About::Surface, "radii_mm", element.surfaces.len()));
            all.extend(list(About::Glass, "glasses", element.glasses.len()));
        }
    }
    all
}
