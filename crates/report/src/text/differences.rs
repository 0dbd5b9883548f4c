//! What differs between two designs, as a table.

use driver::change::Difference;
use serde_json::Value;

use super::number::{NONE, as_written, fixed, significant};
use super::table::{ARROW, Column, Table};

/// A table of differences, a line each: from, to, by how much in the unit its key names and in per
/// cent; empty if there is none. `head` names what moved.
#[must_use]
pub fn differences(head: &str, differences: &[&Difference]) -> String {
    let mut table = Table::new([
        (Column::Place, head),
        (Column::From, "from"),
        (Column::Arrow, ""),
        (Column::Right, "to"),
        (Column::Right, "by"),
        (Column::Right, "by %"),
    ]);
    for difference in differences {
        table.row([
            difference.at.to_string(),
            value(difference.from.as_ref()),
            ARROW.to_owned(),
            value(difference.to.as_ref()),
            difference.by.map_or_else(|| NONE.to_owned(), small),
            difference.by_percent.map_or_else(|| NONE.to_owned(), |percent| signed(percent, 2)),
        ]);
    }
    table.text()
}

/// A number with its sign, the plus too.
pub(crate) fn signed(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    let is_zero = text.bytes().all(|byte| matches!(byte, b'0' | b'.'));
    if value > 0.0 && !is_zero && text != NONE { format!("+{text}") } else { text }
}

/// A step: three decimals, of a very small one two digits.
fn small(by: f64) -> String {
    if by == 0.0 || by.abs() >= 0.0005 {
        return signed(by, 3);
    }
    let digits = significant(by.abs(), 2);
    format!("{}{digits}", if by < 0.0 { '-' } else { '+' })
}

fn value(value: Option<&Value>) -> String {
    match value {
        None => NONE.to_owned(),
        Some(Value::Number(number)) => {
            number.as_f64().map_or_else(|| number.to_string(), number_as_read)
        }
        Some(Value::String(text)) => text.clone(),
        Some(Value::Object(map)) => match map.get("name").and_then(Value::as_str) {
            Some(name) => name.to_owned(),
            None => "{…}".to_owned(),
        },
        Some(Value::Array(list)) => format!("[{}]", list.len()),
        Some(other) => other.to_string(),
    }
}

/// Three decimals, unless that would hide digits that were written.
fn number_as_read(number: f64) -> String {
    let short = as_written(number);
    let three = fixed(number, 3);
    if short.len() <= three.len() || number.abs() < 0.0005 { short } else { three }
}
