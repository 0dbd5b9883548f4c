//! What `retune` is asked for, with everything decided.

use driver::change::Change;
use driver::design_file::DesignFile;
use driver::retune::table::Table;
use driver::retune::tool_radii::Tools;

use crate::arguments::RetuneArguments;
use crate::destination::Destination;
use crate::failure::Failure;
use crate::input;

/// What is done with the changed design.
pub(super) enum Task {
    Stages,
    Equivalents { glass: String, most: usize },
    ToolRadii(Tools),
    Batch(Table),
}

/// What is asked for.
pub(super) struct Request {
    pub(super) file: DesignFile,
    pub(super) changes: Vec<Change>,
    pub(super) made: Vec<String>,
    pub(super) task: Task,
    pub(super) destination: Destination,
    pub(super) json: bool,
    pub(super) require: bool,
}

impl Request {
    pub(super) fn of(arguments: RetuneArguments) -> Result<Self, Failure> {
        let RetuneArguments { equivalents, most, tool_radii, batch, .. } = arguments;
        if most == 0 {
            return Err(Failure::Argument {
                option: "--most",
                found: "0".to_owned(),
                constraint: "at least 1",
            });
        }
        let file = input::design(&arguments.design)?;
        let document = file.document().value();
        let changes = arguments.change.iter();
        let changes = changes.map(|text| Change::read("--change", text, document));
        let changes = changes.collect::<Result<_, _>>()?;
        let task = match (equivalents, tool_radii, batch) {
            (Some(glass), ..) => Task::Equivalents { glass, most },
            (_, Some(list), _) => Task::ToolRadii(Tools::of(&input::table(&list)?)?),
            (.., Some(units)) => Task::Batch(input::table(&units)?),
            _ => Task::Stages,
        };
        Ok(Self {
            file,
            changes,
            made: arguments.made,
            task,
            destination: Destination::of(arguments.output, arguments.force),
            json: arguments.json,
            require: arguments.require,
        })
    }
}
