//! `tolerance`: what a workshop's errors do to a design.

use driver::design_file::DesignFile;
use driver::tolerance::{Grade, ToleranceReport, ToleranceSettings, tolerance};
use report::text::tolerance::{Listed, told};
use report::tolerance_rows;

use crate::arguments::{GradeArgument, ToleranceArguments};
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input;
use crate::progress::{Counter, Manner, duration};
use crate::signals::StopSignal;

/// The word for re-adjusting nothing.
const NONE: &str = "none";

/// What is printed.
enum Form {
    Json,
    Csv,
    Text(Listed),
}

/// What is asked for.
struct Request {
    file: DesignFile,
    settings: ToleranceSettings,
    threads: Option<u16>,
    form: Form,
    require_percent: Option<f64>,
    progress: Manner,
}

impl Request {
    fn of(arguments: ToleranceArguments, console: &Console) -> Result<Self, Failure> {
        let every = duration("--progress-every", arguments.progress_every, 1.0)?;
        if let Some(percent) = arguments.require
            && !(0.0..=100.0).contains(&percent)
        {
            return Err(Failure::Argument {
                option: "--require",
                found: percent.to_string(),
                constraint: "a yield from 0 to 100 per cent",
            });
        }
        let settings = ToleranceSettings {
            systems: arguments.systems,
            seed: arguments.seed,
            grade: arguments.grade.map(|grade| match grade {
                GradeArgument::Ordinary => Grade::Ordinary,
                GradeArgument::Fine => Grade::Fine,
                GradeArgument::Finest => Grade::Finest,
            }),
            readjusted: match arguments.readjust.as_slice() {
                [] => None,
                words => Some(words.iter().filter(|&word| word != NONE).cloned().collect()),
            },
            balance_percent: arguments.wanted_yield,
        };
        Ok(Self {
            file: input::design(&arguments.design)?,
            settings,
            threads: arguments.threads,
            form: match (arguments.json, arguments.csv, arguments.all) {
                (true, _, _) => Form::Json,
                (_, true, _) => Form::Csv,
                (_, _, true) => Form::Text(Listed::All),
                _ => Form::Text(Listed::Worst),
            },
            require_percent: arguments.require,
            progress: Manner::of(arguments.progress, every, console),
        })
    }
}

pub(crate) fn run(arguments: ToleranceArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(arguments, console)?;
    let signals = StopSignal::listen().map_err(Failure::Signals)?;
    let report = work(&request, &signals, console)?;
    match request.form {
        Form::Json => console.print_json(&report)?,
        Form::Csv => {
            console.print_exactly(&tolerance_rows(&report).map_err(Failure::Rows)?)?;
        }
        Form::Text(listed) => console.print(&told(&request.file, &report, listed))?,
    }
    let short = |percent: f64| report.monte_carlo.yield_percent < percent;
    Ok(signals.status().unwrap_or(if request.require_percent.is_some_and(short) {
        ExitStatus::Missed
    } else {
        ExitStatus::Done
    }))
}

fn work(
    request: &Request,
    signals: &StopSignal,
    console: &Console,
) -> Result<ToleranceReport, Failure> {
    let threads = request.threads.map_or(0, usize::from);
    let pool =
        rayon::ThreadPoolBuilder::new().num_threads(threads).build().map_err(Failure::Threads)?;
    let mut counter = Counter::new("systems", request.progress, console, signals.flag());
    let report = pool.install(|| tolerance(&request.file, &request.settings, &mut counter));
    counter.finish();
    Ok(report?)
}
