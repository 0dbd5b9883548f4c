//! Arguments of `completions`.

use clap::Args;

/// Print the completions for a shell.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube completions fish > ~/.config/fish/completions/drawtube.fish")]
pub(crate) struct CompletionsArguments {
    /// Which shell
    #[arg(value_enum)]
    pub(crate) shell: clap_complete::Shell,
}
