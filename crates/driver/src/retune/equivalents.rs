//! Other makers' glasses in place of one that cannot be had, ranked by what the design comes to
//! with each.

use rayon::prelude::*;
use serde::Serialize;
use serde_json::Value;
use surface_model::document::{
    Address, Complaint, Complaints, Place, Source, did_you_mean, nearest, one_of, quoted,
};
use surface_model::glass::{Equivalent, Glass, equivalents};

use super::{RetuneError, respace};
use crate::change::{Change, apply};
use crate::design_file::DesignFile;
use crate::optimise::optimise;
use crate::solve::{Settings, Unwatched};
use merit_function::assessment::assess;

/// What one glass comes to.
#[derive(Debug, Clone, Serialize)]
pub struct Replacement {
    /// The glass beside the one it replaces.
    #[serde(flatten)]
    pub glass: Equivalent,
    /// Merit with nothing moved; null where rays fail.
    pub merit_nothing_moved: Option<f64>,
    /// Merit with the spacings re-adjusted; null where that cannot begin, or no spacing is free.
    pub merit_spacings: Option<f64>,
    /// Merit with everything moved that is free and not made; null where that cannot begin.
    pub merit_unmade: Option<f64>,
    /// Whether the design meets every goal and limit at the end.
    pub meets: bool,
    /// Why it comes to nothing, if it does.
    pub fault: Option<String>,
    /// The design it comes to.
    #[serde(skip)]
    pub file: DesignFile,
}

impl Replacement {
    /// Merit of the best stage there is.
    #[must_use]
    pub fn merit(&self) -> Option<f64> {
        self.merit_unmade.or(self.merit_spacings).or(self.merit_nothing_moved)
    }
}

/// Puts the glasses nearest to `glass`, at most `most` of other makers, in its place wherever an
/// element is not made yet; re-optimises with each; best first.
///
/// # Errors
/// The design does not use the glass, or uses it in parts that are made only.
pub fn replacements(
    file: &DesignFile,
    made: &[Address],
    glass: &str,
    most: usize,
    settings: &Settings,
) -> Result<Vec<Replacement>, RetuneError> {
    let (at, replaced) = uses(file, made, glass)?;
    let mut wavelengths_nm: Vec<f64> =
        file.design.states.iter().flat_map(|state| state.wavelengths_nm.clone()).collect();
    wavelengths_nm.sort_by(f64::total_cmp);
    wavelengths_nm.dedup();
    let mut near = equivalents(&replaced, &wavelengths_nm, usize::MAX)
        .map_err(crate::optimise::OptimiseError::Glass)?;
    near.retain(|other| other.glass.maker() != replaced.maker());
    near.truncate(most);
    let mut ranked: Vec<Replacement> = near
        .into_par_iter()
        .map(|other| replacement(file, &at, other, settings))
        .collect::<Result<_, Complaints>>()?;
    let key = |replacement: &Replacement| replacement.merit().unwrap_or(f64::INFINITY);
    ranked.sort_by(|a, b| key(a).total_cmp(&key(b)));
    Ok(ranked)
}

/// Where a glass is used in elements that are not made, and the glass itself.
fn uses(
    file: &DesignFile,
    made: &[Address],
    glass: &str,
) -> Result<(Vec<Address>, Glass), Complaints> {
    let mut at = Vec::new();
    let mut replaced = None;
    let mut others: Vec<String> = Vec::new();
    for (g, group) in file.design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let part = Address::root().key("groups").index(g).key("elements").index(e);
            for (i, used) in element.glasses.iter().enumerate() {
                let here = part.clone().key("glasses").index(i);
                let written = here.get(file.document().value()).and_then(Value::as_str);
                if written != Some(glass) && used.full_name() != glass {
                    others.push(used.full_name());
                    continue;
                }
                replaced = Some(used.clone());
                if !made.iter().any(|made| made.contains(&part)) {
                    at.push(here);
                }
            }
        }
    }
    others.sort();
    others.dedup();
    let names = || others.iter().map(String::as_str);
    let refused = |found: String, expected: String, advice| {
        let source = Source { label: format!("--equivalents {glass}"), position: None };
        let complaint = Complaint { place: Place::File, found, expected: Some(expected), advice };
        Complaints::elsewhere(file.label(), vec![(source, complaint)], file.document().value())
    };
    match replaced {
        None => Err(refused(
            format!("the design has no glass {}", quoted(glass)),
            one_of(names()),
            nearest(glass, names()).map(did_you_mean),
        )),
        Some(_) if at.is_empty() => Err(refused(
            format!("every element of {} is made already", quoted(glass)),
            "a glass of which something is not made yet".to_owned(),
            None,
        )),
        Some(replaced) => Ok((at, replaced)),
    }
}

fn replacement(
    file: &DesignFile,
    at: &[Address],
    glass: Equivalent,
    settings: &Settings,
) -> Result<Replacement, Complaints> {
    let name = glass.glass.full_name();
    let change = |at: &Address| {
        let source = Source { label: format!("--equivalents {name}"), position: None };
        Change::new(at.clone(), Value::from(name.as_str()), source)
    };
    let changed = apply(file, &at.iter().map(change).collect::<Vec<_>>())?.file;
    let start = assess(&changed.design, &changed.wishes);
    let mut found = Replacement {
        glass,
        merit_nothing_moved: start.merit.total,
        merit_spacings: None,
        merit_unmade: None,
        meets: start.meets,
        fault: None,
        file: changed,
    };
    match respace(&found.file, settings, &mut Unwatched) {
        Ok(None) => {}
        Ok(Some(result)) => {
            found.merit_spacings = result.report.end.merit.total;
            found.meets = result.report.end.meets;
            found.file = result.file;
        }
        Err(error) => found.fault = Some(error.to_string()),
    }
    if found.file.free.iter().any(|free| !super::is_spacing(free.place)) {
        match optimise(&found.file, settings, &mut Unwatched) {
            Ok(result) => {
                found.merit_unmade = result.report.end.merit.total;
                found.meets = result.report.end.meets;
                found.file = result.file;
                found.fault = None;
            }
            Err(error) => found.fault = Some(error.to_string()),
        }
    }
    Ok(found)
}
