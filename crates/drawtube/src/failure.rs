//! What can go wrong, how it is told, and which exit status it has.

use std::io;
use std::path::PathBuf;

use driver::cam::CamError;
use driver::optimise::OptimiseError;
use driver::retune::RetuneError;
use driver::run::{RunError, ShareError};
use driver::solve::SettingsError;
use driver::temperature::AtTemperatureError;
use driver::tolerance::ToleranceError;
use driver::write_whole::WriteError;
use merit_function::movement::NoWay;
use report::RowsError;
use report::ray::RayError;
use report::start::Impossible;
use report::text::{WIDTH, paragraph};
use serde_json::{Value, json};
use surface_model::document::{Complaints, nearest, quoted, system_words};
use surface_model::glass::{GlassError, LookupError, SearchError};

use crate::exit_status::ExitStatus;
use crate::refusal::Refusal;

/// Why a command could not do what it was asked.
#[derive(Debug, thiserror::Error)]
pub(crate) enum Failure {
    /// Not a command line of this program.
    #[error(transparent)]
    CommandLine(Refusal),
    /// A value on the command line is out of range.
    #[error("{option}: {found}, but it must be {constraint}")]
    Argument {
        /// The option.
        option: &'static str,
        /// What was given.
        found: String,
        /// What would do.
        constraint: &'static str,
    },
    /// A setting is out of range.
    #[error(transparent)]
    Settings(#[from] SettingsError),
    /// The file cannot be opened.
    #[error("{label} cannot be opened: {}", system_words(.source))]
    Open {
        /// What the file is called.
        label: String,
        /// What the system says.
        source: io::Error,
    },
    /// The file is not what it should be.
    #[error("{0}")]
    Input(#[from] Complaints),
    /// There is no zoom state of this name.
    #[error("the design has no state {}", quoted(.asked))]
    NoState {
        /// The name asked for.
        asked: String,
        /// The names there are.
        names: Vec<String>,
    },
    /// The optimisation could not begin.
    #[error(transparent)]
    Optimise(#[from] OptimiseError),
    /// The tolerances could not be told.
    #[error(transparent)]
    Tolerance(#[from] ToleranceError),
    /// The design cannot be told at a temperature.
    #[error(transparent)]
    Temperature(#[from] AtTemperatureError),
    /// Nothing suits.
    #[error("nothing was found: {0}")]
    NothingFound(&'static str),
    /// A table could not be laid out.
    #[error("the table cannot be laid out: {0}")]
    Table(Box<dyn std::error::Error + Send + Sync>),
    /// No layout does what a brief asks.
    #[error("{}", .0.message)]
    Impossible(Impossible),
    /// There are not so many layouts.
    #[error("there is no layout {asked}: {found} differ enough to be told apart")]
    NoSuchRank {
        /// The rank asked for.
        asked: usize,
        /// How many layouts there are.
        found: usize,
    },
    /// The design has no movement curve.
    #[error(transparent)]
    Cam(#[from] CamError),
    /// The ray has no path.
    #[error(transparent)]
    Ray(#[from] RayError),
    /// No glass of this name.
    #[error(transparent)]
    Lookup(#[from] LookupError),
    /// A glass is not known there.
    #[error(transparent)]
    Glass(#[from] GlassError),
    /// A glass search that cannot be understood.
    #[error(transparent)]
    Search(#[from] SearchError),
    /// A run folder cannot be used.
    #[error(transparent)]
    Run(#[from] RunError),
    /// Not a part of a run.
    #[error("--part: {0}")]
    Part(#[from] ShareError),
    /// The job engine's variables do not say which part this is.
    #[error("--part auto: {0}")]
    NoPart(String),
    /// The journal of a run could not be written to its end.
    #[error("{} could not be written to its end: {}", .path.display(), system_words(.source))]
    Unsaved {
        /// The run folder.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
    /// A file cannot be written.
    #[error(transparent)]
    Write(#[from] WriteError),
    /// A folder cannot be made.
    #[error("the folder {} cannot be made: {}", .path.display(), system_words(.source))]
    Folder {
        /// Which.
        path: std::path::PathBuf,
        /// What the system says.
        source: io::Error,
    },
    /// Standard output takes nothing more.
    #[error("standard output cannot be written: {}", system_words(.0))]
    StandardOutput(io::Error),
    /// A result could not be made into a document.
    #[error("the result cannot be written as JSON: {0}")]
    Document(serde_json::Error),
    /// A result could not be made into rows.
    #[error("the result cannot be written as CSV: {0}")]
    Rows(RowsError),
    /// Threads cannot be started.
    #[error("threads cannot be started: {0}")]
    Threads(rayon::ThreadPoolBuildError),
    /// No method was run.
    #[error("no method was run")]
    NoStage,
    /// Signals cannot be listened to.
    #[error("signals cannot be listened to: {}", system_words(.0))]
    Signals(io::Error),
}

impl From<RetuneError> for Failure {
    fn from(error: RetuneError) -> Self {
        match error {
            RetuneError::Input(complaints) => Self::Input(complaints),
            RetuneError::Optimise(error) => Self::Optimise(error),
        }
    }
}

impl Failure {
    /// The exit status it leads to.
    pub(crate) fn status(&self) -> ExitStatus {
        match self {
            Self::CommandLine(_)
            | Self::Argument { .. }
            | Self::Settings(_)
            | Self::Open { .. }
            | Self::Input(_)
            | Self::NoState { .. }
            | Self::Lookup(_)
            | Self::Glass(_)
            | Self::Part(_)
            | Self::NoPart(_)
            | Self::Search(_) => ExitStatus::WrongInput,
            Self::Optimise(error) => status_of(error),
            Self::Run(error) => status_of_run(error),
            Self::Tolerance(
                ToleranceError::Nominal { .. }
                | ToleranceError::Overflow { .. }
                | ToleranceError::Spoilt { .. },
            ) => ExitStatus::Failed,
            Self::Tolerance(_) | Self::Temperature(AtTemperatureError::Temperature(_)) => {
                ExitStatus::WrongInput
            }
            Self::Temperature(_) => ExitStatus::Failed,
            Self::Cam(CamError::State { .. }) => ExitStatus::Failed,
            Self::Cam(_) => ExitStatus::WrongInput,
            Self::Ray(RayError::Glass(_) | RayError::Direction { .. }) => ExitStatus::WrongInput,
            Self::Impossible(_)
            | Self::NoSuchRank { .. }
            | Self::Ray(_)
            | Self::Document(_)
            | Self::Rows(_)
            | Self::Threads(_)
            | Self::NoStage
            | Self::NothingFound(_)
            | Self::Table(_)
            | Self::Signals(_) => ExitStatus::Failed,
            Self::Write(_)
            | Self::Folder { .. }
            | Self::Unsaved { .. }
            | Self::StandardOutput(_) => ExitStatus::CannotWrite,
        }
    }

    /// What to do about it.
    fn advice(&self) -> Option<String> {
        match self {
            Self::CommandLine(refusal) => refusal.advice.clone(),
            Self::NoState { asked, names } => {
                let all: Vec<&str> = names.iter().map(String::as_str).collect();
                Some(match nearest(asked, all.iter().copied()) {
                    Some(near) => surface_model::document::did_you_mean(near),
                    None => format!("its states are {}", all.join(", ")),
                })
            }
            Self::Cam(error) => advice_on_cam(error),
            Self::Optimise(error) => advice_on(error),
            Self::Run(error) => advice_on_run(error).map(str::to_owned),
            Self::NoPart(_) => {
                Some("give the part as I/N, or auto/N where only the index is known".to_owned())
            }
            Self::Tolerance(error) => advice_on_tolerances(error),
            Self::Temperature(AtTemperatureError::Temperature(error)) => error.advice(),
            Self::Impossible(impossible) => Some(impossible.advice.clone()),
            Self::Lookup(error) => error.advice(),
            Self::Glass(error) | Self::Ray(RayError::Glass(error)) => error.advice(),
            Self::Search(error) => error.advice(),
            Self::Write(WriteError::NoFolder { .. }) => {
                Some("make the folder first, or choose another place".to_owned())
            }
            Self::Write(WriteError::Exists(_)) => {
                Some("give --force to replace it, or choose another name".to_owned())
            }
            _ => None,
        }
    }

    /// For people.
    pub(crate) fn text(&self) -> String {
        if let Self::Input(complaints) = self {
            return complaints.to_string();
        }
        if let Self::Impossible(impossible) = self {
            return told_at_length(impossible);
        }
        match self.advice() {
            Some(advice) => format!("drawtube: {self}\n  {advice}"),
            None => format!("drawtube: {self}"),
        }
    }

    /// For machines: `drawtube-error/1`.
    pub(crate) fn document(&self) -> Value {
        let mut document = json!({
            "format": "drawtube-error/1",
            "status": self.status() as u8,
            "message": self.to_string(),
            "advice": self.advice(),
        });
        if let (Self::Input(complaints), Value::Object(map)) = (self, &mut document)
            && let Value::Object(list) = complaints.to_json()
        {
            let told = match complaints.count() {
                1 => "the document has a problem".to_owned(),
                count => format!("the document has {count} problems"),
            };
            map.insert("message".to_owned(), told.into());
            map.extend(list);
        }
        document
    }
}

/// A failure of many words, in lines that fit a terminal.
fn told_at_length(impossible: &Impossible) -> String {
    let message = paragraph(&format!("drawtube: {}", impossible.message), WIDTH, "");
    let advice = impossible.advice.lines();
    let advice = advice.map(|line| paragraph(&format!("  {}", line.trim()), WIDTH, "    "));
    std::iter::once(message).chain(advice).collect::<Vec<_>>().join("\n")
}

fn status_of(error: &OptimiseError) -> ExitStatus {
    match error {
        OptimiseError::NoGoals
        | OptimiseError::NothingFree
        | OptimiseError::Variables(_)
        | OptimiseError::Glass(_)
        | OptimiseError::Temperature(_) => ExitStatus::WrongInput,
        _ => ExitStatus::Failed,
    }
}

fn advice_on_tolerances(error: &ToleranceError) -> Option<String> {
    let advice = match error {
        ToleranceError::NothingRequired => {
            "add \"goals\" to the file, or \"require\" to its \"tolerances\""
        }
        ToleranceError::Readjusted(_) => {
            "give \"spacings\", an address such as \"/states/*/spacings_mm/1\", or \"none\""
        }
        ToleranceError::Nominal { .. } => "assess tells where rays fail",
        ToleranceError::Spoilt { .. } => {
            "tighten that tolerance, or make the surfaces wider than the beam"
        }
        _ => return None,
    };
    Some(advice.to_owned())
}

fn status_of_run(error: &RunError) -> ExitStatus {
    match error {
        RunError::InUse { .. } => ExitStatus::InUse,
        RunError::NotARun { .. }
        | RunError::AnotherRun { .. }
        | RunError::Newer { .. }
        | RunError::Damaged { .. } => ExitStatus::Damaged,
        RunError::System { .. } | RunError::Write(_) => ExitStatus::CannotWrite,
        _ => ExitStatus::Failed,
    }
}

fn advice_on_run(error: &RunError) -> Option<&'static str> {
    match error {
        RunError::InUse { .. } => Some("wait for it, stop it, or look at it with --show"),
        RunError::NotARun { path, .. } if !path.exists() => {
            Some("name the folder that --run was given")
        }
        RunError::NotARun { .. } => Some("name a run folder, or one that is new or empty"),
        RunError::AnotherRun { .. } => {
            Some("go on with what was asked there, or name another folder")
        }
        RunError::BrokenOff { .. } => Some(
            "what is finished is kept there; please send its asked.json and run.json to whoever \
             makes the program",
        ),
        RunError::Damaged { path, .. } if path.ends_with("journal.jsonl") => Some(
            "take the damaged line out of the file (keep a copy): what it held is computed again",
        ),
        _ => None,
    }
}

fn advice_on(error: &OptimiseError) -> Option<String> {
    let advice = match error {
        OptimiseError::NoGoals => "add \"goals\" to the file, such as wavefront_rms_waves",
        OptimiseError::NothingFree => {
            "name what may change under \"free\", or take something out of \"held\""
        }
        OptimiseError::Start(_) => {
            "begin with weaker curves or a narrower beam (traced_to); assess tells where rays fail"
        }
        OptimiseError::Glass(error) => return error.advice(),
        OptimiseError::Temperature(error) => return error.advice(),
        _ => return None,
    };
    Some(advice.to_owned())
}

fn advice_on_cam(error: &CamError) -> Option<String> {
    let advice = match error {
        CamError::NothingMoves => "take a group out of the housing's \"fixed\"",
        CamError::Way(NoWay::OneRatio) => "give at least two states with different ratios",
        CamError::State { .. } => "optimise the design first; assess tells how far off it is",
        CamError::Glass(error) => return error.advice(),
        _ => return None,
    };
    Some(advice.to_owned())
}
