//! A point of a sweep over a design: the design with the point's values, optimised from one or more
//! starts.

use rand::RngExt;
use serde_json::Value;
use surface_model::design::Design;
use surface_model::document::Document;
use surface_model::place::Place;

use super::plan::Plan;
use super::point::{Neighbour, Outcome, Reached};
use crate::design_file::DesignFile;
use crate::optimise::optimise;
use crate::run::{Interrupt, Interrupted};
use crate::sampling::stream;
use crate::solve::{Interruptible, Settings, Stopped, Unwatched};

/// By how much a start is shaken: each free number by up to this share of itself.
const SHAKE: f64 = 0.1;

/// What the best start of a point comes to.
pub(super) fn optimised(
    plan: &Plan,
    number: usize,
    own: &DesignFile,
    neighbour: Option<&Neighbour>,
    interrupt: &Interrupt,
) -> Result<Outcome, Interrupted> {
    let (mut best, mut fault, mut iterations): (Option<Reached>, Option<String>, u64) =
        (None, None, 0);
    for (from_point, start) in starts(plan, number, own, neighbour) {
        if interrupt.is_raised() {
            return Err(Interrupted);
        }
        match improve(&start, from_point, interrupt)? {
            Ok(reached) => {
                iterations += reached.iterations;
                if best.as_ref().is_none_or(|best| reached.merit < best.merit) {
                    best = Some(reached);
                }
            }
            Err(reason) => fault = fault.or(Some(reason)),
        }
    }
    Ok(match best {
        Some(reached) => Outcome::Reached(Box::new(Reached { iterations, ..reached })),
        None => Outcome::Fault(fault.unwrap_or_else(|| "no start could be optimised".to_owned())),
    })
}

/// The starts of a point, each with the point it was made of.
fn starts(
    plan: &Plan,
    number: usize,
    own: &DesignFile,
    neighbour: Option<&Neighbour>,
) -> Vec<(Option<u64>, DesignFile)> {
    let mut starts: Vec<(Option<u64>, DesignFile)> = Vec::new();
    if let Some(neighbour) = neighbour {
        let warm = warmed(own, &neighbour.design);
        starts.extend(warm.map(|file| (Some(neighbour.number), file)));
    }
    let wanted = plan.starts as usize;
    if starts.is_empty() || wanted > 1 {
        starts.push((None, own.clone()));
    }
    let mut random = stream(plan.seed, number as u64);
    for _ in starts.len()..wanted {
        let (from, file) = &starts[0];
        let mut design = file.design.clone();
        for free in &file.free {
            let factor = 1.0 + SHAKE * random.random_range(-1.0..1.0);
            free.place.set(&mut design, free.place.value(&file.design) * factor);
        }
        if let Some(shaken) = fitted(file, design) {
            starts.push((*from, shaken));
        }
    }
    starts
}

/// Optimises one start; a reason where it cannot be.
fn improve(
    start: &DesignFile,
    from_point: Option<u64>,
    interrupt: &Interrupt,
) -> Result<Result<Reached, String>, Interrupted> {
    if start.free.is_empty() {
        let reached = Reached::of(start, from_point, 0);
        return Ok(reached.ok_or_else(|| "rays fail, and nothing is free to move".to_owned()));
    }
    let mut observer = Interruptible { stop: interrupt.flag(), observer: Unwatched };
    match optimise(start, &Settings::default(), &mut observer) {
        Ok(result) if result.stopped == Stopped::Interrupted => Err(Interrupted),
        Ok(result) => {
            let (end, iterations) = (&result.report.end, result.report.iterations);
            let reached = Reached::from_assessment(end, &result.file, from_point, iterations);
            Ok(reached.ok_or_else(|| "rays fail in the optimised design".to_owned()))
        }
        Err(error) => Ok(Err(error.to_string())),
    }
}

/// A point's own file with the free numbers of a neighbour's design; `None` where the two are not
/// built alike.
fn warmed(own: &DesignFile, neighbour: &Value) -> Option<DesignFile> {
    let document = Document::from_value(own.label(), neighbour.clone());
    let near = DesignFile::read(document).ok()?.design;
    let mut design = own.design.clone();
    if Place::all(&near) != Place::all(&design) {
        return None;
    }
    for free in &own.free {
        free.place.set(&mut design, free.place.value(&near));
    }
    fitted(own, design)
}

/// The file with these numbers, its spacings fitted to the fixed groups.
fn fitted(file: &DesignFile, mut design: Design) -> Option<DesignFile> {
    let is_free =
        |state, after| file.free.iter().any(|free| free.place == Place::Spacing { state, after });
    design.fit_to_housing(|state, mut spacings| spacings.rfind(|&after| is_free(state, after)));
    file.with_numbers_of(&design).ok()
}
