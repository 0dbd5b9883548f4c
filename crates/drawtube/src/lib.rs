//! The command line of drawtube, thin: arguments in, results on standard output, everything else
//! on standard error, and an exit status that says how it went.
//!
//! A command takes its typed arguments (`arguments/`), turns them into a request in which nothing
//! contradicts itself, lets the crates below do the work, and prints. What goes wrong is a
//! `Failure`, told in one place. Start reading at [`main`], then `commands/optimise.rs`.

mod arguments;
mod colour;
mod commands;
mod console;
mod destination;
pub mod exit_status;
mod failure;
mod input;
mod output_file;
mod part;
mod progress;
mod progress_line;
mod refusal;
mod run_progress;
mod run_request;
mod signals;
mod told;

use std::process::ExitCode;

use arguments::{Arguments, Command};
use console::Console;
use exit_status::ExitStatus;

/// Runs the program on the arguments it was called with.
#[must_use]
pub fn main() -> ExitCode {
    let status = match Arguments::read(std::env::args_os()) {
        Ok(arguments) => run(arguments),
        Err(refused) => refused.tell(),
    };
    status.into()
}

fn run(arguments: Arguments) -> ExitStatus {
    let console = Console::new(arguments.errors);
    let result = match arguments.command {
        Command::Assess(arguments) => commands::assess::run(arguments, &console),
        Command::Optimise(arguments) => commands::optimise::run(arguments, &console),
        Command::Tolerance(arguments) => commands::tolerance::run(arguments, &console),
        Command::Retune(arguments) => commands::retune::run(arguments, &console),
        Command::Start(arguments) => commands::start::run(arguments, &console),
        Command::Cam(arguments) => commands::cam::run(arguments, &console),
        Command::Report(arguments) => commands::report::run(arguments, &console),
        Command::Overnight(arguments) => commands::overnight::run(arguments, &console),
        Command::Gather(arguments) => commands::gather::run(&arguments, &console),
        Command::Sweep(arguments) => commands::sweep::run(arguments, &console),
        Command::Trace(arguments) => commands::trace::run(arguments, &console),
        Command::Glass(arguments) => commands::glass::run(arguments, &console),
        Command::Schema(arguments) => commands::schema::run(arguments, &console),
        Command::Man(arguments) => commands::man::run(&arguments, &console),
        Command::Completions(arguments) => commands::completions::run(arguments, &console),
    };
    result.unwrap_or_else(|failure| console.fail(&failure))
}
