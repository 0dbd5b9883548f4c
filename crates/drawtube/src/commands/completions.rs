//! `completions`: what a shell needs to complete our words.

use crate::arguments::{Arguments, CompletionsArguments};
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

pub(crate) fn run(
    arguments: CompletionsArguments,
    console: &Console,
) -> Result<ExitStatus, Failure> {
    let mut script = Vec::new();
    let mut grammar = Arguments::grammar();
    clap_complete::generate(arguments.shell, &mut grammar, "drawtube", &mut script);
    console.print_exactly(&String::from_utf8_lossy(&script))?;
    Ok(ExitStatus::Done)
}
