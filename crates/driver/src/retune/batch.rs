//! A batch of as-built lenses: one line a serial number, one column an address, and for each unit
//! the spacings that suit its own radii, thicknesses and indices.
//!
//! The lenses are made, so only spacings move. Units do not know of each other: each comes out the
//! same whatever others stand in the table and however many threads work.

use merit_function::assessment::{Assessment, assess};
use rayon::prelude::*;
use serde::Serialize;
use surface_model::document::{Address, Complaint, Complaints, Place, Source, quoted};

use super::respace;
use super::table::{Cell, Table};
use crate::change::{Change, apply, value_of};
use crate::design_file::DesignFile;
use crate::solve::{Settings, Unwatched};

/// The head of the column of serial numbers.
pub(crate) const SERIAL_HEAD: &str = "serial";

/// Most units of a table: each is a design of its own, some ten kilobytes of it.
pub(crate) const MOST_UNITS: usize = 10_000;

/// One unit as measured.
#[derive(Debug, Clone)]
pub struct Unit {
    serial: String,
    file: DesignFile,
}

/// One unit with its own spacings.
#[derive(Debug, Clone, Serialize)]
pub struct TunedUnit {
    /// Its serial number, as written.
    pub serial: String,
    /// Merit with the spacings of the design; null where rays fail.
    pub merit_nothing_moved: Option<f64>,
    /// Whether it meets every goal and limit with them.
    pub meets_nothing_moved: bool,
    /// Merit with its own spacings; null where rays fail.
    pub merit: Option<f64>,
    /// Whether it meets every goal and limit with them.
    pub meets: bool,
    /// Its spacings, one entry a state.
    pub states: Vec<TunedState>,
    /// Why it could not be tuned, if it could not.
    pub fault: Option<String>,
}

/// The spacings of one state of a unit.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct TunedState {
    /// Name of the state.
    pub name: String,
    /// Air between the groups, mm.
    pub spacings_mm: Vec<f64>,
}

/// Reads the units of a table: a column `serial`, and columns headed by addresses of the design.
/// A cell is the value there; an empty one leaves the design's. `file` is the design with whatever
/// is the same in all units.
///
/// # Errors
/// Everything that is wrong, with line and column.
pub fn units(file: &DesignFile, table: &Table) -> Result<Vec<Unit>, Complaints> {
    let serial = table.heads().iter().position(|head| head.text == SERIAL_HEAD);
    let Some(serial) = serial else {
        let complaint = Complaint {
            place: Place::File,
            found: format!("no column is called \"{SERIAL_HEAD}\""),
            expected: Some("heads such as: serial,/groups/exit/elements/0/radii_mm/0".to_owned()),
            advice: None,
        };
        return Err(
            table.refuse(vec![(table.heads().first().map(|head| head.position), complaint)])
        );
    };
    if table.rows().len() > MOST_UNITS {
        let complaint = Complaint {
            place: Place::File,
            found: format!("the table has {} units", table.rows().len()),
            expected: Some(format!("at most {MOST_UNITS}: split the table")),
            advice: None,
        };
        return Err(table.refuse(vec![(None, complaint)]));
    }
    let columns = columns(file, table, serial)?;
    refuse_twins(table, serial)?;
    let read: Vec<Result<Unit, Complaints>> = table
        .rows()
        .par_iter()
        .map(|row| {
            let changes: Vec<Change> = columns
                .iter()
                .filter_map(|(column, at)| change(table, at, row.get(*column)?))
                .collect();
            let serial = row.get(serial).map_or_else(String::new, |cell| cell.text.clone());
            Ok(Unit { serial, file: apply(file, &changes)?.file })
        })
        .collect();
    // All complaints of the first row that has any: the next rows mostly share its mistake.
    read.into_iter().collect()
}

/// The columns that are addresses, each of which leads somewhere.
fn columns(
    file: &DesignFile,
    table: &Table,
    serial: usize,
) -> Result<Vec<(usize, Address)>, Complaints> {
    let mut columns = Vec::new();
    let mut wrong = Vec::new();
    for (column, head) in table.heads().iter().enumerate().filter(|(column, _)| *column != serial) {
        let address = head.text.parse::<Address>().map_err(|error| error.complaint(Place::File));
        let found = address.and_then(|address| {
            address
                .resolve(file.document().value())
                .map_err(|error| error.complaint(Place::File))?;
            Ok(address)
        });
        match found {
            Ok(address) => columns.push((column, address)),
            Err(complaint) => wrong.push((Some(head.position), complaint)),
        }
    }
    if wrong.is_empty() { Ok(columns) } else { Err(table.refuse(wrong)) }
}

fn refuse_twins(table: &Table, serial: usize) -> Result<(), Complaints> {
    let mut seen = std::collections::HashMap::new();
    let mut wrong = Vec::new();
    for cell in table.rows().iter().filter_map(|row| row.get(serial)) {
        if let Some(line) = seen.insert(cell.text.as_str(), cell.position.line) {
            let found =
                format!("the serial number {} is that of line {line} too", quoted(&cell.text));
            let expected = Some("each unit once".to_owned());
            let complaint = Complaint { place: Place::File, found, expected, advice: None };
            wrong.push((Some(cell.position), complaint));
        }
    }
    if wrong.is_empty() { Ok(()) } else { Err(table.refuse(wrong)) }
}

fn change(table: &Table, at: &Address, cell: &Cell) -> Option<Change> {
    let source: Source = table.source(cell.position);
    (!cell.text.is_empty()).then(|| Change::new(at.clone(), value_of(&cell.text), source))
}

/// Gives every unit its own spacings, in the order of the table.
#[must_use]
pub fn tune(units: &[Unit], settings: &Settings) -> Vec<TunedUnit> {
    units.par_iter().map(|unit| tuned(unit, settings)).collect()
}

fn tuned(unit: &Unit, settings: &Settings) -> TunedUnit {
    let before = assess(&unit.file.design, &unit.file.wishes);
    let (after, fault) = match respace(&unit.file, settings, &mut Unwatched) {
        Ok(None) => (before.clone(), None),
        Ok(Some(result)) => (result.report.end, None),
        Err(error) => (before.clone(), Some(error.to_string())),
    };
    TunedUnit {
        serial: unit.serial.clone(),
        merit_nothing_moved: before.merit.total,
        meets_nothing_moved: before.meets,
        merit: after.merit.total,
        meets: after.meets,
        states: states(&after),
        fault,
    }
}

fn states(assessment: &Assessment) -> Vec<TunedState> {
    let of = |state: &merit_function::assessment::StateAssessment| TunedState {
        name: state.name.clone(),
        spacings_mm: state.spacings_mm.clone(),
    };
    assessment.states.iter().map(of).collect()
}

/// What the batch comes to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub struct Totals {
    /// Units in the table.
    pub units: usize,
    /// Those that meet everything with the design's spacings.
    pub meet_nothing_moved: usize,
    /// Those that meet everything with their own.
    pub meet: usize,
    /// Those that could not be tuned.
    pub failed: usize,
}

impl Totals {
    /// Counts.
    #[must_use]
    pub fn of(units: &[TunedUnit]) -> Self {
        let count = |which: fn(&TunedUnit) -> bool| units.iter().filter(|unit| which(unit)).count();
        Self {
            units: units.len(),
            meet_nothing_moved: count(|unit| unit.meets_nothing_moved),
            meet: count(|unit| unit.meets),
            failed: count(|unit| unit.fault.is_some()),
        }
    }
}

/// The spacing tables of all units as one: a line a unit, a column a spacing, headed by its address,
/// so that a design can be given them again.
///
/// # Errors
/// The table cannot be laid out.
pub fn spacing_table(
    file: &DesignFile,
    units: &[TunedUnit],
) -> Result<Vec<u8>, Box<dyn std::error::Error + Send + Sync>> {
    let document = file.document().value();
    let mut table = csv::Writer::from_writer(Vec::new());
    let mut heads = vec![SERIAL_HEAD.to_owned(), "meets".to_owned(), "merit".to_owned()];
    for (k, state) in file.design.states.iter().enumerate() {
        for after in 0..state.spacings_mm.len() {
            let place = surface_model::place::Place::Spacing { state: k, after };
            heads.push(place.address().with_names(document).to_string());
        }
    }
    table.write_record(&heads)?;
    for unit in units {
        let meets = if unit.meets { "yes" } else { "no" };
        let merit = unit.merit.map_or_else(String::new, |merit| merit.to_string());
        let mut row = vec![unit.serial.clone(), meets.to_owned(), merit];
        let spacings = unit.states.iter().flat_map(|state| &state.spacings_mm);
        row.extend(
            spacings.map(|&mm| if unit.fault.is_some() { String::new() } else { mm.to_string() }),
        );
        table.write_record(&row)?;
    }
    Ok(table.into_inner().map_err(csv::IntoInnerError::into_error)?)
}
