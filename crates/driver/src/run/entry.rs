//! One line of a journal: an entry with its checksum, as JSON.

use serde::de::DeserializeOwned;
use serde::{Deserialize, Serialize};
use serde_json::value::RawValue;

/// Hexadecimal digits of the BLAKE3 hash that stand in a line: 64 bits.
const DIGITS: usize = 16;

/// What a journal holds. `D` is what a unit yields.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub(super) enum Entry<D> {
    /// A session begins.
    Begin(Begin),
    /// A unit is finished.
    Unit(Unit<D>),
    /// A session is over.
    End(End),
}

/// A session begins.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub(super) struct Begin {
    /// Identity of the run, so that no journal is taken for that of another.
    pub(super) run: String,
    /// The part.
    pub(super) part: super::share::Share,
    /// Units wanted of the whole run.
    pub(super) units: Option<u64>,
    /// Merit that is good enough.
    pub(super) target_merit: Option<f64>,
    /// When, in seconds since 1970.
    pub(super) unix_seconds: u64,
}

/// A unit is finished.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub(super) struct Unit<D> {
    /// Its number.
    pub(super) number: u64,
    /// Seconds of the run.
    pub(super) seconds: f64,
    /// What it yielded.
    pub(super) done: D,
}

/// A session is over.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub(super) struct End {
    /// Seconds of the run.
    pub(super) seconds: f64,
    /// Whether the part is done.
    pub(super) complete: bool,
}

#[derive(Serialize, Deserialize)]
struct Line<'a> {
    check: &'a str,
    #[serde(borrow)]
    entry: &'a RawValue,
}

/// The line of an entry, with its newline.
pub(super) fn encode<D: Serialize>(entry: &Entry<D>) -> Result<Vec<u8>, serde_json::Error> {
    let entry = serde_json::value::to_raw_value(entry)?;
    let check = check_of(entry.get());
    let mut line = serde_json::to_vec(&Line { check: &check, entry: &entry })?;
    line.push(b'\n');
    Ok(line)
}

/// Why a line is not an entry.
#[derive(Debug, thiserror::Error)]
pub(super) enum LineError {
    /// It is not what was written.
    #[error("it is not a line of a journal")]
    Form,
    /// Its checksum is another.
    #[error("its checksum does not hold")]
    Check,
    /// It is what was written, but says something unknown.
    #[error("it cannot be understood: {0}")]
    Meaning(serde_json::Error),
}

/// The entry of a line, given without its newline.
pub(super) fn decode<D: DeserializeOwned>(line: &[u8]) -> Result<Entry<D>, LineError> {
    let text = std::str::from_utf8(line).map_err(|_| LineError::Form)?;
    let Line { check, entry } = serde_json::from_str(text).map_err(|_| LineError::Form)?;
    if check != check_of(entry.get()) {
        return Err(LineError::Check);
    }
    serde_json::from_str(entry.get()).map_err(LineError::Meaning)
}

fn check_of(entry: &str) -> String {
    let mut check = super::ask::hash(entry.as_bytes());
    check.truncate(DIGITS);
    check
}
