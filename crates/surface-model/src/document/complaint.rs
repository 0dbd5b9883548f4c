//! What is wrong with a document, as people and machines read it.

use std::error::Error;
use std::fmt;

use serde_json::{Value, json};

use super::Document;
use super::address::Address;
use super::locate::locate;
use super::text::Position;
use super::wording::printable;

/// The most complaints that are told at once; of the rest only the number.
pub(super) const MOST_COMPLAINTS: usize = 20;

/// Longest line of a message, in characters.
const LONGEST_LINE: usize = 400;

/// What a complaint is about.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Place {
    /// The value at an address, with indices for entries of lists. If it does not exist, the
    /// nearest thing around it that does.
    Value(Address),
    /// The key at an address.
    Key(Address),
    /// A place in the text.
    Position(Position),
    /// The file as a whole.
    File,
}

/// An error about a document. Its `Display` is one sentence that tells what was found, without a
/// full stop; each crate's typed errors about its own keys implement it and so become
/// [`Complaint`]s.
pub trait Complain: fmt::Display {
    /// Where it is.
    fn place(&self) -> Place;

    /// What would have been right, as it goes on after "expected:".
    fn expected(&self) -> Option<String> {
        None
    }

    /// What to do about it, such as `did you mean "exit"?`.
    fn advice(&self) -> Option<String> {
        None
    }
}

/// One thing that is wrong with a document.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Complaint {
    /// What it is about.
    pub place: Place,
    /// What was found, one sentence without a full stop.
    pub found: String,
    /// What would have been right.
    pub expected: Option<String>,
    /// What to do about it.
    pub advice: Option<String>,
}

impl<E: Complain> From<E> for Complaint {
    fn from(error: E) -> Self {
        Self {
            place: error.place(),
            found: error.to_string(),
            expected: error.expected(),
            advice: error.advice(),
        }
    }
}

/// All that is wrong with a document, in the order of its text. Never empty.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Complaints {
    label: String,
    told: Vec<Placed>,
    untold: usize,
}

/// Where words stand that are no document: on the command line, in a table.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Source {
    /// What messages call it: an option with its value, the path of a table.
    pub label: String,
    /// Line and column in it, where it has any.
    pub position: Option<Position>,
}

/// A complaint and where it belongs.
#[derive(Debug, Clone, PartialEq, Eq)]
struct Placed {
    /// What to call the place where that is not the file all complaints are about.
    label: Option<String>,
    position: Option<Position>,
    /// The address with names for people.
    at: Option<Address>,
    complaint: Complaint,
}

impl Complaints {
    /// About a file that could not be read as a document.
    pub(super) fn unread(label: &str, list: Vec<Complaint>) -> Self {
        Self::sorted(label, list, 0, |complaint| Placed {
            label: None,
            position: match &complaint.place {
                Place::Position(position) => Some(*position),
                _ => None,
            },
            at: None,
            complaint,
        })
    }

    /// About words that are no document, each complaint with its source; `label` is what the whole
    /// is called where more are found than are listed. A place that is an address is one of
    /// `document`, and told with its names.
    pub fn elsewhere(label: &str, list: Vec<(Source, Complaint)>, document: &Value) -> Self {
        let untold = list.len().saturating_sub(MOST_COMPLAINTS);
        let place = |(source, complaint): (Source, Complaint)| {
            let at = match &complaint.place {
                Place::Value(at) | Place::Key(at) => Some(at.with_names(document)),
                Place::Position(_) | Place::File => None,
            };
            Placed { label: Some(source.label), position: source.position, at, complaint }
        };
        let told = list.into_iter().take(MOST_COMPLAINTS).map(place).collect();
        Self { label: label.to_owned(), told, untold }
    }

    /// About a document; `untold` more were found and not listed.
    pub(super) fn about(document: &Document, list: Vec<Complaint>, untold: usize) -> Self {
        Self::sorted(document.label(), list, untold, |complaint| placed(document, complaint))
    }

    fn sorted(
        label: &str,
        mut list: Vec<Complaint>,
        untold: usize,
        place: impl Fn(Complaint) -> Placed,
    ) -> Self {
        let untold = untold + list.len().saturating_sub(MOST_COMPLAINTS);
        list.truncate(MOST_COMPLAINTS);
        let mut told: Vec<Placed> = list.into_iter().map(place).collect();
        told.sort_by_key(|placed| placed.position);
        Self { label: label.to_owned(), told, untold }
    }

    /// The complaints, in the order of the text.
    pub fn iter(&self) -> impl Iterator<Item = &Complaint> {
        self.told.iter().map(|placed| &placed.complaint)
    }

    /// How many there are, with those that are not listed.
    pub fn count(&self) -> usize {
        self.told.len() + self.untold
    }

    /// The same for machines: an object with `problems`, a list of objects with `file`, `line`,
    /// `column`, `at`, `found`, `expected` and `advice` (null where there is none), and `more`, the
    /// number of problems that are not listed.
    pub fn to_json(&self) -> Value {
        let problem = |placed: &Placed| {
            json!({
                "file": placed.label.as_ref().unwrap_or(&self.label),
                "line": placed.position.map(|position| position.line),
                "column": placed.position.map(|position| position.column),
                "at": placed.at,
                "found": placed.complaint.found,
                "expected": placed.complaint.expected,
                "advice": placed.complaint.advice,
            })
        };
        json!({ "problems": self.told.iter().map(problem).collect::<Vec<_>>(), "more": self.untold })
    }
}

fn placed(document: &Document, complaint: Complaint) -> Placed {
    let (position, at) = match &complaint.place {
        Place::Value(at) => (Some(document.position(at)), Some(at)),
        Place::Key(at) => (Some(document.key_position(at)), Some(at)),
        Place::Position(position) => (Some(*position), None),
        Place::File => (None, None),
    };
    let at = at.map(|at| at.with_names(document.value()));
    Placed { label: None, position, at, complaint }
}

impl Document {
    /// Where the value at `address` (with indices for entries of lists) begins in the text; if it
    /// does not exist, the nearest thing around it that does.
    pub fn position(&self, address: &Address) -> Position {
        Position::of(self.text(), locate(self.text(), address).value)
    }

    /// Where the key at `address` begins in the text, or the value if it has no key.
    fn key_position(&self, address: &Address) -> Position {
        let located = locate(self.text(), address);
        let exists = located.steps == address.steps().len();
        let offset = located.key.filter(|_| exists).unwrap_or(located.value);
        Position::of(self.text(), offset)
    }
}

impl fmt::Display for Complaints {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let label = printable(&self.label, LONGEST_LINE);
        for (index, placed) in self.told.iter().enumerate() {
            if index > 0 {
                writeln!(f)?;
            }
            match &placed.label {
                Some(label) => write!(f, "{}:", printable(label, LONGEST_LINE))?,
                None => write!(f, "{label}:")?,
            }
            if let Some(Position { line, column }) = placed.position {
                write!(f, "{line}:{column}:")?;
            }
            write!(f, " {}", printable(&placed.complaint.found, LONGEST_LINE))?;
            let Complaint { expected, advice, .. } = &placed.complaint;
            let at = placed.at.as_ref().filter(|at| at.last().is_some());
            if let Some(at) = at {
                write!(f, "\n  at {}", printable(&at.to_string(), LONGEST_LINE))?;
            }
            if let Some(expected) = expected {
                write!(f, "\n  expected: {}", printable(expected, LONGEST_LINE))?;
            }
            if let Some(advice) = advice {
                write!(f, "\n  {}", printable(advice, LONGEST_LINE))?;
            }
        }
        if self.untold > 0 {
            write!(f, "\n{label}: and {} more", self.untold)?;
        }
        Ok(())
    }
}

impl Error for Complaints {}
