//! A table of columns, as many of them as fit the line.

use super::reading::cut;

/// One column.
pub(super) struct Column {
    /// What stands over it.
    pub(super) head: &'static str,
    cells: Vec<String>,
    least: usize,
    /// Cells may be cut to this many characters.
    cut_to: Option<usize>,
    left: bool,
    /// Columns with the least number are left out first; the most important have none.
    keep: Option<u8>,
}

impl Column {
    /// A column set to the right, at least so many characters wide, that is never left out.
    pub(super) fn new(head: &'static str, least: usize, cells: Vec<String>) -> Self {
        Self { head, cells, least: least.max(head.len()), cut_to: None, left: false, keep: None }
    }

    /// Set to the left.
    pub(super) fn left(self) -> Self {
        Self { left: true, ..self }
    }

    /// Where there is no room, its cells are cut to as few as so many characters.
    pub(super) fn cut_to(self, least: usize) -> Self {
        Self { cut_to: Some(least.max(self.least)), ..self }
    }

    /// Left out where there is no room, before all with a larger number.
    pub(super) fn keep(self, keep: u8) -> Self {
        Self { keep: Some(keep), ..self }
    }

    fn width(&self) -> usize {
        self.cells.iter().map(|cell| cell.chars().count()).max().unwrap_or(0).max(self.least)
    }

    /// Width when its cells are cut as far as they may be.
    fn least_width(&self) -> usize {
        self.cut_to.map_or(self.width(), |least| least.min(self.width()))
    }
}

/// The columns that fit a line of so many characters: some left out, some cut.
pub(super) fn fitted(mut columns: Vec<Column>, line: usize) -> Vec<Column> {
    let needs = |columns: &[Column]| columns.iter().map(|column| column.least_width() + 1).sum::<usize>() - 1;
    while needs(&columns) > line {
        let first = (0..columns.len()).filter_map(|at| Some((columns[at].keep?, at))).min();
        let Some((_, at)) = first else { break };
        columns.remove(at);
    }
    let mut spare = line.saturating_sub(needs(&columns));
    for column in columns.iter_mut().filter(|column| column.cut_to.is_some()) {
        let width = column.width().min(column.least_width() + spare);
        spare -= width - column.least_width();
        column.cells = column.cells.iter().map(|cell| cut(cell, width)).collect();
    }
    columns
}

/// The head and every row, one line each.
pub(super) fn lines(columns: &[Column]) -> String {
    let rows = columns.iter().map(|column| column.cells.len()).max().unwrap_or(0);
    let widths: Vec<_> = columns.iter().map(Column::width).collect();
    let mut text = String::new();
    for row in 0..=rows {
        let mut line = String::new();
        for (column, &width) in columns.iter().zip(&widths) {
            // Row 0 is the head.
            let cell = row.checked_sub(1).map_or(column.head, |at| column.cells.get(at).map_or("", String::as_str));
            let blanks = " ".repeat(width.saturating_sub(cell.chars().count()));
            let (before, behind) = if column.left { ("", &*blanks) } else { (&*blanks, "") };
            line.push_str(&format!("{before}{cell}{behind} "));
        }
        text.push_str(line.trim_end());
        text.push('\n');
    }
    text
}
