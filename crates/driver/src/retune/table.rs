//! Tables as people keep them (RFC 4180): a line of heads, a line a row, commas between; every cell
//! with its line and column, so that a mistake in it can be found.

use surface_model::document::{Complaint, Complaints, Place, Position, Source};

/// Most cells of a table, heads and all: some tens of megabytes.
const MOST_CELLS: usize = 1_000_000;

/// After so many wrong rows no more are looked for.
const MOST_WRONG: usize = 1000;

/// One cell, blanks around it taken off.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Cell {
    /// What stands in it.
    pub(crate) text: String,
    /// Where it begins.
    pub position: Position,
}

/// A table.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Table {
    label: String,
    heads: Vec<Cell>,
    rows: Vec<Vec<Cell>>,
}

impl Table {
    /// Reads a table; `label` is what messages call it. Empty lines are passed over.
    ///
    /// # Errors
    /// It is not UTF-8, has no heads, or a row has more or fewer cells than there are heads.
    pub fn read(label: impl Into<String>, bytes: &[u8]) -> Result<Self, Complaints> {
        let label = label.into();
        let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
        let mut table = Self { label, heads: Vec::new(), rows: Vec::new() };
        let text = std::str::from_utf8(bytes).map_err(|error| {
            let before = String::from_utf8_lossy(&bytes[..error.valid_up_to()]).into_owned();
            let found = "the table is not UTF-8 from here on";
            table.refuse(vec![(Some(end_of(&before)), plain(found, "a table saved as UTF-8"))])
        })?;
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .from_reader(text.as_bytes());
        let mut places = Places::new(text);
        let mut wrong = Vec::new();
        let mut count = 0;
        for record in reader.records() {
            let record = record.map_err(|error| {
                table.refuse(vec![(
                    None,
                    plain(
                        &format!("the table cannot be read: {error}"),
                        "a table with commas between its cells",
                    ),
                )])
            })?;
            let start = record.position().map_or(0, |position| position.byte());
            let cells = places.cells(usize::try_from(start).unwrap_or(usize::MAX), &record);
            count += cells.len();
            if count > MOST_CELLS {
                let position = cells.first().map(|cell| cell.position);
                let found = format!("up to here the table has {count} cells");
                let expected = format!("at most {MOST_CELLS}: split the table");
                return Err(table.refuse(vec![(position, plain(&found, &expected))]));
            }
            if table.heads.is_empty() {
                table.heads = cells;
                continue;
            }
            if cells.len() != table.heads.len() {
                let found = format!("the row has {}", counted(cells.len()));
                let expected = format!("{}, one for each head", counted(table.heads.len()));
                let position = cells.first().map(|cell| cell.position);
                wrong.push((position, plain(&found, &expected)));
                if wrong.len() == MOST_WRONG {
                    break;
                }
            }
            table.rows.push(cells);
        }
        if table.heads.is_empty() {
            wrong.push((None, plain("the table is empty", "a line of heads, then a line a row")));
        }
        if wrong.is_empty() { Ok(table) } else { Err(table.refuse(wrong)) }
    }

    /// The heads.
    #[must_use]
    pub(crate) fn heads(&self) -> &[Cell] {
        &self.heads
    }

    /// The rows, each with as many cells as there are heads.
    #[must_use]
    pub fn rows(&self) -> &[Vec<Cell>] {
        &self.rows
    }

    /// Where a cell stands, for messages.
    #[must_use]
    pub(crate) fn source(&self, position: Position) -> Source {
        Source { label: self.label.clone(), position: Some(position) }
    }

    /// Complaints about the table.
    #[must_use]
    pub(crate) fn refuse(&self, complaints: Vec<(Option<Position>, Complaint)>) -> Complaints {
        let source = |position| Source { label: self.label.clone(), position };
        let list = complaints.into_iter().map(|(at, complaint)| (source(at), complaint));
        Complaints::elsewhere(&self.label, list.collect(), &serde_json::Value::Null)
    }
}

fn plain(found: &str, expected: &str) -> Complaint {
    let (found, expected) = (found.to_owned(), Some(expected.to_owned()));
    Complaint { place: Place::File, found, expected, advice: None }
}

fn counted(cells: usize) -> String {
    if cells == 1 { "1 cell".to_owned() } else { format!("{cells} cells") }
}

/// Where a text ends.
fn end_of(text: &str) -> Position {
    let line = text.matches('\n').count() + 1;
    let column = text.rsplit('\n').next().unwrap_or_default().chars().count() + 1;
    Position { line, column }
}

/// Finds cells in the text, from the front on, in time in proportion to its length.
struct Places<'a> {
    text: &'a str,
    /// The byte up to which lines and columns have been counted.
    seen: usize,
    /// Of the character at `seen`.
    position: Position,
}

impl<'a> Places<'a> {
    fn new(text: &'a str) -> Self {
        Self { text, seen: 0, position: Position { line: 1, column: 1 } }
    }

    /// The cells of a record that begins at or behind byte `start`.
    fn cells(&mut self, start: usize, record: &csv::StringRecord) -> Vec<Cell> {
        while self.seen < start && self.step().is_some() {}
        // Empty lines before a record count as its own.
        while self.ahead().is_some_and(|c| matches!(c, '\n' | '\r')) {
            self.step();
        }
        record
            .iter()
            .map(|text| {
                let cell = Cell { text: text.trim().to_owned(), position: self.position };
                self.pass_cell();
                cell
            })
            .collect()
    }

    /// Steps behind the comma that ends a cell, or to the end of its line.
    fn pass_cell(&mut self) {
        // Quotes mean something only around a whole cell; inside them they stand twice.
        let mut quoted = self.ahead() == Some('"');
        if quoted {
            self.step();
        }
        while let Some(c) = self.ahead() {
            if !quoted && matches!(c, '\n' | '\r') {
                return;
            }
            self.step();
            if quoted && c == '"' {
                quoted = self.ahead() == Some('"');
                if quoted {
                    self.step();
                }
            } else if !quoted && c == ',' {
                return;
            }
        }
    }

    fn ahead(&self) -> Option<char> {
        self.text.get(self.seen..)?.chars().next()
    }

    /// Passes one character. A line ends with a line feed, a carriage return, or both.
    fn step(&mut self) -> Option<char> {
        let c = self.ahead()?;
        self.seen += c.len_utf8();
        let Position { line, column } = self.position;
        self.position = match (c, self.ahead()) {
            ('\r', Some('\n')) => Position { line, column },
            ('\n' | '\r', _) => Position { line: line + 1, column: 1 },
            _ => Position { line, column: column + 1 },
        };
        Some(c)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn told(text: &[u8]) -> String {
        match Table::read("units.csv", text) {
            Err(complaints) => complaints.to_string(),
            Ok(table) => {
                let cell = |cell: &Cell| {
                    format!("{}:{} {:?}", cell.position.line, cell.position.column, cell.text)
                };
                let row = |row: &Vec<Cell>| row.iter().map(cell).collect::<Vec<_>>().join(" | ");
                let rows: Vec<String> =
                    std::iter::once(&table.heads).chain(&table.rows).map(row).collect();
                rows.join("\n")
            }
        }
    }

    #[test]
    fn every_cell_knows_its_place() {
        insta::assert_snapshot!(told(
            "\u{feff}serial,/a, /b\r\n\r\nZ-1,\"1,5\", é2\r\n\"Z\n2\",3,4\r\n".as_bytes()
        ));
    }

    #[test]
    fn what_is_no_table_is_told_with_its_place() {
        let all =
            [&b""[..], b"\n\n", b"serial,/a\nZ-1,2\nZ-2\nZ-3,1,2\n", b"serial,/a\nZ-1,\xff\n"];
        insta::assert_snapshot!(all.map(told).join("\n"));
    }

    proptest::proptest! {
        #[test]
        fn anything_is_read_or_refused(text in "[a\",;\n\r é]{0,40}") {
            let Ok(table) = Table::read("any", text.as_bytes()) else { return Ok(()) };
            let text = text.replace("\r\n", "\n").replace('\r', "\n");
            for cell in table.rows.iter().flatten().chain(&table.heads) {
                let Position { line, column } = cell.position;
                let line = text.split('\n').nth(line - 1).unwrap();
                let there: String = line.chars().skip(column - 1).collect();
                let holds = there.starts_with('"') || there.trim_start().starts_with(&cell.text);
                proptest::prop_assert!(holds, "{:?} in {:?}", cell, text);
            }
        }
    }
}
