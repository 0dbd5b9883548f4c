//! What judges ask of every answer.

use std::fmt::Debug;

use surface_model::document::Complaints;

pub(super) fn holds(truth: bool, otherwise: impl FnOnce() -> String) -> Result<(), String> {
    if truth { Ok(()) } else { Err(otherwise()) }
}

/// Every complaint has a line and a column, and nothing that upsets a terminal.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn refusal(complaints: &Complaints) -> Result<(), String> {
    let json = complaints.to_json();
    let problems = json["problems"].as_array().ok_or("no list of problems")?;
    for problem in problems {
        // What is wrong with the whole of a file has no place of its own.
        let placed = problem["line"].is_u64() && problem["column"].is_u64()
            || ["the text is in UTF-16", "the text is in UTF-32", "the file is empty"]
                .iter()
                .any(|whole| problem["found"] == *whole);
        holds(placed, || format!("no place: {problem}"))?;
    }
    complaint(complaints)
}

/// The complaints say something, in words that do not upset a terminal, and not without end.
pub(super) fn complaint(complaints: &Complaints) -> Result<(), String> {
    let json = complaints.to_json();
    let problems = json["problems"].as_array().ok_or("no list of problems")?;
    holds(!problems.is_empty(), || "refused without a complaint".into())?;
    for problem in problems {
        holds(problem["found"].as_str() != Some(""), || format!("no words: {problem}"))?;
    }
    quiet(&complaints.to_string())
}

/// A message as people read it.
pub(super) fn quiet(told: &str) -> Result<(), String> {
    let quiet = told.chars().all(|c| c == '\n' || !c.is_control());
    holds(quiet, || format!("control characters: {told:?}"))?;
    holds(!told.trim().is_empty(), || "an error without words".into())?;
    holds(told.len() < 60_000, || format!("{} bytes of complaints", told.len()))
}

/// What is printed: no number that is none. Names stand in it as the file has them; it is the
/// program's console that keeps from a terminal what would upset it.
pub(super) fn printed(what: &str, text: &str) -> Result<(), String> {
    numbers(what, text)
}

/// The words `NaN` and `inf` outside quotes in what `Debug` writes: unlike JSON, it hides none.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn finite(what: &str, value: &impl Debug) -> Result<(), String> {
    let text = format!("{value:?}");
    let mut quoted = false;
    let mut escaped = false;
    let bare: String = text
        .chars()
        .filter(|&c| {
            let end = c == '"' && !escaped;
            escaped = quoted && c == '\\' && !escaped;
            quoted ^= end;
            !quoted && !end
        })
        .collect();
    numbers(what, &bare)
}

fn numbers(what: &str, text: &str) -> Result<(), String> {
    let words = text.split(|c: char| !c.is_alphanumeric() && c != '.');
    let bad = words.into_iter().find(|word| matches!(*word, "NaN" | "inf"));
    holds(bad.is_none(), || {
        let at = text.find("NaN").or_else(|| text.find("inf")).unwrap_or(0);
        let around: String =
            text.get(at.saturating_sub(80)..).unwrap_or(text).chars().take(100).collect();
        format!("{what} holds {bad:?}: …{around}…")
    })
}
