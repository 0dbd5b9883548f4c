//! Arguments of `man`.

use clap::Args;

/// Print the manual page, of the program or of one command, for `man -l` or a packager.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  drawtube man > drawtube.1
  drawtube man optimise > drawtube-optimise.1")]
pub(crate) struct ManArguments {
    /// The command; the whole program if none is given
    pub(crate) command: Option<String>,
}
