//! How much may be done.

use std::time::Duration;

/// When a run, or this session of it, is to end. Results do not depend on it in any other way
/// than by the set of finished units.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Budget {
    /// Units of the whole run, all parts and sessions together: units 0 to `units` − 1.
    pub units: Option<u64>,
    /// Time of the run, all sessions of this part together. When it is used up, the run is done.
    pub run_time: Option<Duration>,
    /// Time of this session. When it is used up, the run goes on another time.
    pub session_time: Option<Duration>,
    /// A merit that is good enough. Units up to the first one that reaches it count, and none
    /// after it.
    pub target_merit: Option<f64>,
}

impl Budget {
    /// Whether a merit is good enough.
    #[must_use]
    pub(crate) fn is_reached_by(&self, merit: Option<f64>) -> bool {
        matches!((merit, self.target_merit), (Some(merit), Some(target)) if merit <= target)
    }
}
