//! The command line as it is typed: typed values, nothing opened, nothing decided. Each command
//! turns its part into a request of its own.

use std::ffi::OsString;
use std::path::PathBuf;

use clap::error::ErrorKind;
use clap::{Args, CommandFactory, Parser, Subcommand, ValueEnum};

use crate::console::{Console, ErrorFormat};
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

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
    3  done, but a goal or limit is missed (only with --require)
    7  the result cannot be written
  130  stopped by Ctrl-C, the best so far saved; 143 the same by SIGTERM

Example:
  drawtube assess configs/river-lidar-2x-6x.json";

/// What the program can do.
#[derive(Debug, Subcommand)]
pub(crate) enum Command {
    /// Tell every zoom state's numbers and every limit of a design
    Assess(AssessArguments),
    /// Improve a design: move what is free until the goals are met as well as they can be
    Optimise(OptimiseArguments),
    /// Follow one exact ray through a design, surface by surface
    Trace(TraceArguments),
    /// Look through the glass catalogue, or find equivalents of a glass
    Glass(GlassArguments),
    /// Print the JSON Schema of a kind of document
    Schema(SchemaArguments),
    /// Print the completions for a shell
    Completions(CompletionsArguments),
}

/// Tell every zoom state's numbers and every limit of a design.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube assess configs/river-lidar-2x-6x.json")]
pub(crate) struct AssessArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Print the assessment as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// List every limited quantity, not only the tightest of each kind and those crossed
    #[arg(long, conflicts_with = "json")]
    pub(crate) all: bool,
    /// Leave with status 3 if a goal is missed or a limit crossed
    #[arg(long)]
    pub(crate) require: bool,
}

/// Improve a design: move what is free until the goals are met as well as they can be.
///
/// The search is local: it goes downhill from the design as it is. It is serial and draws no
/// random numbers: the same file gives the same design, bit for bit.
#[derive(Debug, Args)]
#[command(after_help = "\
The first Ctrl-C finishes the step, saves the best so far where -o says, and
prints the summary; the second leaves at once.

Example:
  drawtube optimise configs/river-lidar-2x-6x.json -o better.json")]
pub(crate) struct OptimiseArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Where the optimised design goes; "-" is standard output, the summary then goes to standard
    /// error
    #[arg(short, long, value_name = "OUT")]
    pub(crate) output: Option<PathBuf>,
    /// Replace OUT if it is there already
    #[arg(long, requires = "output")]
    pub(crate) force: bool,
    /// Print the summary as JSON
    #[arg(long)]
    pub(crate) json: bool,
    /// How to go downhill
    #[arg(long, value_enum, default_value_t)]
    pub(crate) method: MethodArgument,
    /// Go on with this method where the one before stopped; may be repeated
    #[arg(long, value_enum, value_name = "METHOD")]
    pub(crate) then: Vec<MethodArgument>,
    /// Most iterations of each method [default: 1000 for least-squares, 20000 for nelder-mead]
    #[arg(long, value_name = "N")]
    pub(crate) iterations: Option<u64>,
    /// Stop as soon as the merit is this small and every limit is kept
    #[arg(long, value_name = "X", allow_negative_numbers = true)]
    pub(crate) target_merit: Option<f64>,
    /// Leave with status 3 if a goal is missed or a limit crossed at the end
    #[arg(long)]
    pub(crate) require: bool,
    /// Print no summary and no progress, only errors
    #[arg(short, long, conflicts_with = "json")]
    pub(crate) quiet: bool,
    /// How progress is told on standard error
    #[arg(long, value_enum, default_value_t, env = "DRAWTUBE_PROGRESS", value_name = "FORM")]
    pub(crate) progress: ProgressArgument,
    /// Least time between two plain lines of progress
    #[arg(long, value_name = "SECONDS", default_value_t = 10.0, allow_negative_numbers = true)]
    pub(crate) progress_every: f64,
}

/// A method by its name.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum MethodArgument {
    /// Damped least squares with exact derivatives
    #[default]
    LeastSquares,
    /// The simplex of Nelder and Mead: no derivatives, far slower
    NelderMead,
}

/// How progress is told.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum ProgressArgument {
    /// A bar on a terminal, plain lines elsewhere
    #[default]
    Auto,
    /// One line that is redrawn (on a terminal only)
    Bar,
    /// A line now and then
    Plain,
    /// Nothing
    None,
}

/// Follow one exact ray through a design, surface by surface.
///
/// The ray starts in the plane through the first vertex, parallel to the axis unless told
/// otherwise.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube trace configs/river-lidar-2x-6x.json --state 6x --height-mm 1.2")]
pub(crate) struct TraceArguments {
    /// The design; "-" is standard input
    pub(crate) design: PathBuf,
    /// Name of the zoom state
    #[arg(long)]
    pub(crate) state: String,
    /// Height of the ray at entry, y
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    pub(crate) height_mm: f64,
    /// Place of the ray at entry across the height, x
    #[arg(long, value_name = "MM", default_value_t = 0.0, allow_negative_numbers = true)]
    pub(crate) x_mm: f64,
    /// Angle to the axis in y, positive when the height grows
    #[arg(long, value_name = "MRAD", default_value_t = 0.0, allow_negative_numbers = true)]
    pub(crate) angle_mrad: f64,
    /// Angle to the axis in x
    #[arg(long, value_name = "MRAD", default_value_t = 0.0, allow_negative_numbers = true)]
    pub(crate) angle_x_mrad: f64,
    /// Wavelength in air [default: the state's first]
    #[arg(long, value_name = "NM", allow_negative_numbers = true)]
    pub(crate) wavelength_nm: Option<f64>,
    /// Print the ray as JSON
    #[arg(long)]
    pub(crate) json: bool,
}

/// Look through the glass catalogue, or find equivalents of a glass.
///
/// A word is looked for in name, maker, six-digit code and status. nd=1.7..1.8, vd=..30 ask for a
/// range, nd=1.5168 and vd=64.2 for a value within 0.0005 and 0.2, "nd>1.7" and "vd<30" for one
/// side. Status 1 if nothing is found.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  drawtube glass schott nd=1.7..1.8 vd=..30 --at-nm 532
  drawtube glass --nearest N-BK7 --at-nm 532 --at-nm 1064")]
pub(crate) struct GlassArguments {
    /// Words that must all suit; all glasses if there is none
    #[arg(value_name = "WORDS", conflicts_with = "nearest")]
    pub(crate) words: Vec<String>,
    /// List the glasses nearest to this one in index, at the wavelengths of --at-nm or else at the
    /// d, F and C lines
    #[arg(long, value_name = "GLASS")]
    pub(crate) nearest: Option<String>,
    /// How many of the nearest are listed
    #[arg(long, value_name = "N", default_value_t = 10, requires = "nearest")]
    pub(crate) most: usize,
    /// Add a column with the index at this wavelength; may be repeated
    #[arg(long, value_name = "NM", allow_negative_numbers = true)]
    pub(crate) at_nm: Vec<f64>,
    /// Print the glasses as JSON
    #[arg(long)]
    pub(crate) json: bool,
}

/// Print the JSON Schema of a kind of document.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube schema design > drawtube.schema.json")]
pub(crate) struct SchemaArguments {
    /// Which kind
    #[arg(value_enum)]
    pub(crate) kind: DocumentKind,
}

/// Kinds of document the program reads.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(crate) enum DocumentKind {
    /// A design file
    Design,
}

/// Print the completions for a shell.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube completions fish > ~/.config/fish/completions/drawtube.fish")]
pub(crate) struct CompletionsArguments {
    /// Which shell
    #[arg(value_enum)]
    pub(crate) shell: clap_complete::Shell,
}

/// A command line that was not taken, or that asked for help.
pub(crate) struct Refused {
    error: clap::Error,
    errors: ErrorFormat,
}

impl Arguments {
    /// Reads a command line.
    pub(crate) fn read(words: impl IntoIterator<Item = OsString>) -> Result<Self, Refused> {
        let words: Vec<OsString> = words.into_iter().collect();
        Self::try_parse_from(&words)
            .map_err(|error| Refused { error, errors: errors_asked(&words) })
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

impl Refused {
    /// Prints the help that was asked for, or what is wrong.
    pub(crate) fn tell(self) -> ExitStatus {
        let Self { error, errors } = self;
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
            _ if errors == ErrorFormat::Json => console.fail(&Failure::CommandLine(error)),
            _ => {
                console.say_help(&error.render());
                ExitStatus::WrongInput
            }
        }
    }
}
