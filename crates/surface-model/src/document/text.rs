//! From bytes to text, and from a place in the text to a line and a column.

use thiserror::Error;

use super::complaint::{Complain, Place};

/// The largest document that is read, in bytes. A design is a few kB; a file thousands of times
/// that size is a mistake, and is refused before any of it is looked at.
pub const LARGEST_BYTES: usize = 16 << 20;

/// A place in a text as people and editors count it: both numbers start at 1, and a column is one
/// Unicode character.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Position {
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
}

impl Position {
    /// The position of the byte at `offset` of `text`; past the end it is the end.
    pub(super) fn of(text: &str, offset: usize) -> Self {
        let before = text.get(..text.floor_char_boundary(offset)).unwrap_or(text);
        Self {
            line: 1 + before.bytes().filter(|byte| *byte == b'\n').count(),
            column: 1 + before.chars().rev().take_while(|c| *c != '\n').count(),
        }
    }
}

/// Why bytes are not a text that a document can be read from.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[non_exhaustive]
pub enum TextError {
    /// The file is larger than [`LARGEST_BYTES`].
    #[error("the file is larger than {} MiB", LARGEST_BYTES >> 20)]
    TooLarge,
    /// Nothing, or nothing but white space.
    #[error("the file is empty")]
    Empty,
    /// The text is in another Unicode encoding.
    #[error("the text is in {encoding}")]
    OtherEncoding {
        /// Its name, such as `UTF-16`.
        encoding: &'static str,
    },
    /// A byte that no UTF-8 text has at this place.
    #[error("byte {byte} (counted from 0) is not UTF-8 text")]
    NotUtf8 {
        /// Offset of the first wrong byte in the file.
        byte: usize,
        /// The same place as line and column.
        position: Position,
    },
}

impl Complain for TextError {
    fn place(&self) -> Place {
        match self {
            Self::NotUtf8 { position, .. } => Place::Position(*position),
            _ => Place::File,
        }
    }

    fn expected(&self) -> Option<String> {
        Some(match self {
            Self::TooLarge => "a JSON document of a few kB, as a design is".into(),
            Self::Empty => "a JSON document".into(),
            Self::OtherEncoding { .. } | Self::NotUtf8 { .. } => "a JSON document in UTF-8".into(),
        })
    }

    fn advice(&self) -> Option<String> {
        match self {
            Self::OtherEncoding { .. } | Self::NotUtf8 { .. } => {
                Some("save the file again as UTF-8".into())
            }
            _ => None,
        }
    }
}

/// The text in `bytes`, without a leading byte order mark.
///
/// # Errors
/// The bytes are too many, are in another encoding, or hold nothing but white space.
pub(super) fn decode(bytes: &[u8]) -> Result<&str, TextError> {
    if bytes.len() > LARGEST_BYTES {
        return Err(TextError::TooLarge);
    }
    if let Some(encoding) = other_encoding(bytes) {
        return Err(TextError::OtherEncoding { encoding });
    }
    let unmarked = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
    let mark = bytes.len() - unmarked.len();
    let text = std::str::from_utf8(unmarked).map_err(|error| {
        let (good, _) = unmarked.split_at(error.valid_up_to());
        let good = String::from_utf8_lossy(good);
        TextError::NotUtf8 {
            byte: mark + error.valid_up_to(),
            position: Position::of(&good, good.len()),
        }
    })?;
    if text.trim_ascii().is_empty() { Err(TextError::Empty) } else { Ok(text) }
}

/// UTF-16 and UTF-32, by their marks or by the zero bytes around the first character, which in
/// JSON is ASCII (RFC 4627, section 3, uses the same pattern).
fn other_encoding(bytes: &[u8]) -> Option<&'static str> {
    match bytes {
        [0xFF, 0xFE, 0, 0, ..] | [0, 0, 0xFE, 0xFF, ..] => Some("UTF-32"),
        [0xFF, 0xFE, ..] | [0xFE, 0xFF, ..] => Some("UTF-16"),
        [0, 0, 0, 1..=255, ..] | [1..=255, 0, 0, 0, ..] => Some("UTF-32"),
        [0, 1..=255, ..] | [1..=255, 0, ..] => Some("UTF-16"),
        _ => None,
    }
}

/// Where `part` begins within `text`, when it is a slice of it.
pub(super) fn offset_within(text: &str, part: &str) -> Option<usize> {
    let offset = part.as_ptr().addr().checked_sub(text.as_ptr().addr())?;
    (offset + part.len() <= text.len()).then_some(offset)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn positions_count_characters_and_lines() {
        let text = "ab\r\nµm é\n";
        assert_eq!(Position::of(text, 0), Position { line: 1, column: 1 });
        assert_eq!(Position::of(text, 4), Position { line: 2, column: 1 });
        assert_eq!(Position::of(text, 6), Position { line: 2, column: 2 });
        assert_eq!(Position::of(text, 5), Position { line: 2, column: 1 }, "inside a character");
        assert_eq!(Position::of(text, 999), Position { line: 3, column: 1 });
    }

    #[test]
    fn a_byte_order_mark_is_skipped() {
        assert_eq!(decode(b"\xEF\xBB\xBF{}"), Ok("{}"));
    }

    #[test]
    fn other_encodings_are_recognised_with_and_without_a_mark() {
        let little = |text: &str| text.encode_utf16().flat_map(u16::to_le_bytes).collect();
        let big = |text: &str| text.encode_utf16().flat_map(u16::to_be_bytes).collect();
        let cases: [Vec<u8>; 4] =
            [little("\u{FEFF}{}"), little("{}"), big("\u{FEFF}{}"), big("{}")];
        for bytes in cases {
            assert_eq!(decode(&bytes), Err(TextError::OtherEncoding { encoding: "UTF-16" }));
        }
        let bytes: Vec<u8> = "{}".chars().flat_map(|c| u32::from(c).to_le_bytes()).collect();
        assert_eq!(decode(&bytes), Err(TextError::OtherEncoding { encoding: "UTF-32" }));
    }

    #[test]
    fn a_wrong_byte_is_told_with_its_place() {
        let error = decode(b"\xEF\xBB\xBF{\n \"\xFF\"}");
        let position = Position { line: 2, column: 3 };
        assert_eq!(error, Err(TextError::NotUtf8 { byte: 7, position }));
    }

    #[test]
    fn too_much_and_too_little_are_refused() {
        assert_eq!(decode(&vec![b' '; LARGEST_BYTES + 1]), Err(TextError::TooLarge));
        assert_eq!(decode(&vec![b' '; LARGEST_BYTES]), Err(TextError::Empty));
        assert_eq!(decode(b"\xEF\xBB\xBF"), Err(TextError::Empty));
        assert_eq!(decode(b""), Err(TextError::Empty));
    }
}
