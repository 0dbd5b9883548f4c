//! The tolerances of a design, one by one.

use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::sequence::SurfaceId;

use super::document::Tolerances;
use super::kind::{Grade, Kind};

/// What a tolerance is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub(crate) enum Target {
    Surface(SurfaceId),
    Glass { group: usize, element: usize, glass: usize },
    Air { group: usize, after: usize },
    Element { group: usize, element: usize },
    Group(usize),
    Spacing { state: usize, after: usize },
}

/// One tolerance of a design.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Item {
    pub(crate) kind: Kind,
    pub(crate) target: Target,
    /// The tolerance either way, in the unit of its kind.
    pub(crate) tolerance: f64,
}

impl Item {
    /// Every tolerance a design can have, at zero: kind by kind, from left to right.
    pub(crate) fn possible(design: &Design) -> Vec<Self> {
        let everywhere = targets(design);
        let mut items = Vec::new();
        for kind in Kind::ALL {
            let mine = everywhere.iter().filter(|target| target.has(kind));
            items.extend(mine.map(|&target| Self { kind, target, tolerance: 0.0 }));
        }
        items
    }

    /// The tolerances a design has: those of its grade, its own, and of these what is not zero.
    pub(crate) fn all(design: &Design, tolerances: &Tolerances) -> Vec<Self> {
        let mut items = Self::settled(design, tolerances, Some(tolerances.grade));
        items.retain(|item| item.tolerance > 0.0 && item.matters(design));
        items
    }

    /// Every tolerance that the file gives, by a grade that it names or of its own; those that it
    /// does not give are zero.
    pub(crate) fn given(design: &Design, tolerances: &Tolerances) -> Vec<Self> {
        let grade = tolerances.graded.then_some(tolerances.grade);
        Self::settled(design, tolerances, grade)
    }

    /// The tolerances of a grade, with the file's own in their place.
    fn settled(design: &Design, tolerances: &Tolerances, grade: Option<Grade>) -> Vec<Self> {
        let mut items = Self::possible(design);
        for item in &mut items {
            item.tolerance = grade.and_then(|grade| grade.tolerance(item.kind)).unwrap_or(0.0);
        }
        for &(kind, target, tolerance) in &tolerances.own {
            for item in items.iter_mut().filter(|item| item.target == target) {
                if item.kind == kind {
                    item.tolerance = tolerance;
                } else if kind.twin() == Some(item.kind) {
                    item.tolerance = 0.0;
                }
            }
        }
        items
    }

    /// Whether it can do anything: a flat has no radius to be off by per cents, and a glass
    /// without dispersion, or unknown at the d line, no Abbe number.
    fn matters(&self, design: &Design) -> bool {
        match (self.kind, self.target) {
            (Kind::RadiusPercent, Target::Surface(SurfaceId { group, element, surface })) => {
                design.groups[group].elements[element].surfaces[surface].curvature != 0.0
            }
            (Kind::AbbePercent, Target::Glass { group, element, glass }) => {
                design.groups[group].elements[element].glasses[glass].vd().is_some()
            }
            _ => true,
        }
    }

    /// Where what it is about stands in the file.
    pub(crate) fn at(&self) -> Address {
        let root = Address::root();
        let group_at = |group: usize| root.clone().key("groups").index(group);
        let element_at = |group, element| group_at(group).key("elements").index(element);
        match self.target {
            Target::Surface(id) => {
                element_at(id.group, id.element).key("radii_mm").index(id.surface)
            }
            Target::Glass { group, element, glass } => {
                let list =
                    if self.kind == Kind::ThicknessMm { "thicknesses_mm" } else { "glasses" };
                element_at(group, element).key(list).index(glass)
            }
            Target::Air { group, after } => group_at(group).key("airs_mm").index(after),
            Target::Element { group, element } => element_at(group, element),
            Target::Group(group) => group_at(group),
            Target::Spacing { state, after } => {
                root.key("states").index(state).key("spacings_mm").index(after)
            }
        }
    }
}

impl Target {
    fn has(&self, kind: Kind) -> bool {
        match self {
            Self::Surface(_) => matches!(
                kind,
                Kind::RadiusPercent | Kind::RadiusFringes | Kind::IrregularityFringes
            ),
            Self::Glass { .. } => matches!(
                kind,
                Kind::ThicknessMm | Kind::Index | Kind::AbbePercent | Kind::WedgeMrad
            ),
            Self::Air { .. } => kind == Kind::AirMm,
            Self::Element { .. } => {
                matches!(kind, Kind::ElementDecentreMm | Kind::ElementTiltMrad)
            }
            Self::Group(_) => matches!(kind, Kind::GroupDecentreMm | Kind::GroupTiltMrad),
            Self::Spacing { .. } => kind == Kind::SpacingMm,
        }
    }
}

/// Everything of a design that can have a tolerance.
fn targets(design: &Design) -> Vec<Target> {
    let mut targets = Vec::new();
    for (g, group) in design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let surface = |surface| SurfaceId { group: g, element: e, surface };
            targets.extend((0..element.surfaces.len()).map(surface).map(Target::Surface));
            let glass = |glass| Target::Glass { group: g, element: e, glass };
            targets.extend((0..element.glasses.len()).map(glass));
            targets.push(Target::Element { group: g, element: e });
        }
        targets.extend((0..group.airs_mm.len()).map(|after| Target::Air { group: g, after }));
        targets.push(Target::Group(g));
    }
    for (state, zoom) in design.states.iter().enumerate() {
        let spacing = |after| Target::Spacing { state, after };
        targets.extend((0..zoom.spacings_mm.len()).map(spacing));
    }
    targets
}
