//! The shape of a design, and how far two shapes are apart.

use serde::{Deserialize, Serialize};
use surface_model::design::Design;
use surface_model::first_order::first_order;

/// A difference in group power that counts as one unit, in units of asinh(power × track): 15 % of a
/// strong group's power, whatever its size.
const POWER_UNIT: f64 = 0.15;
/// A difference in curvature that counts as one unit, in units of asinh(curvature × track): a
/// quarter of a strong surface's curvature.
const CURVATURE_UNIT: f64 = 0.25;
/// A difference in refractive index that counts as one unit.
const INDEX_UNIT: f64 = 0.03;

/// What makes a design what it is: which elements, with which powers, curvatures and glass. Not its
/// thicknesses and spacings, which follow or matter little.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Shape {
    /// Per group and element, the number of glasses: designs that differ here are different.
    pub elements: Vec<Vec<usize>>,
    /// Group powers, surface curvatures and glass indices, each in units of a difference that
    /// makes another design.
    pub numbers: Vec<f64>,
}

impl Shape {
    /// The shape of a design at its first wavelength. A number that does not exist counts as 0.
    #[must_use]
    pub fn of(design: &Design) -> Self {
        let sequence = design.sequence();
        let state = design.states.first();
        let train = state.and_then(|state| {
            let nm = *state.wavelengths_nm.first()?;
            design.train(state, nm).ok()
        });
        let track_mm = design.housing.track_mm;
        let mut numbers = Vec::new();
        for g in 0..design.groups.len() {
            let first = sequence.first_surface(g);
            let surfaces: usize =
                design.groups[g].elements.iter().map(|element| element.surfaces.len()).sum();
            let power = train
                .as_ref()
                .and_then(|train| first_order(train, first..first + surfaces).ok())
                .map_or(0.0, |data| data.power_per_mm);
            numbers.push((power * track_mm).asinh() / POWER_UNIT);
        }
        let elements = || design.groups.iter().flat_map(|group| &group.elements);
        for element in elements() {
            let curvatures = element.surfaces.iter().map(|surface| surface.curvature * track_mm);
            numbers.extend(curvatures.map(|curvature| curvature.asinh() / CURVATURE_UNIT));
            let nm = design.beam.wavelengths_nm.first().copied().unwrap_or(0.0);
            let indices = element.glasses.iter().map(|glass| glass.index(nm).unwrap_or(0.0));
            numbers.extend(indices.map(|index| index / INDEX_UNIT));
        }
        numbers.iter_mut().filter(|number| !number.is_finite()).for_each(|number| *number = 0.0);
        let counts = |group: &surface_model::design::Group| {
            group.elements.iter().map(|element| element.glasses.len()).collect()
        };
        Self { elements: design.groups.iter().map(counts).collect(), numbers }
    }

    /// How far apart two shapes are: the largest difference of any number, in its unit; infinite
    /// where the elements are not the same. From 1 on, designs are really different.
    #[must_use]
    pub(crate) fn distance(&self, other: &Self) -> f64 {
        if self.elements != other.elements || self.numbers.len() != other.numbers.len() {
            return f64::INFINITY;
        }
        let differences = self.numbers.iter().zip(&other.numbers).map(|(a, b)| (a - b).abs());
        differences.fold(0.0, f64::max)
    }
}
