//! Points of a brief: first-order layouts of every family, glass and order of elements it allows.

use merit_function::assessment::assess;
use merit_function::block::Bounds;
use merit_function::limits::RangeDocument;
use merit_function::problem::{MeritFunction, RAYS};
use merit_function::variables::{FreePlace, Variables};
use serde_json::{Value, json};
use surface_model::design::Design;
use surface_model::document::Document;
use surface_model::place::Place;

use super::candidate::Candidate;
use super::ground::Ground;
use super::workbench::Workbench;
use crate::design_file::DesignFile;
use crate::optimise::{OptimiseError, require_goal};
use crate::run::Interrupted;
use crate::start::{Begun, Starts};

/// What is free in the designs of a brief, in the words of a design file.
const FREE: [&str; 4] = ["radii", "spacings", "thicknesses", "airs"];

/// Clear diameter over the diameter the traced rays take up, where it has to grow, and what it is a
/// multiple of: common practice, no published source.
const CLEAR: f64 = 1.1;
const CLEAR_STEP_MM: f64 = 0.5;

/// How thick a glass is on axis for its clear diameter, where the brief does not say: common
/// practice, no published source. A thicker one is a rod, a thinner one bends in its mount.
const THINNEST_OF_DIAMETER: f64 = 0.08;
const THICKEST_OF_DIAMETER: f64 = 0.5;
/// Small lenses are thicker than that to be handled at all.
const THICK_ENOUGH_MM: f64 = 3.0;

/// A brief to be searched.
#[derive(Debug)]
pub(super) struct BriefSource {
    pub(super) starts: Starts,
}

/// What the grounds of a start were made of, by the number of the ground.
pub(super) type Layouts = Vec<Begun>;

impl BriefSource {
    /// # Errors
    /// The brief has no goals.
    pub(super) fn new(starts: Starts) -> Result<Self, OptimiseError> {
        require_goal(&starts.brief().wishes)?;
        Ok(Self { starts })
    }

    /// The candidate at a point of the unit cube, if there is one.
    pub(super) fn at(
        &self,
        layouts: &mut Layouts,
        bench: &mut Workbench<'_>,
        point: &[f64],
    ) -> Result<Option<Candidate>, Interrupted> {
        bench.watch()?;
        let layout = self.starts.layout(point).ok();
        Ok(layout.and_then(|layout| self.stand(layouts, bench, layout.into())))
    }

    /// What a search begins with as a candidate.
    pub(super) fn stand(
        &self,
        layouts: &mut Layouts,
        bench: &mut Workbench<'_>,
        begun: Begun,
    ) -> Option<Candidate> {
        let design = &begun.design;
        let wishes = &self.starts.brief().wishes;
        let free = self.free(design);
        let variables = Variables::new(design, &wishes.limits, &free).ok()?;
        let exact = MeritFunction::new(design, wishes, variables, RAYS).ok()?;
        let exact = exact.with_temperatures(design, wishes).ok()?;
        let start = exact.variables().start().to_vec();
        let ground = bench.lay(Ground::new(exact, design.housing.track_mm));
        layouts.push(begun);
        bench.stand(ground, start)
    }

    /// A finished candidate on a ground of its own, its clear diameters made large enough for the
    /// beam that it has by now; `None` where they are.
    pub(super) fn refitted(
        &self,
        layouts: &mut Layouts,
        bench: &mut Workbench<'_>,
        candidate: &Candidate,
    ) -> Option<Candidate> {
        let mut layout = layouts.get(candidate.ground)?.clone();
        let variables = bench.ground(candidate).exact.variables();
        variables.write(&candidate.variables, &mut layout.design);
        let assessed = assess(&layout.design, &self.starts.brief().wishes).elements;
        let elements = layout.design.groups.iter_mut().flat_map(|group| &mut group.elements);
        let mut outgrown = false;
        for (element, assessed) in elements.zip(assessed) {
            let Some(footprint_mm) = assessed.footprint_mm else { continue };
            if footprint_mm > element.diameter_mm {
                outgrown = true;
                let diameter_mm = (footprint_mm * CLEAR / CLEAR_STEP_MM).ceil() * CLEAR_STEP_MM;
                element.diameter_mm = diameter_mm;
                for surface in &mut element.surfaces {
                    surface.semi_diameter = 0.5 * diameter_mm;
                }
            }
        }
        if outgrown { self.stand(layouts, bench, layout) } else { None }
    }

    /// The design file of a candidate.
    pub(super) fn file(&self, begun: &Begun, design: &Design, note: &str) -> Option<DesignFile> {
        let file = self.starts.file_of(&begun.glasses, design, note).ok()?;
        let mut document = file.document().value().clone();
        let mut free = FREE.map(Value::from).to_vec();
        let ranged = self.free(design).into_iter().filter(|free| free.own_range != Bounds::FREE);
        free.extend(ranged.map(|free| in_words(&free, &document)));
        document["free"] = Value::Array(free);
        DesignFile::read(Document::from_value(file.label(), document)).ok()
    }

    /// Every number that the words of [`FREE`] stand for, those of glass and air inside a group
    /// with the range that is usual for it where the brief names none.
    fn free(&self, design: &Design) -> Vec<FreePlace> {
        let limits = &self.starts.brief().written().limits;
        let places = Place::all(design).into_iter();
        let places = places.filter(|place| place.shapes().is_none());
        let range = |place| match place {
            Place::Thickness { group, element, glass } => {
                let element = &design.groups[group].elements[element];
                let value_mm = element.thicknesses_mm[glass];
                usual_thickness(limits.centre_thickness_mm, element.diameter_mm, value_mm)
            }
            Place::Air { group, after } => {
                let group = &design.groups[group];
                let ends = &group.elements[after..=after + 1];
                let widest = ends.iter().map(|element| element.diameter_mm).fold(0.0, f64::max);
                let open = limits.air_mm.and_then(|range| range.max).is_none();
                let high = if open { widest.max(group.airs_mm[after]) } else { f64::INFINITY };
                Bounds { high, ..Bounds::FREE }
            }
            _ => Bounds::FREE,
        };
        places.map(|place| FreePlace { place, own_range: range(place) }).collect()
    }
}

/// How thick a glass may become on axis, of this clear diameter and `value_mm` thick now, at each
/// end that the brief leaves open.
fn usual_thickness(limit: Option<RangeDocument>, diameter_mm: f64, value_mm: f64) -> Bounds {
    let RangeDocument { min, max } = limit.unwrap_or_default();
    let low = (THINNEST_OF_DIAMETER * diameter_mm).min(value_mm);
    let high = (THICKEST_OF_DIAMETER * diameter_mm).max(THICK_ENOUGH_MM).max(value_mm);
    Bounds {
        low: if min.is_none() { low } else { f64::NEG_INFINITY },
        high: if max.is_none() { high } else { f64::INFINITY },
    }
}

/// An entry of `free` with a range.
fn in_words(free: &FreePlace, document: &Value) -> Value {
    let at = free.place.address().with_names(document);
    let mut entry = json!({ "at": at.to_string() });
    let Bounds { low, high } = free.own_range;
    for (key, end) in [("min", low), ("max", high)] {
        if end.is_finite() {
            entry[key] = json!(end);
        }
    }
    entry
}
