//! What must hold of anything that came back different: changes, parts that are made, tables of
//! lenses as built, lists of tools.
//!
//! An input is lines as on the command line: `--change ADDRESS=VALUE`, `--made PART`,
//! `--equivalents GLASS`; all below a line `--batch` or `--tool-radii` is that table; a line that
//! is the name of a shipped design chooses it.

use driver::change::Change;
use driver::design_file::DesignFile;
use driver::retune::batch::{spacing_table, tune, units};
use driver::retune::equivalents::replacements;
use driver::retune::table::Table;
use driver::retune::tool_radii::{Tools, move_to_tools};
use driver::retune::{RetuneError, prepare, retune};
use driver::solve::{Settings, Unwatched};
use report::text;
use surface_model::document::{Complaints, Document};

use super::shipped::DESIGNS;
use super::verdict::{complaint, finite, printed, quiet};

/// Steps of each optimisation.
const ITERATIONS: u64 = 3;
/// Lines of a table that are optimised.
const LINES: usize = 4;

/// What is asked for.
#[derive(Default)]
struct Asked {
    design: usize,
    changes: Vec<String>,
    made: Vec<String>,
    glass: Option<String>,
    table: Option<(bool, Vec<u8>)>,
}

impl Asked {
    fn of(bytes: &[u8]) -> Self {
        let mut asked = Self::default();
        let mut rest = bytes;
        while !rest.is_empty() {
            let end = rest.iter().position(|&byte| byte == b'\n').unwrap_or(rest.len());
            let line = String::from_utf8_lossy(&rest[..end]).into_owned();
            rest = rest.get(end + 1..).unwrap_or_default();
            let named = DESIGNS.iter().position(|(name, _)| *name == line);
            asked.design = named.unwrap_or(asked.design);
            if let Some(change) = line.strip_prefix("--change ") {
                asked.changes.push(change.to_owned());
            } else if let Some(part) = line.strip_prefix("--made ") {
                asked.made.push(part.to_owned());
            } else if let Some(glass) = line.strip_prefix("--equivalents ") {
                asked.glass = Some(glass.to_owned());
            } else if line == "--batch" || line == "--tool-radii" {
                asked.table = Some((line == "--batch", rest.to_vec()));
                break;
            }
        }
        asked
    }
}

/// Retunes as asked; whether everything could be done.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(bytes: &[u8]) -> Result<bool, String> {
    let asked = Asked::of(bytes);
    let text = DESIGNS[asked.design].1;
    let file = Document::parse("design.json", text.as_bytes()).and_then(DesignFile::read);
    let file = file.map_err(|complaints| complaints.to_string())?;
    let changes =
        asked.changes.iter().map(|text| Change::read("--change", text, file.document().value()));
    let changes: Vec<Change> = match changes.collect::<Result<_, _>>() {
        Ok(changes) => changes,
        Err(complaints) => return refused(&complaints),
    };
    let settings =
        Settings::default().with_max_iterations(ITERATIONS).map_err(|error| error.to_string())?;
    match (&asked.table, &asked.glass) {
        (Some((true, table)), _) => batch(&file, &changes, table, &settings),
        (Some((false, table)), _) => tools(&file, &changes, table, &settings),
        (None, Some(glass)) => {
            let prepared = prepare(&file, &changes, &asked.made);
            let (changed, made) = match prepared {
                Ok(prepared) => prepared,
                Err(complaints) => return refused(&complaints),
            };
            match replacements(&changed.file, &made, glass, 2, &settings) {
                Ok(found) => {
                    for other in &found {
                        let [a, b, c] =
                            [other.merit_nothing_moved, other.merit_spacings, other.merit_unmade];
                        finite("a replacement", &(a, b, c, &other.file.design))?;
                    }
                    printed("them", &text::retune_lists::replacements(glass, &found))?;
                    Ok(true)
                }
                Err(error) => failed(&error),
            }
        }
        (None, None) => match retune(&file, &changes, &asked.made, &settings, &mut Unwatched) {
            Ok(retuning) => {
                // Of the file's own wishes, those without an end are infinite.
                for stage in &retuning.stages {
                    finite("a stage", &(&stage.file.design, &stage.assessment, &stage.solver))?;
                }
                finite("the blame", &(&retuning.blame, &retuning.taken_up))?;
                printed("the retuning", &text::retune::retuning(&file, &retuning))?;
                Ok(true)
            }
            Err(error) => failed(&error),
        },
    }
}

fn batch(
    file: &DesignFile,
    changes: &[Change],
    table: &[u8],
    settings: &Settings,
) -> Result<bool, String> {
    let changed = match prepare(file, changes, &[]) {
        Ok((changed, _)) => changed.file,
        Err(complaints) => return refused(&complaints),
    };
    let read = Table::read("units.csv", table).and_then(|table| units(&changed, &table));
    let units = match read {
        Ok(units) => units,
        Err(complaints) => return refused(&complaints),
    };
    let tuned = tune(&units[..units.len().min(LINES)], settings);
    finite("the units", &tuned)?;
    printed("the units", &text::retune_lists::batch(&changed, &tuned))?;
    spacing_table(file, &tuned).map_err(|error| error.to_string())?;
    Ok(true)
}

fn tools(
    file: &DesignFile,
    changes: &[Change],
    table: &[u8],
    settings: &Settings,
) -> Result<bool, String> {
    let tools = match Table::read("tools.csv", table).and_then(|table| Tools::of(&table)) {
        Ok(tools) => tools,
        Err(complaints) => return refused(&complaints),
    };
    let mut changed = match prepare(file, changes, &[]) {
        Ok((changed, _)) => changed.file,
        Err(complaints) => return refused(&complaints),
    };
    // Two places are enough to judge by, and moved in no time.
    changed.free.truncate(2);
    match move_to_tools(&changed, &tools, settings) {
        Ok(done) => {
            finite("the tools", &(&done.moves, done.merit_before, &done.file.design))?;
            printed("the tools", &text::retune_lists::tool_radii(&done))?;
            Ok(true)
        }
        Err(error) => failed(&error),
    }
}

fn refused(complaints: &Complaints) -> Result<bool, String> {
    complaint(complaints).map(|()| false)
}

fn failed(error: &RetuneError) -> Result<bool, String> {
    match error {
        RetuneError::Input(complaints) => refused(complaints),
        RetuneError::Optimise(error) => quiet(&error.to_string()).map(|()| false),
    }
}
