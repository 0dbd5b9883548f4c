//! Everything that is wrong with a document, of which only the beginning is put into words.

use super::structure_error::StructureError;

/// All that is wrong, the first of it in full.
#[derive(Debug)]
pub(super) struct Problems {
    /// The first, in the order of the document.
    pub(super) told: Vec<StructureError>,
    /// How many more there are.
    pub(super) untold: usize,
    /// How many are told.
    most_told: usize,
}

impl Problems {
    /// None yet; only the first `most_told` will be put into words.
    pub(super) fn none(most_told: usize) -> Self {
        Self { told: Vec::new(), untold: 0, most_told }
    }

    /// None yet, to be kept like these.
    pub(super) fn none_alike(&self) -> Self {
        Self::none(self.most_told)
    }

    /// Adds a problem; it is put into words only if it will be told.
    pub(super) fn add(&mut self, problem: impl FnOnce() -> StructureError) {
        if self.told.len() < self.most_told {
            self.told.push(problem());
        } else {
            self.untold += 1;
        }
    }

    /// Adds all of `others`.
    pub(super) fn append(&mut self, others: Self) {
        self.untold += others.untold;
        others.told.into_iter().for_each(|problem| self.add(|| problem));
    }

    /// How many there are.
    pub(super) fn count(&self) -> usize {
        self.told.len() + self.untold
    }
}
