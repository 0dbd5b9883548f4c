//! What a sweep is about: a design that is optimised, or a brief that is begun anew, at every point.

use surface_model::document::{Complaints, Document};

use crate::brief::BriefFile;
use crate::change::{Change, apply, apply_to_brief};
use crate::design_file::DesignFile;

/// What plans call the two.
pub(super) const DESIGN_KEY: &str = "design";
pub(super) const BRIEF_KEY: &str = "brief";

/// A design or a brief.
#[derive(Debug, Clone)]
pub enum Subject {
    /// A design: every point changes and optimises it.
    Design(Box<DesignFile>),
    /// A brief: every point changes it and searches for a design that answers it.
    Brief(Box<BriefFile>),
}

impl Subject {
    /// Its document as it was written.
    #[must_use]
    pub fn document(&self) -> &Document {
        match self {
            Self::Design(file) => file.document(),
            Self::Brief(file) => file.document(),
        }
    }

    /// What a plan, and the settings of a run, call it.
    pub(super) fn key(&self) -> &'static str {
        match self {
            Self::Design(_) => DESIGN_KEY,
            Self::Brief(_) => BRIEF_KEY,
        }
    }

    /// The same with changes made.
    ///
    /// # Errors
    /// Everything that is wrong with them.
    pub(super) fn with(&self, changes: &[Change]) -> Result<Self, Complaints> {
        Ok(match self {
            Self::Design(file) => Self::Design(Box::new(apply(file, changes)?.file)),
            Self::Brief(file) => Self::Brief(Box::new(apply_to_brief(file, changes)?)),
        })
    }
}
