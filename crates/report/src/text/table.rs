//! One look for all tables: no lines, two spaces between columns, numbers to the right.

use comfy_table::{Cell, CellAlignment, ContentArrangement, Table as Grid, presets};

use super::WIDTH;

/// Which way a column leans.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Column {
    /// Words.
    Left,
    /// A place, by names or as an address, which is never broken, so that it can be copied: on a
    /// line of its own, its numbers on the next, where the table would be too wide.
    Place,
    /// Numbers.
    Right,
    /// Numbers with an arrow to the next column.
    From,
    /// The arrow.
    Arrow,
}

impl Column {
    /// Blanks before the next column.
    const fn gap(self) -> usize {
        match self {
            Self::Left | Self::Place | Self::Right => 2,
            Self::From | Self::Arrow => 1,
        }
    }
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

    /// How wide a place may be so that the table is at most [`WIDTH`] wide.
    fn room_for_place(&self) -> usize {
        let width_of = |k: usize| {
            let cells = self.rows.iter().filter_map(|row| row.get(k));
            let lines = cells.chain([&self.heads[k]]).flat_map(|text| text.lines());
            lines.map(|line| line.chars().count()).max().unwrap_or(0)
        };
        let others = (0..self.columns.len()).filter(|&k| self.columns[k] != Column::Place);
        let taken: usize = others.map(|k| width_of(k) + self.columns[k].gap()).sum();
        WIDTH.saturating_sub(taken + Column::Place.gap())
    }

    /// Takes the places that are too wide for their column out of their rows: what is left is
    /// laid out, and each goes whole on a line of its own before its row. The line each belongs to.
    fn take_out_wide_places(&mut self, head_lines: usize) -> Vec<(usize, String)> {
        let room = self.room_for_place();
        let place = self.columns.iter().position(|column| *column == Column::Place);
        let Some(place) = place else { return Vec::new() };
        let (mut taken, mut line) = (Vec::new(), head_lines);
        for row in &mut self.rows {
            if let Some(cell) = row.get_mut(place).filter(|cell| cell.chars().count() > room) {
                taken.push((line, std::mem::take(cell)));
            }
            line += row.iter().map(|cell| height(cell)).max().unwrap_or(1);
        }
        taken
    }

    /// The table as text, without blanks at the ends of lines; empty without a row.
    pub(crate) fn text(mut self) -> String {
        if self.rows.is_empty() {
            return String::new();
        }
        let lines = self.heads.iter().map(|head| height(head)).max().unwrap_or(0);
        let wide = self.take_out_wide_places(lines);
        let mut grid = Grid::new();
        grid.load_style(presets::NOTHING);
        grid.set_content_arrangement(ContentArrangement::Disabled);
        grid.set_header(self.heads.iter().map(|head| {
            let above = lines - height(head);
            Cell::new(format!("{}{head}", "\n".repeat(above)))
        }));
        for row in self.rows {
            grid.add_row(row.into_iter().map(Cell::new));
        }
        for (column, leaning) in grid.column_iter_mut().zip(&self.columns) {
            let alignment = match leaning {
                Column::Left | Column::Place | Column::Arrow => CellAlignment::Left,
                Column::Right | Column::From => CellAlignment::Right,
            };
            column.set_padding((0, leaning.gap() as u16));
            column.set_cell_alignment(alignment);
        }
        let text = grid.to_string().replace(BLANK, " ");
        let mut lines: Vec<&str> = text.lines().map(str::trim_end).collect();
        for (line, place) in wide.iter().rev() {
            lines.insert((*line).min(lines.len()), place);
        }
        lines.join("\n")
    }
}

/// Lines a head takes up, at least one.
fn height(head: &str) -> usize {
    head.lines().count().max(1)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_address_stands_alone_where_the_table_would_be_too_wide() {
        let heads = [(Column::Place, "changed"), (Column::Right, "from"), (Column::Right, "to")];
        let mut table = Table::new(heads);
        let wide = "/groups/entry-doublet/elements/front-of-the-two/thicknesses_mm/1";
        table.row(["/beam/diameter_mm", "2.4", "2.5"].map(str::to_owned));
        table.row([wide, "123.456", "-99999.125"].map(str::to_owned));
        let told = "\
            changed               from          to\n\
            /beam/diameter_mm      2.4         2.5\n\
            /groups/entry-doublet/elements/front-of-the-two/thicknesses_mm/1\n\
            \x20                  123.456  -99999.125";
        assert_eq!(table.text(), told);
    }

    #[test]
    fn an_address_that_fits_stays_in_one_line() {
        let mut table = Table::new([(Column::Place, "changed"), (Column::Right, "to")]);
        table.row(["/housing/track_mm".to_owned(), "140".to_owned()]);
        assert_eq!(table.text(), "changed             to\n/housing/track_mm  140");
    }
}
