//! What `optimise` is asked for, with everything decided.

use driver::design_file::DesignFile;
use driver::solve::{Method, Settings};

use crate::arguments::{MethodArgument, OptimiseArguments, ProgressArgument};
use crate::console::Console;
use crate::destination::Destination;
use crate::failure::Failure;
use crate::input;
use crate::output_file::OutputFile;
use crate::progress::{Manner, duration};
use crate::told::Told;

/// What is asked for.
pub(super) struct Request {
    pub(super) file: DesignFile,
    /// One or more methods with their settings, in order.
    pub(super) stages: Vec<Settings>,
    pub(super) destination: Destination,
    pub(super) picture: Option<OutputFile>,
    pub(super) told: Told,
    pub(super) progress: Manner,
    pub(super) require: bool,
}

impl Request {
    pub(super) fn of(arguments: OptimiseArguments, console: &Console) -> Result<Self, Failure> {
        let every = duration("--progress-every", arguments.progress_every, 1.0)?;
        let stages = stages(&arguments)?;
        let (quiet, force) = (arguments.quiet, arguments.force);
        let picture = arguments.picture.map(|path| OutputFile::picture(path, force));
        Ok(Self {
            file: input::design(&arguments.design)?,
            stages,
            picture: picture.transpose()?,
            destination: Destination::of(arguments.output, arguments.force),
            told: Told::of(quiet, arguments.json),
            progress: Manner::of(
                if quiet { ProgressArgument::None } else { arguments.progress },
                every,
                console,
            ),
            require: arguments.require,
        })
    }
}

fn stages(arguments: &OptimiseArguments) -> Result<Vec<Settings>, Failure> {
    let methods = std::iter::once(arguments.method).chain(arguments.then.iter().copied());
    methods
        .map(|method| {
            let mut settings = Settings::new(match method {
                MethodArgument::LeastSquares => Method::DampedLeastSquares,
                MethodArgument::NelderMead => Method::NelderMead,
            });
            if let Some(iterations) = arguments.iterations {
                settings = settings.with_max_iterations(iterations)?;
            }
            if let Some(target) = arguments.target_merit {
                settings = settings.with_target(target)?;
            }
            Ok(settings)
        })
        .collect()
}
