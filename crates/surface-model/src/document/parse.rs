//! From text to values, in one pass, with every repeated key found on the way.

use std::cell::RefCell;
use std::fmt;

use serde::de::{DeserializeSeed, Error as _, MapAccess, SeqAccess, Visitor};
use serde_json::value::RawValue;
use serde_json::{Map, Number, Value};
use thiserror::Error;

use super::complaint::{Complain, MOST_COMPLAINTS, Place};
use super::syntax::{SyntaxFault, diagnose};
use super::text::{Position, TextError, offset_within};
use super::wording::quoted;

/// The most values a document may hold: it bounds the memory that a file within the size limit can
/// take (about 100 bytes a value).
pub(super) const MOST_VALUES: usize = 2_000_000;

/// Why a document could not be read.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[non_exhaustive]
pub enum ParseError {
    /// The bytes are not a text.
    #[error(transparent)]
    Text(#[from] TextError),
    /// The text is not JSON.
    #[error("{fault}")]
    Syntax {
        /// Where.
        position: Position,
        /// What is wrong there.
        fault: SyntaxFault,
    },
    /// A key occurs twice in one object: one of the two would be lost in silence.
    #[error("the key {} occurs twice in the same object", quoted(.key))]
    RepeatedKey {
        /// The key.
        key: String,
        /// Its first place.
        first: Position,
        /// Its second place.
        second: Position,
    },
}

impl Complain for ParseError {
    fn place(&self) -> Place {
        match self {
            Self::Text(error) => error.place(),
            Self::Syntax { position, .. } | Self::RepeatedKey { second: position, .. } => {
                Place::Position(*position)
            }
        }
    }

    fn expected(&self) -> Option<String> {
        match self {
            Self::Text(error) => error.expected(),
            Self::Syntax { fault, .. } => fault.expected(),
            Self::RepeatedKey { .. } => Some("every key once".into()),
        }
    }

    fn advice(&self) -> Option<String> {
        match self {
            Self::Text(error) => error.advice(),
            Self::Syntax { fault, .. } => fault.advice(),
            Self::RepeatedKey { first, .. } => {
                Some(format!("it is first given at line {}, column {}", first.line, first.column))
            }
        }
    }
}

/// The value that `text` holds.
///
/// # Errors
/// One syntax error, or all the repeated keys (the first of them, when there are very many).
pub(super) fn parse(text: &str) -> Result<Value, Vec<ParseError>> {
    let findings = RefCell::new(Findings::default());
    let mut source = serde_json::Deserializer::from_str(text);
    let read = Reader { text, findings: &findings }
        .deserialize(&mut source)
        .and_then(|value| source.end().map(|()| value));
    let findings = findings.into_inner();
    let value = read.map_err(|error| {
        let (offset, fault) = findings.stopped.unwrap_or_else(|| diagnose(text, &error));
        vec![ParseError::Syntax { position: Position::of(text, offset), fault }]
    })?;
    if findings.repeats.is_empty() {
        return Ok(value);
    }
    let told = |repeat: Repeat| ParseError::RepeatedKey {
        key: repeat.key,
        first: Position::of(text, repeat.first),
        second: Position::of(text, repeat.second),
    };
    Err(findings.repeats.into_iter().map(told).collect())
}

/// A key that occurs twice, and the bytes where.
struct Repeat {
    key: String,
    first: usize,
    second: usize,
}

/// What the pass has noticed beside the values.
#[derive(Default)]
struct Findings {
    values: usize,
    repeats: Vec<Repeat>,
    /// A fault that `serde_json` would not have seen.
    stopped: Option<(usize, SyntaxFault)>,
}

/// Reads one value of the text.
#[derive(Clone, Copy)]
struct Reader<'t, 'f> {
    text: &'t str,
    findings: &'f RefCell<Findings>,
}

impl<'t> DeserializeSeed<'t> for Reader<'t, '_> {
    type Value = Value;

    fn deserialize<D: serde::Deserializer<'t>>(self, source: D) -> Result<Value, D::Error> {
        source.deserialize_any(self)
    }
}

impl<'t> Reader<'t, '_> {
    fn count(&self, offset: usize) -> Result<(), SyntaxFault> {
        let mut findings = self.findings.borrow_mut();
        findings.values += 1;
        if findings.values <= MOST_VALUES {
            return Ok(());
        }
        findings.stopped = Some((offset, SyntaxFault::TooMany));
        Err(SyntaxFault::TooMany)
    }

    /// A key without its escapes.
    fn key(&self, raw: &str, offset: usize) -> Result<String, serde_json::Error> {
        serde_json::from_str(raw).inspect_err(|error| {
            let (within, fault) = diagnose(raw, error);
            self.findings.borrow_mut().stopped = Some((offset + within, fault));
        })
    }

    fn note_repeat(&self, key: &str, map: &Map<String, Value>, offsets: &[usize], second: usize) {
        let mut findings = self.findings.borrow_mut();
        if findings.repeats.len() <= MOST_COMPLAINTS {
            let index = map.keys().position(|known| known == key);
            let first = index.and_then(|index| offsets.get(index)).copied().unwrap_or(second);
            findings.repeats.push(Repeat { key: key.to_owned(), first, second });
        }
    }
}

impl<'t> Visitor<'t> for Reader<'t, '_> {
    type Value = Value;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a JSON value")
    }

    fn visit_unit<E>(self) -> Result<Value, E> {
        Ok(Value::Null)
    }

    fn visit_bool<E>(self, truth: bool) -> Result<Value, E> {
        Ok(Value::Bool(truth))
    }

    fn visit_i64<E>(self, number: i64) -> Result<Value, E> {
        Ok(number.into())
    }

    fn visit_u64<E>(self, number: u64) -> Result<Value, E> {
        Ok(number.into())
    }

    fn visit_f64<E: serde::de::Error>(self, number: f64) -> Result<Value, E> {
        let number = Number::from_f64(number).ok_or_else(|| E::custom("number out of range"))?;
        Ok(Value::Number(number))
    }

    fn visit_str<E>(self, text: &str) -> Result<Value, E> {
        Ok(Value::String(text.to_owned()))
    }

    fn visit_seq<A: SeqAccess<'t>>(self, mut entries: A) -> Result<Value, A::Error> {
        let mut list = Vec::new();
        while let Some(entry) = entries.next_element_seed(self)? {
            self.count(0).map_err(A::Error::custom)?;
            list.push(entry);
        }
        Ok(Value::Array(list))
    }

    fn visit_map<A: MapAccess<'t>>(self, mut entries: A) -> Result<Value, A::Error> {
        let mut map = Map::new();
        let mut offsets = Vec::new();
        while let Some(raw) = entries.next_key::<&RawValue>()? {
            let offset = offset_within(self.text, raw.get()).unwrap_or_default();
            self.count(offset).map_err(A::Error::custom)?;
            let key = self.key(raw.get(), offset).map_err(A::Error::custom)?;
            let entry = entries.next_value_seed(self)?;
            if map.contains_key(&key) {
                self.note_repeat(&key, &map, &offsets, offset);
            } else {
                map.insert(key, entry);
                offsets.push(offset);
            }
        }
        Ok(Value::Object(map))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;
    use serde_json::json;
    use std::time::{Duration, Instant};

    fn told(text: &str) -> String {
        let lines = parse(text).unwrap_err().into_iter().map(|error| {
            let Place::Position(at) = error.place() else { panic!("no position: {error:?}") };
            let more = [error.expected(), error.advice()].into_iter().flatten();
            let more: String = more.map(|line| format!(" | {line}")).collect();
            format!("{}:{}: {error}{more}", at.line, at.column)
        });
        lines.collect::<Vec<_>>().join("\n")
    }

    #[test]
    fn order_and_numbers_are_kept() {
        let value = parse("{\"b\": [1, -2, 0.1, -0.0], \"a\": {\"é\\u0041\": null}}").unwrap();
        assert_eq!(value, json!({"b": [1, -2, 0.1, -0.0], "a": {"éA": null}}));
        assert_eq!(value.as_object().unwrap().keys().collect::<Vec<_>>(), ["b", "a"]);
        assert_eq!(value["b"][3].as_f64().map(f64::to_bits), Some((-0.0_f64).to_bits()));
    }

    #[test]
    fn a_key_that_a_library_uses_inside_is_a_key_like_any_other() {
        let text =
            r#"{"$serde_json::private::RawValue": "{}", "$serde_json::private::Number": "1"}"#;
        assert_eq!(parse(text).unwrap().as_object().unwrap().len(), 2);
    }

    #[test]
    fn repeated_keys_are_told_with_both_places() {
        insta::assert_snapshot!(told("{\"a\": 1,\n \"b\": [{\"c\": 1, \"\\u0063\": 2}],\n \"a\": 2}"), @r#"
        2:17: the key "c" occurs twice in the same object | every key once | it is first given at line 2, column 9
        3:2: the key "a" occurs twice in the same object | every key once | it is first given at line 1, column 2
        "#);
    }

    #[test]
    fn slips_of_the_pen_are_told_in_place() {
        let slips = [
            "{\"a\": NaN}",
            "{\"a\": -Infinity}",
            "[1, inf]",
            "[1,\n 1e999]",
            "[-1e999]",
            "[01]",
            "[+1]",
            "[.5]",
            "[1.]",
            "[1.5.2]",
            "[1,]",
            "{\"a\": 1,}",
            "{a: 1}",
            "{'a': 1}",
            "[True]",
            "[tru]",
            "[flat]",
            "// hello\n{}",
            "{\"a\": 1 // one\n}",
            "{\"a\" 1}",
            "{\"a\": 1\n \"b\": 2}",
            "[1 2]",
            "{} x",
            "[\"a\nb\"]",
            "[\"\\q\"]",
            "[\"\\ud800\"]",
            "{\"\\ud800\": 1}",
            "[\"abc",
            "[1, ",
            "{\"a\":",
            "{",
            "]",
            "[é]",
            "{\"é\": é}",
        ];
        let all: Vec<String> = slips
            .iter()
            .map(|slip| format!("{}  =>  {}", slip.escape_debug(), told(slip)))
            .collect();
        insta::assert_snapshot!(all.join("\n"), @r#"
        {\"a\": NaN}  =>  1:7: JSON has no NaN | a finite number
        {\"a\": -Infinity}  =>  1:7: JSON has no -Infinity | a finite number
        [1, inf]  =>  1:5: JSON has no inf | a finite number
        [1,\n 1e999]  =>  2:2: the number 1e999 is beyond ±1.8e308 | a finite number
        [-1e999]  =>  1:2: the number -1e999 is beyond ±1.8e308 | a finite number
        [01]  =>  1:2: 01 is not how JSON writes a number | write it as 0.5, 1.0 or 1e-7: no plus sign in front, no leading zero, digits on both sides of the point
        [+1]  =>  1:2: +1 is not how JSON writes a number | write it as 0.5, 1.0 or 1e-7: no plus sign in front, no leading zero, digits on both sides of the point
        [.5]  =>  1:2: .5 is not how JSON writes a number | write it as 0.5, 1.0 or 1e-7: no plus sign in front, no leading zero, digits on both sides of the point
        [1.]  =>  1:2: 1. is not how JSON writes a number | write it as 0.5, 1.0 or 1e-7: no plus sign in front, no leading zero, digits on both sides of the point
        [1.5.2]  =>  1:2: 1.5.2 is not how JSON writes a number | write it as 0.5, 1.0 or 1e-7: no plus sign in front, no leading zero, digits on both sides of the point
        [1,]  =>  1:4: there is a comma before a closing bracket | take the comma away
        {\"a\": 1,}  =>  1:9: there is a comma before a closing bracket | take the comma away
        {a: 1}  =>  1:2: the key a is not in quotes | a key in double quotes | did you mean "a"?
        {\'a\': 1}  =>  1:2: JSON has double quotes only | write " instead of '
        [True]  =>  1:2: True is not in quotes | a number, true, false, null or a text in quotes | did you mean true?
        [tru]  =>  1:2: tru is not in quotes | a number, true, false, null or a text in quotes | did you mean true?
        [flat]  =>  1:2: flat is not in quotes | a number, true, false, null or a text in quotes | did you mean "flat"?
        // hello\n{}  =>  1:1: JSON has no comments | write a remark under the key "note"
        {\"a\": 1 // one\n}  =>  1:9: JSON has no comments | write a remark under the key "note"
        {\"a\" 1}  =>  1:6: "1" is not expected here | a colon
        {\"a\": 1\n \"b\": 2}  =>  2:2: a text in quotes is not expected here | a comma or "}"
        [1 2]  =>  1:4: "2" is not expected here | a comma or "]"
        {} x  =>  1:4: "x" follows after the end of the document | the end of the file
        [\"a\nb\"]  =>  1:4: a text in quotes holds a line break, a tab or another control character | close the quotes on the same line; a line break is written \n
        [\"\\q\"]  =>  1:4: a backslash is followed by what it cannot be followed by | a backslash itself is written \\
        [\"\\ud800\"]  =>  1:9: a backslash is followed by what it cannot be followed by | a backslash itself is written \\
        {\"\\ud800\": 1}  =>  1:9: a backslash is followed by what it cannot be followed by | a backslash itself is written \\
        [\"abc  =>  1:6: the file ends in the middle of a text in quotes
        [1,   =>  1:5: the file ends in the middle of a value
        {\"a\":  =>  1:6: the file ends in the middle of a value
        {  =>  1:2: the file ends in the middle of an object
        ]  =>  1:1: "]" is not expected here | a value
        [é]  =>  1:2: é is not in quotes | a number, true, false, null or a text in quotes | did you mean "é"?
        {\"é\": é}  =>  1:7: é is not in quotes | a number, true, false, null or a text in quotes | did you mean "é"?
        "#);
    }

    #[test]
    fn deep_nesting_is_an_error_and_quick() {
        let start = Instant::now();
        for open in ["[", "{\"a\":"] {
            let text = open.repeat(100_000);
            assert!(told(&text).contains("nested more than 127 deep"));
        }
        assert!(start.elapsed() < Duration::from_secs(1));
        let deep = |depth| "[".repeat(depth) + &"]".repeat(depth);
        assert!(parse(&deep(127)).is_ok());
        assert!(parse(&deep(128)).is_err());
    }

    #[test]
    fn more_values_than_any_document_has_are_refused() {
        let text = format!("[{}0]", "0,".repeat(MOST_VALUES));
        assert!(told(&text).contains("holds more than 2000000 values"));
    }

    #[test]
    fn many_repeats_are_quick() {
        let distinct: String = (0..200_000).map(|key| format!("\"{key}\":0,")).collect();
        let text = format!("{{{distinct}{}\"0\":0}}", "\"199999\":0,".repeat(200_000));
        let start = Instant::now();
        assert_eq!(parse(&text).unwrap_err().len(), MOST_COMPLAINTS + 1);
        assert!(start.elapsed() < Duration::from_secs(10));
    }

    proptest! {
        #[test]
        fn agrees_with_the_library_on_any_json_like_text(text in "[\\[\\]{}\",:0-9eE.+\\-truefalsn\\\\u \n]{0,40}") {
            match (parse(&text), serde_json::from_str::<Value>(&text)) {
                (Ok(ours), theirs) => prop_assert_eq!(ours, theirs.unwrap()),
                (Err(errors), Ok(_)) => {
                    let repeats = errors.iter().all(|e| matches!(e, ParseError::RepeatedKey { .. }));
                    prop_assert!(repeats, "{:?}", errors);
                }
                (Err(errors), Err(_)) => prop_assert_eq!(errors.len(), 1),
            }
        }
    }
}
