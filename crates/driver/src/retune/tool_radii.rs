//! Radii the shop has tools for: every free radius is moved to one of them, in the order that costs
//! least, and the rest is re-optimised after each.
//!
//! At each turn every radius still free is tried with the nearest tool on either side (nearest in
//! curvature, of the same sign), the rest re-optimised; the trial that leaves the lowest merit is
//! taken. The order is therefore greedy: each move is the cheapest at its turn.

use rayon::prelude::*;
use serde::Serialize;
use serde_json::Value;
use surface_model::document::{
    Address, Complaint, Complaints, Place as PlaceInFile, Source, quoted,
};
use surface_model::place::Place;

use super::RetuneError;
use super::table::{Cell, Table};
use crate::change::{Change, apply};
use crate::design_file::DesignFile;
use crate::optimise::{Optimisation, OptimiseError, optimise};
use crate::solve::{Settings, Unwatched};
use merit_function::assessment::assess;

/// The head of the column of radii.
pub(crate) const RADIUS_HEAD: &str = "radius_mm";

/// The radii a shop has tools for, as curvatures without sign, ascending; a flat is 0.
#[derive(Debug, Clone, PartialEq)]
pub struct Tools {
    radii_mm: Vec<f64>,
    flat: bool,
}

/// One radius moved to a tool.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Move {
    /// Which radius.
    pub at: Address,
    /// What it was, mm; null for a flat.
    pub from_mm: Option<f64>,
    /// The tool's, mm; null for a flat.
    pub to_mm: Option<f64>,
    /// Merit after the move, the rest re-optimised; null where rays fail.
    pub merit: Option<f64>,
    /// By how much the move raised it.
    pub cost: Option<f64>,
}

/// The moves in order, and the design they lead to.
#[derive(Debug, Clone)]
pub struct ToolRadii {
    /// Merit before the first move.
    pub merit_before: Option<f64>,
    /// The moves, the cheapest first at each turn.
    pub moves: Vec<Move>,
    /// The design with the tools' radii, held.
    pub file: DesignFile,
}

impl Tools {
    /// Reads a table with a column `radius_mm`: a radius in mm, its sign of no account, or `flat`,
    /// in every row. Other columns are the shop's own.
    ///
    /// # Errors
    /// There is no such column or nothing in it, or a cell is no radius.
    pub fn of(table: &Table) -> Result<Self, Complaints> {
        let heads = table.heads();
        let column = heads.iter().position(|head| head.text == RADIUS_HEAD).ok_or_else(|| {
            let complaint = Complaint {
                place: PlaceInFile::File,
                found: format!("no column is called \"{RADIUS_HEAD}\""),
                expected: Some(format!("a first line with the word {RADIUS_HEAD} over the radii")),
                advice: None,
            };
            let position = heads.first().map(|head| head.position);
            table.refuse(vec![(position, complaint)])
        })?;
        let mut tools = Self { radii_mm: Vec::new(), flat: false };
        let mut wrong = Vec::new();
        for cell in table.rows().iter().filter_map(|row| row.get(column)) {
            match radius(cell) {
                Ok(Some(radius_mm)) => tools.radii_mm.push(radius_mm),
                Ok(None) => tools.flat = true,
                Err(complaint) => wrong.push((Some(cell.position), complaint)),
            }
        }
        if !wrong.is_empty() {
            return Err(table.refuse(wrong));
        }
        if tools.radii_mm.is_empty() && !tools.flat {
            let complaint = Complaint {
                place: PlaceInFile::File,
                found: "the list has no radius".to_owned(),
                expected: Some("a radius in mm in every line below the first".to_owned()),
                advice: None,
            };
            return Err(table.refuse(vec![(None, complaint)]));
        }
        tools.radii_mm.sort_by(f64::total_cmp);
        tools.radii_mm.dedup();
        Ok(tools)
    }

    /// The tools on either side of a curvature, in 1/mm, signed as it is, as file values.
    fn beside(&self, curvature: f64) -> Vec<Value> {
        let radius_mm = 1.0 / curvature.abs();
        let above = self.radii_mm.partition_point(|&tool| tool < radius_mm);
        let signed = |tool: f64| Value::from(if curvature < 0.0 { -tool } else { tool });
        let steeper = above.checked_sub(1).and_then(|i| self.radii_mm.get(i));
        let flatter = self.radii_mm.get(above);
        let mut found: Vec<Value> =
            [steeper, flatter].into_iter().flatten().map(|&t| signed(t)).collect();
        if flatter.is_none() && self.flat {
            found.push(Value::from("flat"));
        }
        if found.is_empty() {
            found.push(Value::from("flat"));
        }
        found
    }
}

fn radius(cell: &Cell) -> Result<Option<f64>, Complaint> {
    if cell.text == "flat" {
        return Ok(None);
    }
    let radius_mm = cell.text.parse::<f64>().ok().map(f64::abs);
    radius_mm.filter(|radius_mm| (1e-3..=1e9).contains(radius_mm)).map(Some).ok_or_else(|| {
        Complaint {
            place: PlaceInFile::File,
            found: format!("{} is not a radius", quoted(&cell.text)),
            expected: Some("a number of mm from 0.001 to 1 000 000 000, or \"flat\"".to_owned()),
            advice: None,
        }
    })
}

/// Moves every free radius of a design to one of the tools'.
///
/// # Errors
/// An optimisation cannot begin.
pub fn move_to_tools(
    file: &DesignFile,
    tools: &Tools,
    settings: &Settings,
) -> Result<ToolRadii, RetuneError> {
    let merit_before = assess(&file.design, &file.wishes).merit.total;
    let mut done = ToolRadii { merit_before, moves: Vec::new(), file: file.clone() };
    loop {
        let radii: Vec<Place> = done
            .file
            .free
            .iter()
            .map(|free| free.place)
            .filter(|place| matches!(place, Place::Radius(_)))
            .collect();
        let trials: Vec<(Place, Value)> = radii
            .iter()
            .flat_map(|&place| {
                tools.beside(place.value(&done.file.design)).into_iter().map(move |to| (place, to))
            })
            .collect();
        if trials.is_empty() {
            return Ok(done);
        }
        let outcomes: Vec<Result<Trial, RetuneError>> = trials
            .par_iter()
            .map(|(place, to)| attempt(&done.file, *place, to, settings))
            .collect();
        let best = cheapest(&trials, outcomes)?;
        let (place, to) = &trials[best.0];
        let before = done.moves.last().map_or(done.merit_before, |last| last.merit);
        done.moves.push(Move {
            at: place.address().with_names(done.file.document().value()),
            from_mm: Some(1.0 / place.value(&done.file.design)).filter(|radius| radius.is_finite()),
            to_mm: to.as_f64(),
            merit: best.1.merit,
            cost: best.1.merit.zip(before).map(|(after, before)| after - before),
        });
        done.file = best.1.file;
    }
}

struct Trial {
    file: DesignFile,
    merit: Option<f64>,
}

/// The trial with the lowest merit, the first of equals; an error only if every trial is one.
fn cheapest(
    trials: &[(Place, Value)],
    outcomes: Vec<Result<Trial, RetuneError>>,
) -> Result<(usize, Trial), RetuneError> {
    debug_assert_eq!(trials.len(), outcomes.len());
    let mut best: Option<(usize, Trial)> = None;
    let mut failure = None;
    let key = |trial: &Trial| trial.merit.unwrap_or(f64::INFINITY);
    for (number, outcome) in outcomes.into_iter().enumerate() {
        match outcome {
            Ok(trial) if best.as_ref().is_none_or(|(_, best)| key(&trial) < key(best)) => {
                best = Some((number, trial));
            }
            Ok(_) => {}
            Err(error) => failure = failure.or(Some(error)),
        }
    }
    match (best, failure) {
        (Some(best), _) => Ok(best),
        (None, Some(error)) => Err(error),
        (None, None) => Err(OptimiseError::NothingFree.into()),
    }
}

/// The design with one radius moved and held, the rest re-optimised.
fn attempt(
    file: &DesignFile,
    place: Place,
    to: &Value,
    settings: &Settings,
) -> Result<Trial, RetuneError> {
    let source = Source { label: "--tool-radii".to_owned(), position: None };
    let moved = apply(file, &[Change::new(place.address(), to.clone(), source)])?.file;
    if moved.free.is_empty() {
        let merit = assess(&moved.design, &moved.wishes).merit.total;
        return Ok(Trial { file: moved, merit });
    }
    let Optimisation { file, report, .. } = optimise(&moved, settings, &mut Unwatched)?;
    Ok(Trial { file, merit: report.end.merit.total })
}
