//! The ranked list: what a morning begins with.

use serde::Serialize;
use serde_json::Value;
use surface_model::document::layout;

use crate::run::ResultFile;
use crate::search::Found;

/// The format of `ranking.json`.
const RANKING_FORMAT: &str = "drawtube-ranking/1";

/// `ranking.json`: the best designs that really differ, best first. It says nothing of times,
/// threads or parts: however a run was cut up, the bytes are the same.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RankedList {
    /// Always `drawtube-ranking/1`.
    pub format: &'static str,
    /// Starts that were finished.
    pub starts: u64,
    /// Of those, the ones that ended in the best design or one much like it.
    pub times_best_found: u64,
    /// The designs, best first.
    pub best: Vec<Ranked>,
}

/// One design of the list.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Ranked {
    /// From one.
    pub rank: usize,
    /// Where the design file is, relative to the folder.
    pub file: String,
    /// The start that found it.
    pub start: u64,
    /// Its merit as `assess` tells it.
    pub merit: f64,
    /// Whether every goal and limit is met.
    pub meets: bool,
    /// Whether every limit is kept.
    pub limits_kept: bool,
    /// Largest RMS wavefront error of any state and wavelength, waves.
    pub worst_rms_waves: Option<f64>,
    /// Longest track of any state, mm.
    pub track_mm: f64,
    /// Number of elements.
    pub elements: usize,
    /// Glasses from left to right.
    pub glasses: Vec<String>,
    /// The design file.
    #[serde(skip)]
    design: Value,
}

impl Ranked {
    pub(super) fn of(rank: usize, start: u64, found: &Found) -> Self {
        Self {
            rank,
            file: format!("best/{rank:02}.json"),
            start,
            merit: found.merit,
            meets: found.meets,
            limits_kept: found.limits_kept,
            worst_rms_waves: found.worst_rms_waves,
            track_mm: found.track_mm,
            elements: found.elements,
            glasses: found.glasses.clone(),
            design: found.design.clone(),
        }
    }

    /// The text of the design file.
    #[must_use]
    pub fn text(&self) -> String {
        layout(&self.design)
    }
}

impl RankedList {
    pub(super) fn new(starts: u64, times_best_found: u64, best: Vec<Ranked>) -> Self {
        Self { format: RANKING_FORMAT, starts, times_best_found, best }
    }

    /// The files of the list, the list itself last.
    ///
    /// # Errors
    /// A number cannot be written as JSON, which a finite one always can.
    pub fn files(&self) -> Result<Vec<ResultFile>, serde_json::Error> {
        let designs = self.best.iter().map(|best| ResultFile::best(best.rank, best.text()));
        let mut list = serde_json::to_string_pretty(self)?;
        list.push('\n');
        Ok(designs.chain([ResultFile::ranking(list)]).collect())
    }
}
