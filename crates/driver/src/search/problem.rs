//! A search problem, and one start of it.

use std::sync::atomic::AtomicBool;

use super::basin_hopping;
use super::brief_source::BriefSource;
use super::candidate::Candidate;
use super::design_source::DesignSource;
use super::differential_evolution;
use super::multistart;
use super::settings::{SearchSettings, Strategy};
use super::source::{Quarry, Source};
use super::start_result::{Found, StartResult};
use super::workbench::Workbench;
use crate::brief::BriefFile;
use crate::design_file::DesignFile;
use crate::optimise::OptimiseError;
use crate::run::Interrupted;
use crate::sampling::{RandomStream, stream};
use crate::start::{Refusals, StartError, Starts};

/// Why there is nothing to search for a brief.
#[derive(Debug, thiserror::Error)]
pub enum SearchError {
    /// It has no goals.
    #[error(transparent)]
    Optimise(#[from] OptimiseError),
    /// No layout can answer it.
    #[error(transparent)]
    Start(#[from] StartError),
}

/// What an attempt at a design came to.
#[derive(Debug, Default)]
pub(crate) struct Attempt {
    /// The best design it found.
    pub(crate) found: Option<Found>,
    /// Local optimisations it took.
    optimisations: u64,
    /// Steps they took.
    pub(crate) iterations: u64,
    /// How many of the points of a brief that were looked at have a layout.
    pub(crate) layouts: usize,
    /// Why the others have none.
    pub(crate) refusals: Refusals,
}

impl Attempt {
    /// Of the finished candidates, best first.
    fn of(bench: &Workbench<'_>, quarry: &Quarry<'_>, candidates: &[Candidate]) -> Self {
        let mut files = candidates.iter().filter_map(|candidate| quarry.file(bench, candidate));
        Self {
            found: files.find_map(|file| Found::of(&file)),
            optimisations: bench.optimisations,
            iterations: bench.iterations,
            layouts: quarry.layouts(),
            refusals: quarry.refusals(),
        }
    }
}

/// What is searched. Made once and shared by all threads.
#[derive(Debug)]
pub struct SearchProblem {
    source: Source,
    settings: SearchSettings,
}

impl SearchProblem {
    /// The search over the free numbers of a design file, throughout their ranges. What is held
    /// stays held; glasses and the order of elements are the file's.
    ///
    /// # Errors
    /// The file has no goals or nothing to change, or its ranges contradict each other.
    pub fn of_design(file: &DesignFile, settings: SearchSettings) -> Result<Self, OptimiseError> {
        let source = Source::Design(Box::new(DesignSource::new(file.clone())?));
        Ok(Self { source, settings })
    }

    /// The search over everything a brief leaves open: families of group powers, the glasses
    /// allowed, the order of elements, radii, thicknesses, airs and spacings.
    ///
    /// # Errors
    /// The brief has no goals, or contradicts itself in a way that no layout gets around.
    pub fn of_brief(brief: &BriefFile, settings: SearchSettings) -> Result<Self, SearchError> {
        let source = Source::Brief(Box::new(BriefSource::new(Starts::of(brief)?)?));
        Ok(Self { source, settings })
    }

    /// Start `number` of the search with this `seed`. The result depends on problem, settings,
    /// seed and number alone. `None` when `interrupt` was raised before it was done, which it heeds
    /// within a few milliseconds; the start is then to be run again from its beginning.
    #[must_use]
    pub fn start(&self, seed: u64, number: u64, interrupt: &AtomicBool) -> Option<StartResult> {
        let Attempt { optimisations, found, .. } = self.attempt(seed, number, interrupt)?;
        Some(StartResult { number, optimisations, found })
    }

    /// As [`Self::start`], with what it took and what stood against it.
    #[must_use]
    pub(crate) fn attempt(
        &self,
        seed: u64,
        number: u64,
        interrupt: &AtomicBool,
    ) -> Option<Attempt> {
        let mut bench = Workbench::new(interrupt);
        let Ok(mut quarry) = self.source.open(&mut bench, seed, number) else {
            return Some(Attempt::default());
        };
        let mut random = stream(seed, number);
        let candidates = self.candidates(&mut quarry, &mut bench, &mut random).ok()?;
        Some(Attempt::of(&bench, &quarry, &candidates))
    }

    /// Improves the lenses of a design that was found for a brief that differs a little from this
    /// one; finds nothing where this one does not allow them. `note` says where they come from.
    /// `None` as in [`Self::start`].
    #[must_use]
    pub(crate) fn improve(
        &self,
        design: &DesignFile,
        note: &str,
        interrupt: &AtomicBool,
    ) -> Option<Attempt> {
        let mut bench = Workbench::new(interrupt);
        let Ok(mut quarry) = self.source.open(&mut bench, 0, 0) else {
            return Some(Attempt::default());
        };
        let Some(candidate) = quarry.take_over(&mut bench, design, note) else {
            return Some(Attempt::default());
        };
        let finished = quarry.finish(&mut bench, candidate).ok()?;
        Some(Attempt::of(&bench, &quarry, &[finished]))
    }

    /// The finished candidates of a start, best first.
    fn candidates(
        &self,
        quarry: &mut Quarry<'_>,
        bench: &mut Workbench<'_>,
        random: &mut RandomStream,
    ) -> Result<Vec<Candidate>, Interrupted> {
        let mut candidates = match self.settings.strategy {
            Strategy::Multistart | Strategy::BasinHopping => {
                multistart::best(quarry, bench, random)?
            }
            Strategy::DifferentialEvolution => differential_evolution::best(quarry, bench, random)?,
        };
        if self.settings.strategy == Strategy::BasinHopping {
            candidates.truncate(1);
            for candidate in &mut candidates {
                basin_hopping::hop(bench, candidate, random)?;
            }
        }
        let finish = |candidate| quarry.finish(bench, candidate);
        let mut finished = candidates.into_iter().map(finish).collect::<Result<Vec<_>, _>>()?;
        finished.sort_by(Candidate::compare);
        Ok(finished)
    }
}
