//! The two streams: results on standard output, everything else on standard error.

use std::io::{self, IsTerminal, Write};

use clap::ValueEnum;
use clap::builder::StyledStr;

use crate::colour;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;

/// How errors are told.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum ErrorFormat {
    /// For people
    #[default]
    Text,
    /// One JSON document on one line
    Json,
}

/// Where results and messages go.
#[derive(Debug)]
pub(crate) struct Console {
    errors: ErrorFormat,
}

impl Console {
    pub(crate) fn new(errors: ErrorFormat) -> Self {
        Self { errors }
    }

    /// Prints a result for people, with a newline at its end.
    pub(crate) fn print(&self, text: &str) -> Result<(), Failure> {
        let text = harmless(text);
        let mut painted =
            if colour::is_wanted(&io::stdout()) { colour::paint(&text) } else { text };
        painted.push('\n');
        self.print_exactly(&painted)
    }

    /// Prints a document as it is.
    pub(crate) fn print_exactly(&self, text: &str) -> Result<(), Failure> {
        self.print_bytes(text.as_bytes())
    }

    /// Prints a file as it is.
    pub(crate) fn print_bytes(&self, bytes: &[u8]) -> Result<(), Failure> {
        let mut out = io::stdout().lock();
        let written = out.write_all(bytes).and_then(|()| out.flush());
        match written {
            // The reader has seen enough (`| head`).
            Err(error) if error.kind() == io::ErrorKind::BrokenPipe => Ok(()),
            Err(error) => Err(Failure::StandardOutput(error)),
            Ok(()) => Ok(()),
        }
    }

    /// Prints a document for machines.
    pub(crate) fn print_json(&self, document: &impl serde::Serialize) -> Result<(), Failure> {
        let text = serde_json::to_string_pretty(document).map_err(Failure::Document)?;
        self.print_exactly(&(text + "\n"))
    }

    /// Says something on standard error. There is no one to tell if that fails.
    pub(crate) fn say(&self, text: &str) {
        let err = io::stderr();
        let text = harmless(text);
        let text = if colour::is_wanted(&err) { colour::paint(&text) } else { text };
        let _ = writeln!(err.lock(), "{text}");
    }

    /// Whether standard error is a terminal that can redraw a line.
    pub(crate) fn can_redraw(&self) -> bool {
        let dumb = std::env::var_os("TERM").is_some_and(|term| term == "dumb");
        io::stderr().is_terminal() && !dumb
    }

    /// Help that was asked for.
    pub(crate) fn print_help(&self, help: &StyledStr) {
        let text = if colour::is_wanted(&io::stdout()) {
            help.ansi().to_string()
        } else {
            help.to_string()
        };
        let _ = self.print_exactly(&text);
    }

    /// Help that was not asked for.
    pub(crate) fn say_help(&self, help: &StyledStr) {
        let err = io::stderr();
        let text = if colour::is_wanted(&err) { help.ansi().to_string() } else { help.to_string() };
        let _ = err.lock().write_all(text.as_bytes());
    }

    /// Tells a failure; what is left of a result goes to standard output.
    pub(crate) fn fail(&self, failure: &Failure) -> ExitStatus {
        match self.errors {
            ErrorFormat::Text => self.say(&failure.text()),
            ErrorFormat::Json => {
                let _ = writeln!(io::stderr().lock(), "{}", failure.document());
            }
        }
        failure.status()
    }
}

/// A text for people without anything that a terminal would act upon: the names in somebody else's
/// file or folder may hold it.
fn harmless(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if c.is_control() && !matches!(c, '\n' | '\t') {
            out.extend(c.escape_default());
        } else {
            out.push(c);
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::harmless;

    #[test]
    fn what_a_terminal_would_act_upon_is_told_instead() {
        assert_eq!(harmless("a\tµ\n\u{1b}[31m\r\u{9b}"), "a\tµ\n\\u{1b}[31m\\r\\u{9b}");
    }
}
