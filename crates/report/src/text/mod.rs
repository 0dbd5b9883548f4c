//! Text for a terminal: tables at most 80 columns wide where names allow it, units in the heads.

pub mod assessment;
pub mod beam;
pub mod bounds;
pub mod cam;
pub mod differences;
mod elements;
pub mod glass;
pub mod hazards;
mod layout;
pub(crate) mod limits;
pub(crate) mod number;
pub mod optimisation;
mod optimised;
pub mod overnight;
pub mod ray;
pub mod retune;
pub mod retune_lists;
pub mod start;
pub(crate) mod states;
pub mod sweep;
pub(crate) mod table;
pub mod temperature;
pub mod tolerance;
pub(crate) mod verdict;

pub(crate) use limits::Scope;
pub(crate) use number::{as_written, fixed, fixed_or_dash, significant, significant_or_dash};

use driver::design_file::DesignFile;
use surface_model::document::Address;

/// Widest line that running text is broken into, in characters.
pub const WIDTH: usize = 80;

/// Running text in lines of at most `width` characters; later lines are indented by `indent`.
#[must_use]
pub fn paragraph(text: &str, width: usize, indent: &str) -> String {
    let options = textwrap::Options::new(width.max(1))
        .subsequent_indent(indent)
        .break_words(false)
        .word_splitter(textwrap::WordSplitter::NoHyphenation);
    // A number stays with its per cent sign.
    textwrap::fill(&text.replace(" %", "\u{a0}%"), options).replace('\u{a0}', " ")
}

/// Paragraphs, tables and sections with an empty line between them; empty ones are left out.
fn sections(parts: impl IntoIterator<Item = String>) -> String {
    let parts: Vec<String> = parts.into_iter().filter(|part| !part.is_empty()).collect();
    parts.join("\n\n")
}

/// One warning a paragraph, marked as such.
#[must_use]
pub fn warnings(warnings: &[String]) -> String {
    headed("warning", warnings)
}

/// One remark a paragraph, on what is well but could be better.
fn notes(notes: &[String]) -> String {
    headed("note", notes)
}

fn headed(head: &str, list: &[String]) -> String {
    let lines: Vec<String> =
        list.iter().map(|text| paragraph(&format!("{head}: {text}"), WIDTH, "  ")).collect();
    lines.join("\n")
}

/// A surface's address in short: group, element and surface, each by name or number.
fn surface_name(file: &DesignFile, at: &Address) -> String {
    let named = at.with_names(file.document().value());
    let steps = named.steps();
    let short = [1, 3, 5].map(|step| steps.get(step).copied().unwrap_or_default());
    short.join(" ")
}
