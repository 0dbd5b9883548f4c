//! What was asked for: the identity of a run.

use serde::{Deserialize, Serialize};
use serde_json::Value;
use surface_model::document::quoted;

use super::share::Share;

/// The newest format of `run.json` this program reads and writes.
pub(super) const RUN_FORMAT: &str = "drawtube-run/1";

/// The version whose results these are.
const VERSION: &str = env!("CARGO_PKG_VERSION");

/// What a run is about. Two processes with the same ask work on the same run.
#[derive(Debug, Clone)]
pub struct Ask {
    /// What sort of work, such as `overnight`.
    pub(crate) kind: &'static str,
    /// What messages call the file that was asked about.
    pub name: String,
    /// The file that was asked about, byte by byte.
    pub(crate) text: Vec<u8>,
    /// Seed of all random numbers.
    pub seed: u64,
    /// Every other thing a result depends on. What only says how much to do, or how fast, does not
    /// belong here: a run may go on with more threads and a larger budget.
    pub(crate) settings: Value,
    /// The part that this process takes.
    pub share: Share,
}

/// `run.json`: the ask without its text.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct RunDocument {
    /// Always `drawtube-run/1`.
    pub format: String,
    /// What sort of work.
    pub kind: String,
    /// The program's version.
    pub version: String,
    /// Seed of all random numbers.
    pub seed: u64,
    /// Every other thing a result depends on.
    pub settings: Value,
    /// Into how many parts the run is split.
    pub parts: u64,
    /// The file that was asked about.
    pub asked: AskedDocument,
}

/// The file that was asked about.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct AskedDocument {
    /// What it was called.
    pub name: String,
    /// Hash of its bytes, BLAKE3.
    pub blake3: String,
}

impl RunDocument {
    pub(super) fn of(ask: &Ask) -> Self {
        Self {
            format: RUN_FORMAT.to_owned(),
            kind: ask.kind.to_owned(),
            version: VERSION.to_owned(),
            seed: ask.seed,
            settings: ask.settings.clone(),
            parts: ask.share.of(),
            asked: AskedDocument { name: ask.name.clone(), blake3: hash(&ask.text) },
        }
    }

    /// Hash that ties a journal to its run: of everything but names.
    pub(super) fn identity(&self) -> String {
        let Self { format, kind, version, seed, settings, parts, asked } = self;
        let told = serde_json::json!([format, kind, version, seed, settings, parts, asked.blake3]);
        hash(told.to_string().as_bytes())
    }

    /// What makes this run, the one in the folder, another than `asked`: told for people. `None` if
    /// they are the same.
    #[must_use]
    pub(crate) fn difference(&self, asked: &Self) -> Option<String> {
        let told = |what: &str, there: &dyn std::fmt::Display, here: &dyn std::fmt::Display| {
            Some(format!("{what} is {there} there and {here} here"))
        };
        if self.kind != asked.kind {
            told("the kind of run", &quoted(&self.kind), &quoted(&asked.kind))
        } else if self.version != asked.version {
            told("the program's version", &quoted(&self.version), &quoted(&asked.version))
        } else if self.asked.blake3 != asked.asked.blake3 {
            Some(format!("it was asked about another file, {:?} as it was then", self.asked.name))
        } else if self.seed != asked.seed {
            told("the seed", &self.seed, &asked.seed)
        } else if self.settings != asked.settings {
            told("the settings", &self.settings, &asked.settings)
        } else if self.parts != asked.parts {
            told("the number of parts", &self.parts, &asked.parts)
        } else {
            None
        }
    }
}

pub(super) fn hash(bytes: &[u8]) -> String {
    blake3::hash(bytes).to_hex().to_string()
}
