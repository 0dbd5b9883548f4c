//! Colour, only ever as an extra: every word says what its colour says.

use std::io::IsTerminal;

/// Whether a stream may be coloured: it is a terminal that knows colours, and the user has not
/// asked for none (`NO_COLOR`, see no-color.org).
pub(crate) fn is_wanted(stream: &impl IsTerminal) -> bool {
    let set = |name| std::env::var_os(name).filter(|value| !value.is_empty());
    stream.is_terminal()
        && set("NO_COLOR").is_none()
        && set("TERM").is_none_or(|term| term != "dumb")
}

const RED: &str = "\x1b[31m";
const YELLOW: &str = "\x1b[33m";
const PLAIN: &str = "\x1b[0m";

/// Paints numbers with the sign `!` red, and warnings yellow.
pub(crate) fn paint(text: &str) -> String {
    let lines = text.split('\n').map(|line| match line.strip_prefix("warning:") {
        Some(rest) => format!("{YELLOW}warning:{PLAIN}{rest}"),
        None => line.split(' ').map(paint_word).collect::<Vec<_>>().join(" "),
    });
    lines.collect::<Vec<_>>().join("\n")
}

fn paint_word(word: &str) -> String {
    if word.ends_with('!') { format!("{RED}{word}{PLAIN}") } else { word.to_owned() }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_what_is_missed_is_red() {
        assert_eq!(paint("2x  0.31!  4.80"), "2x  \x1b[31m0.31!\x1b[0m  4.80");
        assert_eq!(paint("warning: low"), "\x1b[33mwarning:\x1b[0m low");
    }
}
