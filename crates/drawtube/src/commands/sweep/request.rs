//! What `sweep` is asked for, with everything decided.

use std::path::{Path, PathBuf};

use driver::run::{Ask, Budget};
use driver::sweep::{PlanFile, Sweep, ask};

use crate::arguments::SweepArguments;
use crate::console::Console;
use crate::failure::Failure;
use crate::input::{self, STANDARD_STREAM};
use crate::output_file::OutputFile;
use crate::run_request::RunRequest;

/// Where and what is run.
pub(super) struct Run {
    pub(super) path: PathBuf,
    pub(super) ask: Ask,
    pub(super) budget: Budget,
}

/// What is asked for.
pub(super) struct Request {
    pub(super) sweep: Sweep,
    /// None if the points are only to be listed.
    pub(super) run: Option<Run>,
    /// How it is run and told.
    pub(super) run_as: RunRequest,
    pub(super) picture: Option<OutputFile>,
    pub(super) require: bool,
}

impl Request {
    pub(super) fn of(arguments: SweepArguments, console: &Console) -> Result<Self, Failure> {
        let run_as = RunRequest::of(&arguments.run_as, arguments.json, console)?;
        let (share, session_time) = (run_as.share, run_as.session_time);
        let plan_file = PlanFile::read(input::document(&arguments.plan)?)?;
        let named = beside(&arguments.plan, plan_file.subject_name());
        let subject = plan_file.read_subject(input::document(&named)?)?;
        let plan = plan_file.resolve(&subject)?;
        let units = Some(plan.points.len() as u64);
        let run = arguments.run.map(|path| Run {
            path,
            ask: ask(&plan_file, &subject, share),
            budget: Budget { units, session_time, ..Budget::default() },
        });
        let picture = arguments.picture.map(|path| OutputFile::picture(path, arguments.force));
        Ok(Self {
            sweep: Sweep::new(plan, subject, share.of()),
            run,
            run_as,
            picture: picture.transpose()?,
            require: arguments.require,
        })
    }
}

/// A file that a plan names, seen from the plan's folder.
fn beside(plan: &Path, name: &str) -> PathBuf {
    match plan.parent() {
        Some(folder) if plan.as_os_str() != STANDARD_STREAM => folder.join(name),
        _ => PathBuf::from(name),
    }
}
