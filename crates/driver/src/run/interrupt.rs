//! The wish to stop, as a unit of work sees it.

use std::sync::atomic::{AtomicBool, Ordering};

/// Raised once, never lowered.
#[derive(Debug, Default)]
pub struct Interrupt(AtomicBool);

/// A unit that was interrupted yields nothing; it is done again another time.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Interrupted;

impl Interrupt {
    /// Asks the units at work to stop.
    pub(crate) fn raise(&self) {
        self.0.store(true, Ordering::Relaxed);
    }

    /// Whether to stop. Ask at least every tenth of a second.
    #[must_use]
    pub(crate) fn is_raised(&self) -> bool {
        self.0.load(Ordering::Relaxed)
    }

    /// The same as a flag, for a solver's observer.
    #[must_use]
    pub(crate) fn flag(&self) -> &AtomicBool {
        &self.0
    }
}
