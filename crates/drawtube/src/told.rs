//! What a command prints at its end.

/// What is printed at the end.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Told {
    /// For people.
    Text,
    /// For machines.
    Json,
    /// Nothing.
    Nothing,
}

impl Told {
    /// By `--quiet` and `--json`, which exclude each other.
    pub(crate) fn of(quiet: bool, json: bool) -> Self {
        match (quiet, json) {
            (true, _) => Self::Nothing,
            (false, true) => Self::Json,
            (false, false) => Self::Text,
        }
    }
}
