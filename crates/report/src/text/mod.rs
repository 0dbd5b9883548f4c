//! Text for a terminal: tables at most 80 columns wide where names allow it, units in the heads.

pub mod assessment;
pub mod cam;
mod elements;
pub mod glass;
mod layout;
pub(crate) mod limits;
mod number;
pub mod optimisation;
mod optimised;
pub mod ray;
mod states;
mod table;
pub(crate) mod verdict;

pub(crate) use limits::Scope;
pub(crate) use number::{as_written, fixed, fixed_or_dash, significant, significant_or_dash};

/// Widest line that running text is broken into, in characters.
pub const WIDTH: usize = 80;

/// Running text in lines of at most `width` characters; later lines are indented by `indent`.
#[must_use]
pub fn paragraph(text: &str, width: usize, indent: &str) -> String {
    let options = textwrap::Options::new(width.max(1))
        .subsequent_indent(indent)
        .break_words(false)
        .word_splitter(textwrap::WordSplitter::NoHyphenation);
    textwrap::fill(text, options)
}

/// Paragraphs, tables and sections with an empty line between them; empty ones are left out.
fn sections(parts: impl IntoIterator<Item = String>) -> String {
    let parts: Vec<String> = parts.into_iter().filter(|part| !part.is_empty()).collect();
    parts.join("\n\n")
}

/// One warning a paragraph, marked as such.
#[must_use]
pub fn warnings(warnings: &[String]) -> String {
    let lines: Vec<String> = warnings
        .iter()
        .map(|warning| paragraph(&format!("warning: {warning}"), WIDTH, "  "))
        .collect();
    lines.join("\n")
}
