//! Which change hurt most.
//!
//! With the residuals r of the design as it was and J δ their exact derivative along what one
//! change does to every train (curvatures, gaps, indices, conic constants, coefficients, spacings
//! that took it up), the change alone costs |r + J δ|² − |r|² to first order in the residuals. The
//! gradient of the merit itself would not do: at a minimum it is zero.
//!
//! A change without a derivative (another beam, state, ratio or wish) is traced alone instead; so
//! is every other, for comparison.

use merit_function::assessment::{Merit, assess};
use merit_function::block::Bounds;
use merit_function::limits::Limits;
use merit_function::problem::{MeritFunction, RAYS};
use merit_function::variables::{FreePlace, Variables};
use merit_function::wishes::Wishes;
use serde::Serialize;
use surface_model::design::Design;
use surface_model::place::Place;
use surface_model::quantities::Quantities;
use surface_model::surface::ASPHERE_TERMS;
use surface_model::train::Train;

use crate::change::{Change, apply};
use crate::design_file::DesignFile;

/// What one change costs by itself, nothing moved.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Blame {
    /// The change, as written.
    pub change: String,
    /// Merit of the goals it adds, from exact derivatives; null where there is none.
    pub by_derivatives: Option<f64>,
    /// Merit of the goals it adds, traced with this change alone; null where that is no design or
    /// rays fail.
    pub traced: Option<f64>,
    /// Merit it adds by limits it crosses; these have no derivative as long as they are kept.
    pub by_limits: f64,
    /// Why there is no derivative.
    pub without_derivative: Option<&'static str>,
}

impl Blame {
    /// What it costs: from derivatives where there are any, else traced; with what limits add.
    #[must_use]
    pub fn cost(&self) -> Option<f64> {
        Some(self.by_derivatives.or(self.traced)? + self.by_limits)
    }
}

/// What each change costs by itself.
pub(crate) fn blame(file: &DesignFile, changes: &[Change]) -> Vec<Blame> {
    let before = assess(&file.design, &file.wishes).merit;
    changes.iter().map(|change| blame_one(file, before, change)).collect()
}

fn blame_one(file: &DesignFile, before: Merit, change: &Change) -> Blame {
    let written = format!("{}={}", change.at(), shown(change));
    let Ok(changed) = apply(file, std::slice::from_ref(change)) else {
        let without_derivative = Some("it makes no design by itself");
        let (by_derivatives, traced) = (None, None);
        return Blame {
            change: written,
            by_derivatives,
            traced,
            by_limits: 0.0,
            without_derivative,
        };
    };
    let after = assess(&changed.file.design, &changed.file.wishes).merit;
    let traced = after.goals.zip(before.goals).map(|(after, before)| after - before);
    let by_limits = after.limits - before.limits;
    let (by_derivatives, without_derivative) = match no_derivative(file, &changed.file) {
        Some(reason) => (None, Some(reason)),
        None => match by_derivatives(file, &changed.file.design) {
            Some(cost) => (Some(cost), None),
            None => (None, Some("rays fail in the design as it was")),
        },
    };
    Blame { change: written, by_derivatives, traced, by_limits, without_derivative }
}

fn shown(change: &Change) -> String {
    match change.value() {
        serde_json::Value::String(text) => text.clone(),
        other => other.to_string(),
    }
}

/// Why a change has no derivative, if it has none.
fn no_derivative(before: &DesignFile, after: &DesignFile) -> Option<&'static str> {
    let (old, new) = (&before.design, &after.design);
    let same_states = old.states.len() == new.states.len()
        && old.states.iter().zip(&new.states).all(|(a, b)| a.name == b.name);
    let count = |design: &Design| design.sequence().surfaces.len();
    let waves = |design: &Design| {
        design.states.iter().map(|state| state.wavelengths_nm.clone()).collect::<Vec<_>>()
    };
    let ratios = |design: &Design| design.states.iter().map(|s| s.ratio).collect::<Vec<_>>();
    if !same_states {
        Some("other states")
    } else if count(old) != count(new) {
        Some("other surfaces")
    } else if old.beam != new.beam || waves(old) != waves(new) {
        Some("another beam")
    } else if ratios(old) != ratios(new) {
        Some("another ratio")
    } else if before.wishes != after.wishes {
        Some("other goals or limits")
    } else {
        None
    }
}

/// |r + J δ|² − |r|² for what the change does to the trains.
fn by_derivatives(file: &DesignFile, changed: &Design) -> Option<f64> {
    let wishes = Wishes {
        states: file.wishes.states.clone(),
        limits: Limits::default(),
        temperatures_c: Vec::new(),
    };
    let free = reshaped(&file.design, changed);
    let variables = Variables::new(&file.design, &wishes.limits, &free).ok()?;
    let (start, quantities) = (variables.start().to_vec(), variables.quantities());
    let mut merit = MeritFunction::new(&file.design, &wishes, variables, RAYS).ok()?;
    let direction = |k: usize, nm: f64| {
        let train = |design: &Design| design.train(design.states.get(k)?, nm).ok();
        let (old, new) = (train(&file.design), train(changed));
        old.zip(new).map_or_else(Vec::new, |(old, new)| {
            steps(&old, &new, quantities, &free_shapes(&free, &file.design))
        })
    };
    let (residuals, slopes) = merit.along(&start, direction).ok()?;
    let costs = residuals.iter().zip(&slopes).map(|(r, s)| (2.0 * r + s) * s);
    Some(costs.sum::<f64>()).filter(|cost| cost.is_finite())
}

/// Conic constants and asphere coefficients that a change moves: only surfaces whose shape has a
/// variable have derivatives by them.
fn reshaped(before: &Design, after: &Design) -> Vec<FreePlace> {
    let is_shape = |place: &Place| matches!(place, Place::Conic(_) | Place::Asphere(..));
    Place::all(before)
        .into_iter()
        .filter(is_shape)
        .filter(|place| place.value(before).to_bits() != place.value(after).to_bits())
        .map(|place| FreePlace { place, own_range: Bounds::FREE })
        .collect()
}

/// Places in the train of the surfaces whose shapes have derivatives.
fn free_shapes(free: &[FreePlace], design: &Design) -> Vec<usize> {
    let sequence = design.sequence();
    let surface = |free: &FreePlace| match free.place {
        Place::Conic(id) | Place::Asphere(id, _) => sequence.place_of_surface(id),
        _ => None,
    };
    let mut surfaces: Vec<usize> = free.iter().filter_map(surface).collect();
    surfaces.dedup();
    surfaces
}

/// By how much which quantity of a train changes.
fn steps(old: &Train, new: &Train, quantities: Quantities, shaped: &[usize]) -> Vec<(usize, f64)> {
    let mut steps = Vec::new();
    let mut step = |place: usize, from: f64, to: f64| {
        if from.to_bits() != to.to_bits() {
            steps.push((place, to - from));
        }
    };
    for (i, (a, b)) in old.surfaces().iter().zip(new.surfaces()).enumerate() {
        step(quantities.curvature(i), a.curvature, b.curvature);
        if shaped.contains(&i) {
            step(quantities.conic(i), a.conic, b.conic);
            for term in 0..ASPHERE_TERMS {
                step(quantities.asphere(i, term), a.asphere[term], b.asphere[term]);
            }
        }
    }
    for (i, (&a, &b)) in old.gaps().iter().zip(new.gaps()).enumerate() {
        step(quantities.gap(i), a, b);
    }
    for (i, (&a, &b)) in old.indices().iter().zip(new.indices()).enumerate() {
        step(quantities.index(i), a, b);
    }
    steps
}
