//! Arguments of `schema`.

use clap::{Args, ValueEnum};

/// Print the JSON Schema of a kind of document.
#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  drawtube schema design > drawtube.schema.json")]
pub(crate) struct SchemaArguments {
    /// Which kind
    #[arg(value_enum)]
    pub(crate) kind: DocumentKind,
}

/// Kinds of document the program reads.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(crate) enum DocumentKind {
    /// A design file
    Design,
    /// A sweep plan
    Plan,
    /// A brief: the requirement a design is begun from
    Brief,
}
