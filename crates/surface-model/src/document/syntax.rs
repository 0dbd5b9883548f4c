//! What is wrong with a text that is not JSON, in words for somebody who wrote it by hand.
//!
//! `serde_json` tells the place and, in a sentence, what it expected; this module looks at the text
//! there to say what was found, since most such mistakes are of a few kinds.

use super::suggest::nearest;
use super::text::Position;
use super::wording::{did_you_mean, quoted};
use thiserror::Error;

/// A mistake in the grammar of JSON (RFC 8259).
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[non_exhaustive]
pub enum SyntaxFault {
    /// The text stops in the middle.
    #[error("the file ends in the middle of {within}")]
    End {
        /// What was not finished.
        within: &'static str,
    },
    /// `NaN`, `Infinity` or a relative.
    #[error("JSON has no {0}")]
    NotFinite(String),
    /// A number beyond what a double holds.
    #[error("the number {0} is beyond ±1.8e308")]
    TooBig(String),
    /// A number written as JSON does not allow.
    #[error("{0} is not how JSON writes a number")]
    Number(String),
    /// A number with a comma before its decimals.
    #[error("{0} has a comma")]
    DecimalComma(String),
    /// More objects and lists within each other than any document has.
    #[error("objects and lists are nested more than 127 deep")]
    TooDeep,
    /// More values than any document has.
    #[error("the document holds more than {} values", super::parse::MOST_VALUES)]
    TooMany,
    /// Something after the end of the document.
    #[error("{} follows after the end of the document", quoted(.0))]
    Trailing(String),
    /// A comma before a closing bracket.
    #[error("there is a comma before a closing bracket")]
    TrailingComma,
    /// A comment.
    #[error("JSON has no comments")]
    Comment,
    /// A word without quotes.
    #[error("{} is not in quotes", .0)]
    Bare(String),
    /// A key without quotes.
    #[error("the key {} is not in quotes", .0)]
    BareKey(String),
    /// Single quotes.
    #[error("JSON has double quotes only")]
    SingleQuote,
    /// Line feed, tab or the like within a quoted text.
    #[error("a text in quotes holds a line break, a tab or another control character")]
    ControlCharacter,
    /// A backslash and something that may not follow it.
    #[error("a backslash is followed by what it cannot be followed by")]
    Escape,
    /// Something else.
    #[error("{found} is not expected here")]
    Other {
        /// What stands there.
        found: String,
        /// What should, in the words of the JSON library.
        expected: String,
    },
}

impl SyntaxFault {
    /// What should stand there instead.
    pub fn expected(&self) -> Option<String> {
        match self {
            Self::NotFinite(_) | Self::TooBig(_) => Some("a finite number".into()),
            Self::TooDeep | Self::TooMany => Some("a document of a few kB, as a design is".into()),
            Self::DecimalComma(_) => Some("a key in double quotes after a comma".into()),
            Self::Trailing(_) => Some("the end of the file".into()),
            Self::Bare(_) => Some("a number, true, false, null or a text in quotes".into()),
            Self::BareKey(_) => Some("a key in double quotes".into()),
            Self::Other { expected, .. } => Some(expected.clone()),
            _ => None,
        }
    }

    /// What to do about it.
    pub fn advice(&self) -> Option<String> {
        Some(match self {
            Self::Number(_) => "write it as 0.5, 1.0 or 1e-7: no plus sign in front, no leading \
                                zero, digits on both sides of the point"
                .into(),
            Self::DecimalComma(number) => {
                format!("numbers take a point: {}", number.replacen(',', ".", 1))
            }
            Self::Comment => "write a remark under the key \"note\"".into(),
            Self::TrailingComma => "take the comma away".into(),
            Self::Bare(word) => did_you_mean_word(word),
            Self::BareKey(word) => did_you_mean(word),
            Self::SingleQuote => "write \" instead of '".into(),
            Self::ControlCharacter => {
                "close the quotes on the same line; a line break is written \\n".into()
            }
            Self::Escape => "a backslash itself is written \\\\".into(),
            _ => return None,
        })
    }
}

fn did_you_mean_word(word: &str) -> String {
    let words = ["true", "false", "null"];
    if word == "None" || word == "nil" {
        return "did you mean null?".into();
    }
    match nearest(word, words) {
        Some(known) => format!("did you mean {known}?"),
        None => did_you_mean(word),
    }
}

/// The fault behind an error of `serde_json`, and the byte where it lies.
pub(super) fn diagnose(text: &str, error: &serde_json::Error) -> (usize, SyntaxFault) {
    let offset = offset_of(text, error.line(), error.column());
    let message = error.to_string();
    let message = message.split(" at line ").next().unwrap_or_default();
    if let Some(within) = message.strip_prefix("EOF while parsing ") {
        let within = match within {
            "a list" => "a list",
            "an object" => "an object",
            "a string" => "a text in quotes",
            _ => "a value",
        };
        return (text.len(), SyntaxFault::End { within });
    }
    match message {
        "number out of range" => {
            let start = word_start(text, offset);
            (start, SyntaxFault::TooBig(word_at(text, start)))
        }
        "recursion limit exceeded" => (offset, SyntaxFault::TooDeep),
        "trailing comma" => (offset, SyntaxFault::TrailingComma),
        "control character (\\u0000-\\u001F) found while parsing a string" => {
            (offset, SyntaxFault::ControlCharacter)
        }
        "invalid escape"
        | "invalid unicode code point"
        | "lone leading surrogate in hex escape"
        | "unexpected end of hex escape" => (offset, SyntaxFault::Escape),
        _ => by_the_text(text, offset, message),
    }
}

/// The fault as the text at its place shows it.
fn by_the_text(text: &str, offset: usize, message: &str) -> (usize, SyntaxFault) {
    let rest = text.get(offset..).unwrap_or_default();
    if rest.starts_with("//") || rest.starts_with("/*") || rest.starts_with('#') {
        return (offset, SyntaxFault::Comment);
    }
    if rest.starts_with('\'') {
        return (offset, SyntaxFault::SingleQuote);
    }
    let start = word_start(text, offset);
    let word = word_at(text, start);
    let unsigned = word.trim_start_matches(['+', '-']);
    let is_name = unsigned.starts_with(|c: char| c.is_alphabetic() || c == '_');
    if ["nan", "inf", "infinity"].contains(&unsigned.to_ascii_lowercase().as_str()) {
        return (start, SyntaxFault::NotFinite(word));
    }
    if message == "key must be a string"
        && let Some(found) = decimal_comma(text, start)
    {
        return found;
    }
    match message {
        "trailing characters" => (start, SyntaxFault::Trailing(word)),
        "expected value" | "expected ident" if is_name => (start, SyntaxFault::Bare(word)),
        "key must be a string" if is_name => (start, SyntaxFault::BareKey(word)),
        "invalid number" => (start, SyntaxFault::Number(word)),
        "expected value" if unsigned.starts_with(|c: char| c == '.' || c.is_ascii_digit()) => {
            (start, SyntaxFault::Number(word))
        }
        _ => {
            let number = text
                .get(start..)
                .is_some_and(|r| r.starts_with(|c: char| c == '-' || c.is_ascii_digit()));
            if number && message.starts_with("expected `") && start < offset {
                return (start, SyntaxFault::Number(word));
            }
            let expected = match message {
                "expected `,` or `]`" => "a comma or \"]\"",
                "expected `,` or `}`" => "a comma or \"}\"",
                "expected `:`" => "a colon",
                "key must be a string" => "a key in double quotes",
                "expected value" => "a value",
                other => other,
            };
            (
                offset,
                SyntaxFault::Other { found: found_at(text, offset), expected: expected.into() },
            )
        }
    }
}

/// A number whose decimals, behind a comma, were taken for the next key; `start` is where they are.
fn decimal_comma(text: &str, start: usize) -> Option<(usize, SyntaxFault)> {
    let whole = text.get(..start)?.strip_suffix(',')?;
    let decimals = word_at(text, start);
    let before = word_start(whole, whole.len());
    let is_number = |word: &str| word.parse::<i64>().is_ok();
    let number = is_number(whole.get(before..)?) && decimals.bytes().all(|b| b.is_ascii_digit());
    let found = format!("{},{decimals}", whole.get(before..)?);
    number.then_some((before, SyntaxFault::DecimalComma(found)))
}

/// The byte that `serde_json` means by a line and a column: it counts bytes, and the column of the
/// byte just read from 1.
fn offset_of(text: &str, line: usize, column: usize) -> usize {
    let start: usize = text.split_inclusive('\n').take(line.saturating_sub(1)).map(str::len).sum();
    text.floor_char_boundary((start + column).saturating_sub(1))
}

fn in_word(c: char) -> bool {
    c.is_alphanumeric() || matches!(c, '+' | '-' | '.' | '_')
}

/// Where the word or number that contains the byte at `offset` begins.
fn word_start(text: &str, offset: usize) -> usize {
    let before = text.get(..offset).unwrap_or_default();
    let word: usize = before.chars().rev().take_while(|c| in_word(*c)).map(char::len_utf8).sum();
    offset - word
}

/// The word or number at `start`, or the character there, no more than 40 characters.
fn word_at(text: &str, start: usize) -> String {
    let rest = text.get(start..).unwrap_or_default();
    let word: String = rest.chars().take_while(|c| in_word(*c)).take(40).collect();
    if word.is_empty() { rest.chars().take(1).collect() } else { word }
}

fn found_at(text: &str, offset: usize) -> String {
    let position = Position::of(text, offset);
    match word_at(text, offset).as_str() {
        "\"" => "a text in quotes".into(),
        "\n" | "\r" => format!("the end of line {}", position.line),
        word => quoted(word),
    }
}
