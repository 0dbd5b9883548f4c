//! How values and words are put into messages: short, on one line, safe to print.

use std::io;

use serde_json::Value;

/// Longest quotation of somebody's text, in characters.
const QUOTATION: usize = 60;

/// Longest list of words that is given in full.
const LISTED: usize = 12;

/// `text` in double quotes, shortened and escaped.
pub fn quoted(text: &str) -> String {
    format!("\"{}\"", printable(text, QUOTATION))
}

/// `text` without anything that a terminal would act upon, and at most `longest` characters of it.
pub(super) fn printable(text: &str, longest: usize) -> String {
    let mut out = String::new();
    for (count, c) in text.chars().enumerate() {
        if count == longest {
            out.push('…');
            break;
        }
        if c.is_control() || is_invisible(c) {
            out.extend(c.escape_default());
        } else {
            out.push(c);
        }
    }
    out
}

/// Characters that reorder, hide or break the line they stand in.
fn is_invisible(c: char) -> bool {
    matches!(c, '\u{200B}'..='\u{200F}' | '\u{2028}'..='\u{202E}' | '\u{2060}'..='\u{206F}' | '\u{FEFF}')
}

/// What a value is, in plain words: `the number 3.5`, `a list of 3 numbers`.
pub fn in_words(value: &Value) -> String {
    match value {
        Value::Null => "null".into(),
        Value::Bool(truth) => truth.to_string(),
        Value::Number(number) => format!("the number {number}"),
        Value::String(text) => format!("the text {}", quoted(text)),
        Value::Array(entries) => list_in_words(entries),
        Value::Object(entries) if entries.is_empty() => "an empty object".into(),
        Value::Object(_) => "an object".into(),
    }
}

fn list_in_words(entries: &[Value]) -> String {
    if entries.is_empty() {
        return "an empty list".into();
    }
    let kind = if entries.iter().all(Value::is_number) {
        "number"
    } else if entries.iter().all(Value::is_string) {
        "text"
    } else if entries.iter().all(Value::is_object) {
        "object"
    } else {
        return format!("a list with {}", counted(entries.len(), "entry"));
    };
    format!("a list of {}", counted(entries.len(), kind))
}

/// `no texts`, `1 number`, `2 entries`.
pub(super) fn counted(count: usize, noun: &str) -> String {
    let count = if count == 0 { "no".into() } else { count.to_string() };
    match (count.as_str(), noun.strip_suffix('y')) {
        ("1", _) => format!("1 {noun}"),
        (_, Some(stem)) => format!("{count} {stem}ies"),
        _ => format!("{count} {noun}s"),
    }
}

/// `a`, `a or b`, `a, b or c`.
pub(super) fn either(parts: &[String]) -> String {
    match parts {
        [] => String::new(),
        [only] => only.clone(),
        [front @ .., last] => format!("{} or {last}", front.join(", ")),
    }
}

/// `"a"`, `"a" or "b"`, `one of "a", "b", "c"`; a long list is cut.
pub fn one_of<'a>(words: impl IntoIterator<Item = &'a str>) -> String {
    let words: Vec<String> = words.into_iter().map(quoted).collect();
    match words.len() {
        0..=2 => either(&words),
        count if count > LISTED => {
            let shown: Vec<_> = words.into_iter().take(LISTED).collect();
            format!("one of {} and {} more", shown.join(", "), count - LISTED)
        }
        _ => format!("one of {}", words.join(", ")),
    }
}

/// A computed number as a message tells it: to six digits.
#[must_use]
pub fn rounded(number: f64) -> f64 {
    format!("{number:.5e}").parse().unwrap_or(number)
}

/// What the system says about an error, without its number and without the name of a temporary
/// file.
#[must_use]
pub fn system_words(error: &io::Error) -> String {
    let inner = error.get_ref().and_then(|wrapped| wrapped.source());
    let inner = inner.and_then(|inner| inner.downcast_ref::<io::Error>());
    let told = inner.unwrap_or(error).to_string();
    match told.rsplit_once(" (os error ") {
        Some((words, number)) if number.ends_with(')') => words.to_owned(),
        _ => told,
    }
}

/// `did you mean "exit"?`
pub fn did_you_mean(word: &str) -> String {
    format!("did you mean {}?", quoted(word))
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    #[test]
    fn quotations_are_short_and_tame() {
        assert_eq!(quoted("a\u{1b}[31m\nb\u{202e}"), r#""a\u{1b}[31m\nb\u{202e}""#);
        assert_eq!(quoted(&"é".repeat(100)).chars().count(), QUOTATION + 3);
    }

    #[test]
    fn values_are_told_in_plain_words() {
        let told = |value: Value| in_words(&value);
        assert_eq!(told(json!([1, 2.5])), "a list of 2 numbers");
        assert_eq!(told(json!(["flat"])), "a list of 1 text");
        assert_eq!(told(json!([1, null])), "a list with 2 entries");
        assert_eq!(told(json!({})), "an empty object");
        assert_eq!(told(json!("2.4")), "the text \"2.4\"");
        assert_eq!(told(json!(-0.0)), "the number -0.0");
    }

    #[test]
    fn what_the_system_says_has_no_number() {
        let error = io::Error::from_raw_os_error(2);
        assert!(error.to_string().contains("os error 2"));
        assert!(error.to_string().starts_with(&system_words(&error)));
        assert!(!system_words(&error).contains("os error"));
        assert_eq!(system_words(&io::Error::other("it is larger")), "it is larger");
    }

    #[test]
    fn computed_numbers_have_six_digits() {
        assert_eq!(rounded(16.256_722_507_178_56), 16.2567);
        assert_eq!(rounded(-0.000_123_456_789).to_string(), "-0.000123457");
        assert_eq!(rounded(f64::INFINITY), f64::INFINITY);
    }

    #[test]
    fn choices_read_as_a_sentence() {
        assert_eq!(one_of(["a", "b"]), r#""a" or "b""#);
        assert_eq!(one_of(["a", "b", "c"]), r#"one of "a", "b", "c""#);
        assert!(one_of(["x"; 40]).ends_with("and 28 more"));
    }
}
