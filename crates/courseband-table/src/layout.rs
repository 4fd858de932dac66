//! Which layout a table has, and its long form.

mod by_subject;
mod by_time;
mod heads;
mod merged;

use crate::frame::{Frame, Names};
use crate::long::{LongColumn, LongTable, Place, Source};
use crate::names::{Summary, clarity, split_unit, summarises, summary};
use crate::number::{Decimal, NotNumber, is_missing, number};
use crate::request::{ColumnRequest, Layout, Request, Role};
use crate::sheet::Sheet;
use crate::text::{counted, listed};

/// A sheet with its frame and names: what a layout is recognised from.
#[derive(Clone, Copy)]
pub(crate) struct Framed<'a> {
    pub(crate) sheet: &'a Sheet,
    pub(crate) frame: &'a Frame,
    pub(crate) names: &'a Names,
}

/// The long form of a table, in the layout asked for or recognised.
pub(crate) fn long_form<'a>(framed: Framed<'a>, request: &Request) -> LongTable<'a> {
    let wide = match request.layout {
        Some(Layout::Long) => None,
        Some(Layout::WideByTime) => by_time::recognise(framed, true),
        Some(Layout::WideBySubject) => by_subject::recognise(framed, true),
        None => by_subject::recognise(framed, false)
            .filter(|wide| allows(wide, framed, request))
            .or_else(|| by_time::recognise(framed, false).filter(|wide| allows(wide, framed, request))),
    };
    let mut table = wide.unwrap_or_else(|| plain(framed));
    merged::fill_down(&mut table, framed);
    table
}

/// False where the request names a column that this wide reading would take apart.
fn allows(wide: &LongTable<'_>, framed: Framed<'_>, request: &Request) -> bool {
    Role::ALL.iter().all(|&role| match request.column(role) {
        ColumnRequest::Named(name) => {
            wide.find(name).is_some() || !framed.names.names.contains(&name.trim().to_string())
        }
        _ => true,
    })
}

/// One measurement per row already.
pub(crate) fn plain(framed: Framed<'_>) -> LongTable<'_> {
    let columns = 0..framed.names.names.len();
    LongTable {
        sheet: framed.sheet,
        layout: Layout::Long,
        places: framed.frame.body.iter().map(|&record| Place { record, column: 0 }).collect(),
        columns: columns.map(|column| framed.cell_column(column)).collect(),
        presets: Vec::new(),
        sheet_names: framed.names.names.clone(),
        notes: Vec::new(),
    }
}

impl<'a> Framed<'a> {
    /// A column of the sheet as a column of the long form.
    fn cell_column(&self, column: usize) -> LongColumn {
        LongColumn {
            name: self.names.names[column].clone(),
            source: Source::Cell(column),
            unit: self.names.units[column].clone(),
        }
    }

    /// Name of a column as written in the header.
    fn written(&self, column: usize) -> &'a str {
        &self.names.written[column]
    }

    fn width(&self) -> usize {
        self.names.names.len()
    }

    /// Cells of a column in the body.
    fn cells(&self, column: usize) -> impl Iterator<Item = &'a str> + use<'a> {
        let sheet = self.sheet;
        self.frame.body.iter().map(move |&record| sheet.cell(record as usize, column))
    }

    /// At least half of the cells present are numbers (limits, units and typing errors allowed for the rest).
    fn is_numeric(&self, column: usize) -> bool {
        let (mut present, mut numbers) = (0, 0);
        for cell in self.cells(column).take(500) {
            let read = number(cell, Decimal::Point);
            if read == Err(NotNumber::Missing) || is_missing(cell) {
                continue;
            }
            present += 1;
            numbers += usize::from(!matches!(read, Err(NotNumber::Text)));
        }
        numbers * 2 >= present
    }

    /// Columns of summaries, such as `Mean` and `SEM`, that a wide reading keeps out.
    fn summary_columns(&self) -> Vec<usize> {
        let signs: Vec<Summary> = (0..self.width()).map(|column| summary(self.written(column))).collect();
        let found = summarises(&signs);
        (1..self.width()).filter(|&column| found[column]).collect()
    }

    /// Columns of the body without any cell.
    fn is_blank(&self, column: usize) -> bool {
        self.cells(column).all(|cell| cell.trim().is_empty())
    }

    /// The single cell of the line above the header, if there is just one.
    fn title(&self) -> Option<&'a str> {
        let &record = self.frame.titles.last()?;
        let mut cells = self.sheet.cells(record).map(str::trim).filter(|cell| !cell.is_empty());
        let title = cells.next()?;
        cells.next().is_none().then_some(title)
    }

    /// What was measured, from the line above the header: name and unit; `value` where it does not say.
    fn response_from_title(&self) -> (String, Option<String>) {
        let named = self.title().filter(|title| {
            title.chars().count() <= 48 && (clarity(title, Role::Response) >= 2 || split_unit(title).1.is_some())
        });
        match named {
            Some(title) => (title.to_string(), split_unit(title).1.map(str::to_string)),
            None => ("value".to_string(), None),
        }
    }

    fn summary_note(&self, summaries: &[usize]) -> Option<String> {
        let names: Vec<String> = summaries.iter().map(|&column| self.names.names[column].clone()).collect();
        (!names.is_empty())
            .then(|| format!("{} of summaries kept out: {}.", counted(names.len(), "column"), listed(&names)))
    }
}

/// The name, numbered where a column is called so already.
fn free_name(name: &str, taken: &[LongColumn]) -> String {
    let is_taken = |name: &str| taken.iter().any(|column| column.name == name);
    match is_taken(name) {
        false => name.to_string(),
        true => (2..).map(|number| format!("{name} ({number})")).find(|name| !is_taken(name)).unwrap_or_default(),
    }
}
