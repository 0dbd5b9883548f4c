//! `man`: the manual page, from the command line's own grammar.

use clap_mangen::Man;

use crate::arguments::{Arguments, ManArguments};
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

pub(crate) fn run(arguments: &ManArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let program = Arguments::grammar();
    let grammar = match &arguments.command {
        None => program,
        Some(name) => {
            let found = program.get_subcommands().find(|command| command.get_name() == name);
            let Some(command) = found else {
                return Err(Failure::Argument {
                    option: "COMMAND",
                    found: format!("{name:?}"),
                    constraint: "one of the commands that `drawtube --help` lists",
                });
            };
            command.clone().bin_name(format!("drawtube {name}"))
        }
    };
    let mut page = Vec::new();
    Man::new(grammar).render(&mut page).map_err(Failure::StandardOutput)?;
    console.print_bytes(&page)?;
    Ok(ExitStatus::Done)
}
