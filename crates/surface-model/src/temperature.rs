//! A design at another temperature than the 20 °C it is drawn at.
//!
//! With ΔT counted from 20 °C and α the linear expansion of what is in question:
//!
//! - glass grows by 1 + αΔT in all directions: radii, thicknesses, and a term of r^p of an
//!   asphere, whose coefficient shrinks by the power p − 1. A cemented interface takes the mean
//!   of its two glasses;
//! - its index changes by the maker's terms, relative to air of the same temperature
//!   ([`glass`](crate::glass));
//! - groups are seated by their first vertex in the tube, and elements by theirs in the group's
//!   mount: the distances from seat to seat grow with the metal between them, and the glass
//!   grows from its seat. Nothing is assumed of the metal: its expansion is the design file's.

use crate::design::{Design, Element, ZoomState};
use crate::document::Address;
use crate::glass::{Glass, GlassError, REFERENCE_C};
use crate::sequence::GapId;
use crate::surface::{Surface, asphere_power};

/// Why a design cannot be told at a temperature.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum TemperatureError {
    /// A glass does not say how it changes.
    #[error("{at}: {error}")]
    Glass {
        /// Where the glass is used.
        at: Address,
        /// What is not known.
        error: GlassError,
    },
    /// A glass is not known at a wavelength.
    #[error(transparent)]
    Index(#[from] GlassError),
    /// The tube's expansion is not given.
    #[error("the design does not say how its housing expands with temperature")]
    NoHousing,
}

impl TemperatureError {
    /// What to do about it.
    #[must_use]
    pub fn advice(&self) -> Option<String> {
        match self {
            Self::Glass { error, .. } | Self::Index(error) => error.advice(),
            Self::NoHousing => Some(
                "add \"expansion_per_k\" to \"housing\", from the data sheet of its metal".into(),
            ),
        }
    }
}

/// How the numbers of a design's trains follow from those at 20 °C. Every one of them is linear in
/// its cold ones, so that whatever changes the cold design changes the warm one alike.
#[derive(Debug, Clone, PartialEq)]
pub struct Growth {
    /// Per surface of the train, how much larger it is.
    surfaces: Vec<f64>,
    /// Per gap of the train, the cold gaps it follows, with factors.
    gaps: Vec<Vec<(usize, f64)>>,
    /// How much longer the tube is.
    tube: f64,
}

impl Growth {
    /// From 20 °C to `temperature_c`.
    ///
    /// # Errors
    /// A glass or the tube does not say how it expands.
    pub fn of(design: &Design, temperature_c: f64) -> Result<Self, TemperatureError> {
        let warmer = temperature_c - REFERENCE_C;
        let by = |per_k: f64| 1.0 + per_k * warmer;
        let per_k = design.housing.expansion_per_k.ok_or(TemperatureError::NoHousing)?;
        let tube = by(per_k);
        let (mut surfaces, mut gaps) = (Vec::new(), Vec::new());
        for (g, group) in design.groups.iter().enumerate() {
            let mount = group.mount_expansion_per_k.map_or(tube, by);
            // What the distance from this seat to the next takes up of the metal's growth.
            let mut in_tube = Vec::new();
            for (e, element) in group.elements.iter().enumerate() {
                let glasses = element.growth(warmer).map_err(|error| {
                    let at = design.element_address(g, e);
                    TemperatureError::Glass { at, error }
                })?;
                let beside = |s: usize| {
                    0.5 * (glasses[s.saturating_sub(1)] + glasses[s.min(glasses.len() - 1)])
                };
                surfaces.extend((0..element.surfaces.len()).map(beside));
                let first = gaps.len();
                gaps.extend(glasses.iter().enumerate().map(|(i, &by)| vec![(first + i, by)]));
                if e + 1 < group.elements.len() {
                    let air = gaps.len();
                    let mut follows = vec![(air, mount)];
                    let glass = glasses.iter().enumerate();
                    follows.extend(glass.map(|(i, by)| (first + i, mount - by)));
                    gaps.push(follows);
                    in_tube.extend((first..=air).map(|gap| (gap, tube - mount)));
                } else {
                    let glass = glasses.iter().enumerate();
                    in_tube.extend(glass.map(|(i, by)| (first + i, tube - by)));
                }
            }
            if g + 1 < design.groups.len() {
                in_tube.push((gaps.len(), tube));
                gaps.push(in_tube);
            }
        }
        Ok(Self { surfaces, gaps, tube })
    }

    /// Curvature of a surface over its cold one.
    #[must_use]
    pub fn curvature(&self, surface: usize) -> f64 {
        1.0 / self.surfaces[surface]
    }

    /// Asphere coefficient of a surface over its cold one; term 0 is that of r⁴.
    #[must_use]
    pub fn asphere(&self, surface: usize, term: usize) -> f64 {
        self.surfaces[surface].powi(1 - asphere_power(term) as i32)
    }

    /// The cold gaps that a gap of the train follows, with factors.
    #[must_use]
    pub fn gap(&self, gap: usize) -> &[(usize, f64)] {
        &self.gaps[gap]
    }

    /// Gaps of a train from its cold ones, mm.
    #[must_use]
    pub fn gaps_mm(&self, cold_mm: &[f64]) -> Vec<f64> {
        let sum = |follows: &Vec<(usize, f64)>| -> f64 {
            follows.iter().map(|&(gap, by)| by * cold_mm[gap]).sum()
        };
        self.gaps.iter().map(sum).collect()
    }
}

impl Design {
    /// The design as it is at `temperature_c`, nothing re-adjusted.
    ///
    /// # Errors
    /// Something does not say how it changes with temperature; at 20 °C nothing needs to.
    pub fn at_temperature(&self, temperature_c: f64) -> Result<Self, TemperatureError> {
        if temperature_c == REFERENCE_C {
            return Ok(self.clone());
        }
        let growth = Growth::of(self, temperature_c)?;
        let mut warm = self.clone();
        warm.housing.track_mm *= growth.tube;
        let mut number = 0;
        for (g, group) in warm.groups.iter_mut().enumerate() {
            for (e, element) in group.elements.iter_mut().enumerate() {
                for glass in &mut element.glasses {
                    *glass = glass.at_temperature(temperature_c).map_err(|error| {
                        let at = self.element_address(g, e);
                        TemperatureError::Glass { at, error }
                    })?;
                }
                for surface in &mut element.surfaces {
                    // The conic constant has no length in it; a clear diameter is a place on the glass.
                    let Surface { curvature, conic: _, asphere, semi_diameter: _ } = surface;
                    *curvature *= growth.curvature(number);
                    for (term, coefficient) in asphere.iter_mut().enumerate() {
                        *coefficient *= growth.asphere(number, term);
                    }
                    number += 1;
                }
            }
        }
        let sequence = self.sequence();
        for (k, state) in self.states.iter().enumerate() {
            let cold: Vec<f64> = sequence.gaps.iter().map(|&gap| self.gap_mm(state, gap)).collect();
            for (&gap, length) in sequence.gaps.iter().zip(growth.gaps_mm(&cold)) {
                match gap {
                    GapId::Thickness { group, element, glass } => {
                        warm.groups[group].elements[element].thicknesses_mm[glass] = length;
                    }
                    GapId::Air { group, after } => warm.groups[group].airs_mm[after] = length,
                    GapId::Spacing { after } => warm.states[k].spacings_mm[after] = length,
                }
            }
        }
        Ok(warm)
    }

    /// Length of a gap of a state's train, mm.
    #[must_use]
    pub fn gap_mm(&self, state: &ZoomState, gap: GapId) -> f64 {
        match gap {
            GapId::Thickness { group, element, glass } => {
                self.groups[group].elements[element].thicknesses_mm[glass]
            }
            GapId::Air { group, after } => self.groups[group].airs_mm[after],
            GapId::Spacing { after } => state.spacings_mm[after],
        }
    }
}

impl Element {
    /// Per glass, how much larger it is.
    fn growth(&self, warmer_k: f64) -> Result<Vec<f64>, GlassError> {
        let growth = |glass: &Glass| {
            let per_k = glass
                .expansion_per_k()
                .ok_or_else(|| GlassError::NoExpansion { glass: glass.name().to_owned() })?;
            Ok(1.0 + per_k * warmer_k)
        };
        self.glasses.iter().map(growth).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::document::Document;
    use crate::optics_document::OpticsDocument;

    fn design(housing: &str, glasses: [&str; 2]) -> Design {
        let text = format!(
            r#"{{ "format": "drawtube/1", "beam": {{ "wavelengths_nm": [587.6], "diameter_mm": 2 }},
               "groups": [
                 {{ "name": "a", "elements": [ {{ "radii_mm": [50, -40, -90], "glasses": ["{}", "{}"],
                    "thicknesses_mm": [4, 2], "diameter_mm": 10,
                    "shapes": [null, null, {{ "asphere": {{ "4": 1e-6 }} }}] }} ] }},
                 {{ "name": "b", "elements": [ {{ "radii_mm": ["flat", -80], "glasses": ["N-BK7"],
                    "thicknesses_mm": [3], "diameter_mm": 10 }} ] }} ],
               "housing": {{ "track_mm": 60 {housing} }},
               "states": [ {{ "name": "one", "ratio": 2, "spacings_mm": [40] }} ] }}"#,
            glasses[0], glasses[1]
        );
        let document = Document::parse("design", text.as_bytes()).unwrap();
        document.read::<OpticsDocument>().unwrap().resolve().unwrap()
    }

    #[test]
    fn lengths_grow_from_their_seats() {
        let cold = design(r#", "expansion_per_k": 2.3e-5"#, ["N-BK7", "N-SF6"]);
        let warm = cold.at_temperature(60.0).unwrap();
        let (crown, flint) = (1.0 + 40.0 * 7.1e-6, 1.0 + 40.0 * 9.03e-6);
        let element = &warm.groups[0].elements[0];
        assert!((element.thicknesses_mm[0] - 4.0 * crown).abs() < 1e-14);
        assert!((element.surfaces[0].curvature - 1.0 / (50.0 * crown)).abs() < 1e-16);
        let mean = 0.5 * (crown + flint);
        assert!((element.surfaces[1].curvature + 1.0 / (40.0 * mean)).abs() < 1e-16);
        assert!((element.surfaces[2].asphere[0] - 1e-6 / flint.powi(3)).abs() < 1e-20);
        let seat = 46.0 * (1.0 + 40.0 * 2.3e-5);
        let spacing = seat - 4.0 * crown - 2.0 * flint;
        assert!((warm.states[0].spacings_mm[0] - spacing).abs() < 1e-13);
        assert_eq!(cold.at_temperature(20.0).unwrap().states, cold.states);
    }

    #[test]
    fn what_is_not_known_is_told() {
        let told = |design: Design, at| design.at_temperature(at).unwrap_err().to_string();
        assert_eq!(
            told(design("", ["N-BK7", "N-SF6"]), 40.0),
            "the design does not say how its housing expands with temperature"
        );
        let silica = design(r#", "expansion_per_k": 2.3e-5"#, ["N-BK7", "fused-silica"]);
        assert_eq!(
            told(silica, 40.0),
            "/groups/a/elements/0: nothing is known of how fused-silica expands with temperature"
        );
        let hot = design(r#", "expansion_per_k": 2.3e-5"#, ["N-BK7", "N-SF6"]);
        assert!(told(hot, 500.0).contains("500 °C is outside"));
    }
}
