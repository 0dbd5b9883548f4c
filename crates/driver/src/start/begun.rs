//! What a search works on: a design begun from a brief, with the glasses it may name in a file.

use serde_json::Value;
use surface_model::design::{Design, ZoomState};

use super::layout::Layout;
use super::scheme::{Kind, Scheme};
use super::space::Space;
use crate::design_file::DesignFile;

/// Per group and element, the places of its glasses among the allowed ones of the brief.
pub(crate) type GlassesOfGroups = Vec<Vec<Vec<usize>>>;

/// A design begun from a brief.
#[derive(Debug, Clone)]
pub(crate) struct Begun {
    pub(crate) design: Design,
    pub(crate) glasses: GlassesOfGroups,
}

impl From<Layout> for Begun {
    fn from(layout: Layout) -> Self {
        Self { design: layout.design, glasses: layout.glasses }
    }
}

impl Begun {
    /// The lenses of a design of another brief, in this one's beam, tube and ratios.
    pub(super) fn of_another(space: &Space, file: &DesignFile) -> Option<Self> {
        let brief = &space.brief;
        let scheme = space.schemes.iter().find(|scheme| is_set_up_as(scheme, &file.design))?;
        let glasses = glasses(space, file)?;
        if file.design.states.len() != brief.ratios.len() {
            return None;
        }
        let mut design = file.design.clone();
        design.title.clone_from(&brief.written().title);
        design.beam = brief.beam.clone();
        design.housing = space.housing(scheme);
        let state = |(ratio, state): (&crate::brief::RatioBrief, ZoomState)| ZoomState {
            name: ratio.name.clone(),
            ratio: ratio.ratio,
            spacings_mm: state.spacings_mm,
            wavelengths_nm: ratio.wavelengths_nm.clone(),
        };
        design.states = brief.ratios.iter().zip(design.states).map(state).collect();
        let elements = design.groups.iter_mut().flat_map(|group| &mut group.elements);
        for (element, places) in elements.zip(glasses.iter().flatten()) {
            let allowed = places.iter().map(|&place| brief.glasses_allowed[place].glass.clone());
            element.glasses = allowed.collect();
        }
        design.fit_to_housing(|_, mut spacings| spacings.next_back());
        Some(Self { design, glasses })
    }
}

/// Whether a design has the groups and elements of a scheme.
fn is_set_up_as(scheme: &Scheme, design: &Design) -> bool {
    let kind = |glasses: usize| if glasses == 2 { Kind::Pair } else { Kind::Singlet };
    scheme.groups.len() == design.groups.len()
        && scheme.groups.iter().zip(&design.groups).all(|(scheme, group)| {
            let elements = group.elements.iter().map(|element| kind(element.glasses.len()));
            scheme.name == group.name && scheme.elements.iter().copied().eq(elements)
        })
}

/// Where the glasses of a file stand among the allowed ones; `None` where one does not.
fn glasses(space: &Space, file: &DesignFile) -> Option<GlassesOfGroups> {
    let place = |name: &Value| {
        space.brief.glasses_allowed.iter().position(|allowed| *name == *allowed.name)
    };
    let list = |value: &Value, key: &str| value.get(key).and_then(Value::as_array).cloned();
    let element = |element: &Value| list(element, "glasses")?.iter().map(place).collect();
    let group = |group: &Value| list(group, "elements")?.iter().map(element).collect();
    list(file.document().value(), "groups")?.iter().map(group).collect()
}
