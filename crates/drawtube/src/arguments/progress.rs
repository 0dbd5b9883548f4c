//! How a command that takes long tells how far it is.

use clap::ValueEnum;

/// How progress is told.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum ProgressArgument {
    /// A bar on a terminal, plain lines elsewhere
    #[default]
    Auto,
    /// One line that is redrawn (on a terminal only)
    Bar,
    /// A line now and then
    Plain,
    /// Nothing
    None,
}
