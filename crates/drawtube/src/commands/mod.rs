//! One module a command: the request its arguments make, and carrying it out.

pub(crate) mod assess;
pub(crate) mod cam;
pub(crate) mod completions;
pub(crate) mod gather;
pub(crate) mod glass;
pub(crate) mod man;
pub(crate) mod optimise;
pub(crate) mod overnight;
pub(crate) mod report;
pub(crate) mod retune;
pub(crate) mod schema;
pub(crate) mod start;
pub(crate) mod sweep;
pub(crate) mod tolerance;
pub(crate) mod trace;
