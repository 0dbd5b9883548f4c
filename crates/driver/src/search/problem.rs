//! A search problem, and one start of it.

use std::sync::atomic::AtomicBool;

use super::candidate::Candidate;
use super::settings::{SearchSettings, Strategy};
use super::start_result::{Found, StartResult};
use super::template::Template;
use super::workbench::{Effort, Interrupted, Workbench};
use super::{basin_hopping, multistart};
use crate::design_file::DesignFile;
use crate::optimise::OptimiseError;
use crate::sampling::stream;

/// Why there is nothing to search.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum SearchError {
    /// A design that cannot be optimised.
    #[error(transparent)]
    Design(#[from] OptimiseError),
}

/// What is searched. Made once and shared by all threads.
#[derive(Debug)]
pub struct SearchProblem {
    templates: Vec<Template>,
    settings: SearchSettings,
}

impl SearchProblem {
    /// The search over the free numbers of a design file, throughout their ranges. What is held
    /// stays held; glasses and the order of elements are the file's.
    ///
    /// # Errors
    /// The file has no goals or nothing to change, or its ranges contradict each other.
    pub fn of_design(file: &DesignFile, settings: SearchSettings) -> Result<Self, SearchError> {
        Ok(Self { templates: vec![Template::new(file.clone())?], settings })
    }

    /// Start `number` of the search with this `seed`. The result depends on problem, settings,
    /// seed and number alone. `None` when `interrupt` was raised before it was done, which it heeds
    /// within a few milliseconds; the start is then to be run again from its beginning.
    #[must_use]
    pub fn start(&self, seed: u64, number: u64, interrupt: &AtomicBool) -> Option<StartResult> {
        let mut result = StartResult { number, optimisations: 0, found: None };
        let count = self.templates.len() as u64;
        let template = &self.templates[usize::try_from(number % count).unwrap_or(0)];
        let Ok(mut bench) = Workbench::new(template, interrupt) else { return Some(result) };
        let candidates = self.candidates(&mut bench, seed, number).ok()?;
        result.optimisations = bench.optimisations;
        let files = candidates.into_iter().filter_map(|candidate| {
            let mut design = template.file.design.clone();
            bench.exact().variables().write(&candidate.variables, &mut design);
            template.file.with_numbers_of(&design).ok()
        });
        result.found = files.into_iter().find_map(|file| Found::of(&file));
        Some(result)
    }

    /// The finished candidates of a start, best first.
    fn candidates(
        &self,
        bench: &mut Workbench<'_>,
        seed: u64,
        number: u64,
    ) -> Result<Vec<Candidate>, Interrupted> {
        let mut random = stream(seed, number);
        let mut candidates = multistart::best(bench, seed, number, &mut random)?;
        match self.settings.strategy {
            Strategy::Multistart => {}
            Strategy::BasinHopping => {
                candidates.truncate(1);
                for candidate in &mut candidates {
                    basin_hopping::hop(bench, candidate, &mut random)?;
                }
            }
        }
        bench.halve(&mut candidates, Effort::Whole, usize::MAX)?;
        Ok(candidates)
    }
}
