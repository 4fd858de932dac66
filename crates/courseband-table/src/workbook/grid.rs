//! Cells by row and column on their way into a sheet, cut to a range.

use crate::error::TableError;
use crate::sheet::{MAX_COLUMNS, Sheet};
use crate::text::{counted, quoted};

/// Spreadsheets end at about a million rows.
const MAX_ROWS: usize = 1 << 22;

/// A part of a sheet, such as `B3:F90`. Counted from zero, ends included.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct CellRange {
    rows: (usize, usize),
    columns: (usize, usize),
}

impl Default for CellRange {
    /// Everything.
    fn default() -> Self {
        CellRange { rows: (0, usize::MAX), columns: (0, usize::MAX) }
    }
}

impl CellRange {
    /// Reads `B3:F90`, `B:F` (whole columns), or `B3` (everything right of it and below).
    ///
    /// # Errors
    /// What is none of these.
    pub fn parse(text: &str) -> Result<CellRange, TableError> {
        let wrong = || TableError::CellRange { range: text.to_string() };
        let plain = text.replace('$', "").to_ascii_uppercase();
        let mut ends = plain.split(':').map(|end| corner(end.trim()));
        let first = ends.next().flatten().ok_or_else(wrong)?;
        let last = ends.next().map(|end| end.ok_or_else(wrong)).transpose()?;
        if ends.next().is_some() || (last.is_none() && first.1.is_none()) {
            return Err(wrong());
        }
        let range = CellRange {
            columns: (first.0, last.map_or(usize::MAX, |end| end.0)),
            rows: (first.1.unwrap_or(0), last.and_then(|end| end.1).unwrap_or(usize::MAX)),
        };
        match range.columns.0 <= range.columns.1 && range.rows.0 <= range.rows.1 {
            true => Ok(range),
            false => Err(wrong()),
        }
    }
}

/// Column and row of `B3`, or the column of `B`.
fn corner(text: &str) -> Option<(usize, Option<usize>)> {
    let digits = text.find(|c: char| !c.is_ascii_alphabetic()).unwrap_or(text.len());
    let column = column_number(&text[..digits])?;
    match &text[digits..] {
        "" => Some((column, None)),
        row => row.parse::<usize>().ok()?.checked_sub(1).map(|row| (column, Some(row))),
    }
}

/// 0 for `A`, 26 for `AA`.
pub(super) fn column_number(letters: &str) -> Option<usize> {
    if letters.is_empty() || letters.len() > 4 {
        return None;
    }
    let digit = |letter: u8| letter.is_ascii_alphabetic().then(|| usize::from(letter.to_ascii_uppercase() - b'A') + 1);
    let number = letters.bytes().try_fold(0, |sum, letter| Some(sum * 26 + digit(letter)?))?;
    Some(number - 1)
}

/// `A` for 0, `AA` for 26.
fn column_letters(mut column: usize) -> String {
    let mut letters = Vec::new();
    loop {
        letters.push(char::from(b'A' + (column % 26) as u8));
        if column < 26 {
            return letters.into_iter().rev().collect();
        }
        column = column / 26 - 1;
    }
}

/// Collects the cells of one sheet.
pub(super) struct Grid {
    sheet: Sheet,
    name: String,
    range: CellRange,
    /// The row being filled, and its cells.
    row: usize,
    cells: Vec<String>,
    /// First and last row and column with anything in them.
    used: Option<(usize, usize, usize, usize)>,
    /// Formulas without a stored value.
    pub(super) unstored: usize,
    /// Hidden rows with something in them.
    pub(super) hidden: usize,
}

impl Grid {
    pub(super) fn new(name: &str, range: CellRange) -> Grid {
        let sheet = Sheet::of_workbook();
        Grid { sheet, name: name.to_string(), range, row: 0, cells: Vec::new(), used: None, unstored: 0, hidden: 0 }
    }

    /// Rows beyond this one need not be read.
    pub(super) fn is_past(&self, row: usize) -> bool {
        row > self.range.rows.1
    }

    /// Puts a cell into the row being filled.
    ///
    /// # Errors
    /// More columns than a table can have.
    pub(super) fn put(&mut self, column: usize, text: String) -> Result<(), TableError> {
        let (first, last) = self.range.columns;
        if text.trim().is_empty() || column < first || column > last {
            return Ok(());
        }
        let at = column - first;
        if at >= MAX_COLUMNS {
            return Err(TableError::TooLarge { what: format!("row {} has over {MAX_COLUMNS} columns", self.row + 1) });
        }
        if self.cells.len() <= at {
            self.cells.resize(at + 1, String::new());
        }
        self.cells[at] = text;
        Ok(())
    }

    /// Starts a row; rows ascend.
    pub(super) fn start(&mut self, row: usize) {
        self.row = row;
        self.cells.clear();
    }

    /// Ends the row. True where it held anything.
    pub(super) fn end_row(&mut self) -> Result<bool, TableError> {
        let inside = self.row >= self.range.rows.0 && self.row <= self.range.rows.1;
        if self.cells.is_empty() || !inside {
            return Ok(false);
        }
        if self.row >= MAX_ROWS {
            return Err(TableError::TooLarge { what: format!("it has cells below row {MAX_ROWS}") });
        }
        self.sheet.push(self.row + 1, &self.cells)?;
        let left = self.cells.iter().position(|cell| !cell.is_empty()).unwrap_or(0) + self.range.columns.0;
        let right = self.cells.len() - 1 + self.range.columns.0;
        let (top, l, r) = self.used.map_or((self.row, left, right), |(top, _, l, r)| (top, l.min(left), r.max(right)));
        self.used = Some((top, self.row, l, r));
        Ok(true)
    }

    /// The same row once more, further down.
    pub(super) fn repeat(&mut self, row: usize) -> Result<bool, TableError> {
        self.row = row;
        self.end_row()
    }

    /// The sheet. `sheets`: how many the workbook has.
    pub(super) fn finish(mut self, sheets: usize) -> Result<Sheet, TableError> {
        let Some((top, bottom, left, right)) = self.used else { return Err(TableError::Empty) };
        let cells = format!("{}{} to {}{}", column_letters(left), top + 1, column_letters(right), bottom + 1);
        let mut notes = Vec::new();
        if sheets > 1 {
            notes.push(format!("Sheet {} was read, one of {sheets}.", quoted(&self.name)));
        }
        if self.unstored > 0 {
            notes.push(format!(
                "{} no stored value and {} read as empty. Open the workbook in the spreadsheet and save it again.",
                if self.unstored == 1 {
                    "1 formula has".to_string()
                } else {
                    format!("{} formulas have", self.unstored)
                },
                if self.unstored == 1 { "is" } else { "are" },
            ));
        }
        if self.hidden > 0 {
            notes.push(format!(
                "{} hidden in the workbook, by a filter perhaps: read like the others.",
                if self.hidden == 1 { "1 row is".to_string() } else { format!("{} are", counted(self.hidden, "row")) }
            ));
        }
        self.sheet.named(self.name, cells, notes);
        Ok(self.sheet)
    }
}
