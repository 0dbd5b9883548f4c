//! One look for all tables: no lines, two spaces between columns, numbers to the right.

use comfy_table::{Cell, CellAlignment, ContentArrangement, Table as Grid, presets};

/// Which way a column leans.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Column {
    /// Words.
    Left,
    /// Numbers.
    Right,
    /// Numbers with an arrow to the next column.
    From,
    /// The arrow.
    Arrow,
}

/// The sign between before and after.
pub(crate) const ARROW: &str = "→";

/// A blank that keeps its place at the end of a cell until the table is laid out.
pub(crate) const BLANK: char = '\u{a0}';

/// A table in the making: laid out as text here, as a part of the page in [`crate::page`].
pub(crate) struct Table {
    columns: Vec<Column>,
    heads: Vec<String>,
    rows: Vec<Vec<String>>,
}

impl Table {
    /// A table with these heads; a head of several lines stands at the bottom of its row.
    pub(crate) fn new<'a>(heads: impl IntoIterator<Item = (Column, &'a str)>) -> Self {
        let (columns, heads) =
            heads.into_iter().map(|(column, head)| (column, head.to_owned())).unzip();
        Self { columns, heads, rows: Vec::new() }
    }

    /// Adds a row.
    pub(crate) fn row(&mut self, cells: impl IntoIterator<Item = String>) {
        self.rows.push(cells.into_iter().collect());
    }

    /// Whether no row has been added.
    pub(crate) fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// Which way each column leans, and its head, perhaps of several lines.
    pub(crate) fn columns(&self) -> impl Iterator<Item = (Column, &str)> {
        self.columns.iter().copied().zip(self.heads.iter().map(String::as_str))
    }

    /// The rows in their order.
    pub(crate) fn rows(&self) -> &[Vec<String>] {
        &self.rows
    }

    /// The table as text, without blanks at the ends of lines.
    pub(crate) fn text(self) -> String {
        let mut grid = Grid::new();
        grid.load_style(presets::NOTHING);
        grid.set_content_arrangement(ContentArrangement::Disabled);
        let lines = self.heads.iter().map(|head| height(head)).max().unwrap_or(0);
        grid.set_header(self.heads.iter().map(|head| {
            let above = lines - height(head);
            Cell::new(format!("{}{head}", "\n".repeat(above)))
        }));
        for row in self.rows {
            grid.add_row(row.into_iter().map(Cell::new));
        }
        for (column, leaning) in grid.column_iter_mut().zip(&self.columns) {
            let (alignment, gap) = match leaning {
                Column::Left => (CellAlignment::Left, 2),
                Column::Right => (CellAlignment::Right, 2),
                Column::From => (CellAlignment::Right, 1),
                Column::Arrow => (CellAlignment::Left, 1),
            };
            column.set_padding((0, gap));
            column.set_cell_alignment(alignment);
        }
        let text = grid.to_string().replace(BLANK, " ");
        let lines: Vec<&str> = text.lines().map(str::trim_end).collect();
        lines.join("\n")
    }
}

/// Lines a head takes up, at least one.
fn height(head: &str) -> usize {
    head.lines().count().max(1)
}
