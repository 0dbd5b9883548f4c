//! A layout: a design begun from a brief, with what first order says about it.

use merit_function::assessment::{Obstacle, obstacle};
use merit_function::limits::LimitKind;
use surface_model::design::{Design, Element, Group, ZoomState};
use surface_model::paraxial::ParaxialRay;
use surface_model::surface::Surface;

use super::begun::GlassesOfGroups;
use super::family::Family;
use super::lens::ThickElement;
use super::no_layout::NoLayout;
use super::score::{Score, score};
use super::shape::shapes;
use super::space::{Point, Space};
use super::thick::Thick;
use super::thin::Thin;

/// A design begun from a brief: collimated and at its ratio in every state, inside its limits.
#[derive(Debug, Clone)]
pub struct Layout {
    /// The design, in the brief's beam and housing.
    pub design: Design,
    /// Signs of the groups' powers.
    pub family: Family,
    /// Focal lengths of the groups, mm.
    pub focal_lengths_mm: Vec<f64>,
    /// What first and third order foretell.
    pub score: Score,
    /// Per group and element, the places of its glasses among the allowed ones of the brief.
    pub glasses: GlassesOfGroups,
}

impl Layout {
    pub(super) fn at(space: &Space, point: Point<'_>) -> Result<Self, NoLayout> {
        let thin = Thin::at(space, point)?;
        let shapes = shapes(space, &thin, point)?;
        let thick = Thick::of(space, &thin, &shapes)?;
        let design = design(space, &thin, &thick);
        if let Some(obstacle) = obstacle(&design, &space.brief.wishes.limits) {
            return Err(reason(obstacle));
        }
        Ok(Self {
            score: score(&design, &space.brief.wishes).ok_or(NoLayout::Ray)?,
            family: thin.family.clone(),
            focal_lengths_mm: thick.powers_per_mm.iter().map(|power| 1.0 / power).collect(),
            glasses: thick
                .groups
                .iter()
                .map(|group| group.elements.iter().map(|e| e.glasses.clone()).collect())
                .collect(),
            design,
        })
    }

    /// Smallest and largest of each spacing over all states, mm.
    #[must_use]
    pub fn spacing_ranges_mm(&self) -> Vec<(f64, f64)> {
        let gaps = 0..self.design.groups.len() - 1;
        gaps.map(|g| ends(self.design.states.iter().map(|state| state.spacings_mm[g]))).collect()
    }

    /// Way of each group in the housing over all states, mm.
    #[must_use]
    pub fn travels_mm(&self) -> Vec<f64> {
        let positions = self.design.all_positions_mm();
        let groups = 0..self.design.groups.len();
        let way = |g: usize| ends(positions.iter().map(|positions| positions[g]));
        groups.map(way).map(|(low, high)| high - low).collect()
    }

    /// Largest diameter, over all states, that the traced rays take up in each group, paraxial, mm.
    #[must_use]
    pub fn ray_diameters_mm(&self) -> Vec<f64> {
        let mut diameters = vec![0.0_f64; self.design.groups.len()];
        let sequence = self.design.sequence();
        let mut ray = ParaxialRay::new();
        for state in &self.design.states {
            let train =
                state.wavelengths_nm.first().and_then(|&nm| self.design.train(state, nm).ok());
            let traced = train.map(|train| ray.trace(&train, self.design.beam.edge_mm(), 0.0));
            if !matches!(traced, Some(Ok(()))) {
                continue;
            }
            for (id, height) in sequence.surfaces.iter().zip(ray.heights()) {
                diameters[id.group] = diameters[id.group].max(2.0 * height.abs());
            }
        }
        diameters
    }

    /// First vertex to last vertex, the shortest and the longest of all states, mm.
    #[must_use]
    pub fn lengths_mm(&self) -> (f64, f64) {
        ends(self.design.states.iter().map(|state| self.design.length_mm(state)))
    }
}

fn ends(numbers: impl Iterator<Item = f64>) -> (f64, f64) {
    let none = (f64::INFINITY, f64::NEG_INFINITY);
    numbers.fold(none, |(low, high), number| (low.min(number), high.max(number)))
}

fn design(space: &Space, thin: &Thin<'_>, thick: &Thick) -> Design {
    let brief = &space.brief;
    let group = |(scheme, group): (&super::scheme::GroupScheme, &super::lens::ThickGroup)| Group {
        name: scheme.name.clone(),
        elements: group.elements.iter().map(|part| element(space, part)).collect(),
        airs_mm: group.airs_mm.clone(),
        mount_expansion_per_k: None,
    };
    let state = |(ratio, spacings): (&crate::brief::RatioBrief, &Vec<f64>)| ZoomState {
        name: ratio.name.clone(),
        ratio: ratio.ratio,
        spacings_mm: spacings.clone(),
        wavelengths_nm: ratio.wavelengths_nm.clone(),
    };
    Design {
        title: brief.written().title.clone(),
        beam: brief.beam.clone(),
        groups: thin.scheme.groups.iter().zip(&thick.groups).map(group).collect(),
        housing: space.housing(thin.scheme),
        states: brief.ratios.iter().zip(&thick.spacings_mm).map(state).collect(),
    }
}

fn element(space: &Space, part: &ThickElement) -> Element {
    let allowed = &space.brief.glasses_allowed;
    let surface = |&curvature: &f64| Surface::sphere(curvature, 0.5 * part.diameter_mm);
    Element {
        name: None,
        surfaces: part.curvatures_per_mm.iter().map(surface).collect(),
        glasses: part.glasses.iter().map(|&glass| allowed[glass].glass.clone()).collect(),
        thicknesses_mm: part.thicknesses_mm.clone(),
        diameter_mm: part.diameter_mm,
    }
}

/// A limit that a thick layout crosses, as a reason.
fn reason(obstacle: Obstacle) -> NoLayout {
    let Obstacle::Limit(kind) = obstacle else { return NoLayout::Ray };
    match kind {
        LimitKind::EdgeThicknessMm | LimitKind::CentreThicknessMm => NoLayout::Thickness,
        LimitKind::SpacingMm | LimitKind::AirMm | LimitKind::EdgeGapMm => NoLayout::Air,
        LimitKind::RadiusMm | LimitKind::Steepness => NoLayout::Curvature,
        LimitKind::TravelMm | LimitKind::SlopeMmPerRatio | LimitKind::Monotonic => NoLayout::Travel,
        LimitKind::IncidenceDeg => NoLayout::Ray,
        LimitKind::TrackMm | LimitKind::HousingMm => NoLayout::Track,
        LimitKind::InternalFocus => NoLayout::Focus,
        LimitKind::FluenceJCm2 => NoLayout::Fluence,
        LimitKind::GhostClearanceMm | LimitKind::DoubleGhostClearanceMm => NoLayout::Ghost,
    }
}
