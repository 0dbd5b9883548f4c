//! `schema`: the JSON Schema of the documents the program reads.

use driver::brief::brief_schema;
use driver::design_file::design_schema;
use driver::sweep::plan_schema;

use crate::arguments::{DocumentKind, SchemaArguments};
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

pub(crate) fn run(arguments: SchemaArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let schema = match arguments.kind {
        DocumentKind::Design => design_schema(),
        DocumentKind::Plan => plan_schema(),
        DocumentKind::Brief => brief_schema(),
    };
    console.print_json(&schema)?;
    Ok(ExitStatus::Done)
}
