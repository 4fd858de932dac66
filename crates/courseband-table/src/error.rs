//! Why a table cannot be used.

use crate::request::Role;
use crate::text::{listed, quoted};
use std::fmt;

/// Why a table, or what was asked of it, cannot be used.
///
/// The text says what is wrong, where (column, row, value) and what to do.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum TableError {
    /// A workbook of a kind that cannot be read.
    OtherWorkbook {
        /// Which, such as `an older workbook (.xls)`.
        kind: &'static str,
    },
    /// A workbook under a password.
    LockedWorkbook,
    /// A workbook that cannot be understood.
    DamagedWorkbook {
        /// What is wrong with it.
        what: String,
    },
    /// A sheet that the workbook does not have.
    NoSuchSheet {
        /// The name asked for.
        name: String,
        /// The sheets there are.
        sheets: Vec<String>,
    },
    /// A sheet or range asked of a table that is no workbook.
    NotWorkbook,
    /// A range of cells that cannot be read.
    CellRange {
        /// As asked for.
        range: String,
    },
    /// Not a table of text; the word says what it seems to be.
    NotText {
        /// What it seems to be, such as `a picture`.
        seems: &'static str,
    },
    /// No characters besides white space.
    Empty,
    /// More bytes or columns than can be handled.
    TooLarge {
        /// What there is too much of, with its limit.
        what: String,
    },
    /// A quotation mark that is never closed.
    OpenQuote {
        /// Line on which the record begins.
        row: usize,
    },
    /// A single column: the separator was not recognised, or there is no more.
    OneColumn {
        /// Its name.
        name: String,
    },
    /// A header without rows below it.
    NoRows,
    /// Every row is left out.
    NothingLeft {
        /// Why, in words.
        why: String,
    },
    /// A named column that does not exist.
    NoSuchColumn {
        /// The name asked for.
        name: String,
        /// What it was asked for.
        purpose: String,
        /// The columns there are.
        columns: Vec<String>,
    },
    /// One column asked to play two parts.
    ColumnTwice {
        /// The column.
        name: String,
        /// Both parts.
        roles: [String; 2],
    },
    /// A part that cannot be absent was said to be absent.
    Needed {
        /// The part.
        role: Role,
    },
    /// An exclusion of a row that does not exist or holds no data.
    Exclusion {
        /// The row asked for.
        row: usize,
        /// Why it cannot be excluded.
        why: String,
    },
    /// A cell that stops the reading.
    Cell {
        /// Line in the file.
        row: usize,
        /// Column name.
        column: String,
        /// The cell as written.
        value: String,
        /// What is wrong and what to do.
        message: String,
    },
    /// Dates that can be read day first or month first.
    DateOrder {
        /// Column name.
        column: String,
        /// A row with such a date.
        row: usize,
        /// The date as written.
        value: String,
    },
    /// Times in units that cannot be converted into each other.
    MixedUnits {
        /// Column name.
        column: String,
        /// Row, value and unit of one cell.
        first: (usize, String),
        /// The same of another cell.
        second: (usize, String),
    },
    /// A subject that changes its group.
    ChangesGroup(Box<GroupChange>),
    /// A subject in two clusters.
    ChangesCluster {
        /// Cluster column.
        column: String,
        /// The subject.
        subject: String,
        /// One cluster and a row.
        first: (String, usize),
        /// Another cluster and a row.
        second: (String, usize),
    },
    /// More groups than can be compared.
    TooManyGroups {
        /// Group column.
        column: String,
        /// How many.
        count: usize,
    },
    /// No response that can be read.
    NoResponses {
        /// Response column.
        column: String,
        /// Rows read.
        rows: usize,
        /// An example, as written.
        example: String,
    },
}

/// A subject that changes its group.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct GroupChange {
    /// Subject column.
    pub column: String,
    /// The subject.
    pub subject: String,
    /// One group and its rows.
    pub first: (String, Vec<usize>),
    /// A later group and its rows.
    pub second: (String, Vec<usize>),
    /// True where the two names differ by one letter.
    pub near: bool,
}

impl TableError {
    /// The cells that it is about: row, column, value as written, and what to do there.
    pub(crate) fn places(&self) -> Vec<(usize, String, String, String)> {
        let place = |row: usize, column: &str, value: &str, message: &str| {
            (row, column.to_string(), value.to_string(), message.to_string())
        };
        match self {
            TableError::Cell { row, column, value, message } => {
                vec![place(*row, column, value, &format!("It {message}"))]
            }
            TableError::DateOrder { column, row, value } => {
                vec![place(*row, column, value, "It can be read day first or month first.")]
            }
            TableError::MixedUnits { column, first, second } => [first, second]
                .into_iter()
                .map(|(row, value)| place(*row, column, value, "Its unit cannot be converted into the others."))
                .collect(),
            TableError::ChangesGroup(change) => change
                .second
                .1
                .iter()
                .map(|&row| {
                    let message = format!("Before, this subject is in group {}.", quoted(&change.first.0));
                    place(row, &change.column, &change.subject, &message)
                })
                .collect(),
            TableError::ChangesCluster { column, first, second, .. } => [first, second]
                .into_iter()
                .map(|(value, row)| place(*row, column, value, "This subject has two different entries here."))
                .collect(),
            _ => Vec::new(),
        }
    }
}

impl fmt::Display for GroupChange {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "Column {}: subject {} is in group {} ({}) and later in group {} ({}). Subjects that change their group are not handled. \
             Correct the group, give different subjects different ids, or exclude the rows.",
            quoted(&self.column),
            quoted(&self.subject),
            quoted(&self.first.0),
            rows(&self.first.1),
            quoted(&self.second.0),
            rows(&self.second.1)
        )?;
        match self.near {
            true => f.write_str(" The two names differ by one letter: perhaps one is misspelt."),
            false => Ok(()),
        }
    }
}

impl std::error::Error for TableError {}

impl fmt::Display for TableError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            TableError::OtherWorkbook { kind } => write!(
                f,
                "This is {kind}, which cannot be read. Save it as .xlsx or .ods; or select the cells there, copy, and paste here."
            ),
            TableError::LockedWorkbook => f.write_str(
                "This workbook is protected by a password. Save it without one; or select the cells there, copy, and paste here.",
            ),
            TableError::DamagedWorkbook { what } => write!(
                f,
                "This workbook is damaged: {what}. Open it in the spreadsheet and save it again; or select the cells there, copy, and paste here."
            ),
            TableError::NoSuchSheet { name, sheets } => {
                write!(f, "The workbook has no sheet {}. Its sheets are {}. Name one of these.", quoted(name), listed(sheets))
            }
            TableError::NotWorkbook => f.write_str(
                "The plan names a sheet or a range of cells, but the table is text and no workbook. Take both out of the plan (reading, sheet and cells).",
            ),
            TableError::CellRange { range } => write!(
                f,
                "{} is no range of cells. Write the corners, such as B3:F90, whole columns, such as B:F, or only the first corner.",
                quoted(range)
            ),
            TableError::NotText { seems } => write!(
                f,
                "This is {seems}, not a table of text. Use a table with columns separated by commas, semicolons or tabs."
            ),
            TableError::Empty => {
                f.write_str("The table is empty. Give a table with a header and at least one row below it.")
            }
            TableError::TooLarge { what } => write!(f, "The table is too large: {what}. Split it, or leave out what is not needed."),
            TableError::OpenQuote { row } => write!(
                f,
                "Row {row} opens a quotation mark that is never closed. Close it, or take it out."
            ),
            TableError::OneColumn { name } => write!(
                f,
                "The table has one column only, {}. It needs a subject, a time and a response column, separated by commas, semicolons or tabs.",
                quoted(name)
            ),
            TableError::NoRows => f.write_str("The table has no rows of data below its header. Add at least one row."),
            TableError::NothingLeft { why } => write!(f, "No row is left to compute with: {why}. Correct the table, or name other columns."),
            TableError::NoSuchColumn { name, purpose, columns } => write!(
                f,
                "There is no column {} (asked for as {purpose}). The columns are {}. Name one of these.",
                quoted(name),
                listed(columns)
            ),
            TableError::ColumnTwice { name, roles } => write!(
                f,
                "Column {} is asked for both as {} and as {}. Name a different column for one of them.",
                quoted(name), roles[0], roles[1]
            ),
            TableError::Needed { role } => write!(f, "A {role} column is needed and cannot be absent. Name the {role} column."),
            TableError::Exclusion { row, why } => write!(f, "Row {row} cannot be excluded: {why}. Check the row number."),
            TableError::Cell { row, column, value, message } => {
                let value = if value.trim().is_empty() { "the empty cell".to_string() } else { quoted(value) };
                write!(f, "Column {}, row {row}: {value} {message}", quoted(column))
            }
            TableError::DateOrder { column, row, value } => write!(
                f,
                "Column {}, row {row}: {} and the other dates can be read day first or month first. Write dates as year-month-day, such as 2024-03-05.",
                quoted(column), quoted(value)
            ),
            TableError::MixedUnits { column, first, second } => write!(
                f,
                "Column {}: row {} has {} and row {} has {}. These time units cannot be converted into each other. Use one unit in the column.",
                quoted(column), first.0, quoted(&first.1), second.0, quoted(&second.1)
            ),
            TableError::ChangesGroup(change) => change.fmt(f),
            TableError::ChangesCluster { column, subject, first, second } => write!(
                f,
                "Column {}: subject {} is in {} (row {}) and in {} (row {}). A subject needs one {} throughout. Correct it, or use no such column.",
                quoted(column), quoted(subject), quoted(&first.0), first.1, quoted(&second.0), second.1, column
            ),
            TableError::TooManyGroups { column, count } => write!(
                f,
                "Column {} has {count} different groups; at most 60 can be compared. Is this really the group column? Name another, or none.",
                quoted(column)
            ),
            TableError::NoResponses { column, rows, example } => write!(
                f,
                "Column {} has no number in any of the {rows} rows; the first cell is {}. Name another response column, or correct the values.",
                quoted(column), quoted(example)
            ),
        }
    }
}

/// `row 4` or `rows 4, 5 and 6`, at most five of them.
pub(crate) fn rows(rows: &[usize]) -> String {
    let shown: Vec<String> = rows.iter().take(5).map(usize::to_string).collect();
    let more = rows.len().saturating_sub(shown.len());
    match (shown.as_slice(), more) {
        ([one], 0) => format!("row {one}"),
        ([first @ .., last], 0) => format!("rows {} and {last}", first.join(", ")),
        (all, more) => format!("rows {} and {more} more", all.join(", ")),
    }
}
