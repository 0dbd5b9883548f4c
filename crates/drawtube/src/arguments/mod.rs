//! The command line as it is typed: typed values, nothing opened, nothing decided. Each command
//! turns its part into a request of its own.

mod assess;
mod cam;
mod completions;
mod gather;
mod glass;
mod man;
mod optimise;
mod overnight;
mod progress;
mod report;
mod retune;
mod run;
mod schema;
mod start;
mod sweep;
mod tolerance;
mod trace;

use std::ffi::OsString;

use clap::error::ErrorKind;
use clap::{CommandFactory, Parser, Subcommand};

pub(crate) use assess::AssessArguments;
pub(crate) use cam::CamArguments;
pub(crate) use completions::CompletionsArguments;
pub(crate) use gather::GatherArguments;
pub(crate) use glass::GlassArguments;
pub(crate) use man::ManArguments;
pub(crate) use optimise::{MethodArgument, OptimiseArguments};
pub(crate) use overnight::{OvernightArguments, StrategyArgument};
pub(crate) use progress::ProgressArgument;
pub(crate) use report::ReportArguments;
pub(crate) use retune::RetuneArguments;
pub(crate) use run::RunArguments;
pub(crate) use schema::{DocumentKind, SchemaArguments};
pub(crate) use start::StartArguments;
pub(crate) use sweep::SweepArguments;
pub(crate) use tolerance::{GradeArgument, ToleranceArguments};
pub(crate) use trace::TraceArguments;

use crate::console::{Console, ErrorFormat};
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::refusal::Refusal;

/// Design zoom laser-beam expanders: lens groups that slide in a tube of fixed length.
///
/// Results go to standard output, progress and messages to standard error. DESIGN is a file, or
/// "-" for standard input.
#[derive(Debug, Parser)]
#[command(
    name = "drawtube",
    bin_name = "drawtube",
    version,
    max_term_width = 80,
    arg_required_else_help = true,
    disable_help_subcommand = true,
    after_help = STATUSES
)]
pub(crate) struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub(crate) command: Command,
    /// How errors are told on standard error.
    #[arg(
        long,
        global = true,
        value_enum,
        default_value_t,
        value_name = "FORM",
        help_heading = "Everywhere"
    )]
    pub(crate) errors: ErrorFormat,
}

const STATUSES: &str = "\
Exit status:
    0  done
    1  the work failed: a ray does not get through, nothing was found
    2  the input or the command line is wrong
    3  done, but a goal or limit is missed (only with --require), or parts of a
       run are missing
    4  gather: no start is finished, so there is nothing to do
    5  the run folder is in use by another process
    6  the run folder is damaged, or of another file, seed or version
    7  the result cannot be written
   75  stopped by --time-limit; run again, it goes on
  130  stopped by Ctrl-C, the best so far saved; 143 the same by SIGTERM

Example:
  drawtube assess configs/river-lidar-2x-6x.json";

/// What the program can do.
#[derive(Debug, Subcommand)]
pub(crate) enum Command {
    /// Begin: work out layouts that can do what a brief asks, and rank them
    Start(StartArguments),
    /// Tell every zoom state's numbers and every limit of a design
    Assess(AssessArguments),
    /// Improve a design: move what is free until the goals are met as well as they can be
    Optimise(OptimiseArguments),
    /// Search for designs for hours, in a run folder that survives anything
    Overnight(OvernightArguments),
    /// Optimise a design or brief at every point of a grid or sample
    Sweep(SweepArguments),
    /// After a change, move only what can still move, in stages
    Retune(RetuneArguments),
    /// Work out the movement curves: where every group stands at any ratio
    Cam(CamArguments),
    /// Tell what a workshop's errors do to a design, and the yield
    Tolerance(ToleranceArguments),
    /// Write a page about a design, or about several side by side; sheets for the shop
    Report(ReportArguments),
    /// Follow one exact ray through a design, surface by surface
    Trace(TraceArguments),
    /// Look through the glass catalogue, or find equivalents of a glass
    Glass(GlassArguments),
    /// Put the parts of an overnight run or a sweep together
    Gather(GatherArguments),
    /// Print the JSON Schema of a kind of document
    Schema(SchemaArguments),
    /// Print the manual page, of the program or of one command
    Man(ManArguments),
    /// Print the completions for a shell
    Completions(CompletionsArguments),
}

/// A command line that was not taken, or that asked for help.
pub(crate) struct Refused {
    error: clap::Error,
    errors: ErrorFormat,
    /// The command that was named.
    command: Option<String>,
}

impl Arguments {
    /// Reads a command line.
    pub(crate) fn read(words: impl IntoIterator<Item = OsString>) -> Result<Self, Refused> {
        let words: Vec<OsString> = words.into_iter().collect();
        Self::try_parse_from(&words).map_err(|error| Refused {
            error,
            errors: errors_asked(&words),
            command: command_asked(&words),
        })
    }

    /// The command line as the shell completions need it.
    pub(crate) fn grammar() -> clap::Command {
        Self::command()
    }
}

/// How errors are to be told on a command line that could not be taken as a whole.
fn errors_asked(words: &[OsString]) -> ErrorFormat {
    let spaced = words.windows(2).any(|pair| pair[0] == "--errors" && pair[1] == "json");
    let joined = words.iter().any(|word| word == "--errors=json");
    if spaced || joined { ErrorFormat::Json } else { ErrorFormat::Text }
}

/// The command that is named on a command line that could not be taken as a whole.
fn command_asked(words: &[OsString]) -> Option<String> {
    let grammar = Arguments::grammar();
    let mut words = words.iter().skip(1).filter_map(|word| word.to_str());
    words.find(|word| grammar.find_subcommand(word).is_some()).map(str::to_owned)
}

impl Refused {
    /// Prints the help that was asked for, or what is wrong.
    pub(crate) fn tell(self) -> ExitStatus {
        let Self { error, errors, command } = self;
        let console = Console::new(errors);
        match error.kind() {
            ErrorKind::DisplayHelp | ErrorKind::DisplayVersion => {
                console.print_help(&error.render());
                ExitStatus::Done
            }
            ErrorKind::DisplayHelpOnMissingArgumentOrSubcommand => {
                console.say_help(&error.render());
                ExitStatus::WrongInput
            }
            _ => {
                let refusal = Refusal::of(&error, command.as_deref());
                console.fail(&Failure::CommandLine(refusal))
            }
        }
    }
}
