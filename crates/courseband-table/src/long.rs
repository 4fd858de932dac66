//! Any layout as one measurement per row.

use crate::request::{Layout, Role};
use crate::sheet::Sheet;

/// Where a measurement stands in the sheet.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct Place {
    pub(crate) record: u32,
    /// The sheet's column that holds the measurement; 0 in a long table.
    pub(crate) column: u32,
}

/// Where a column of the long form takes its cells from.
#[derive(Debug, Clone)]
pub(crate) enum Source {
    /// The same column of the sheet for every measurement.
    Cell(usize),
    /// The same column, in the record that holds the merged label, by record.
    Down((usize, Vec<u32>)),
    /// The measurement's own cell.
    Value,
    /// The cell of another measurement at the same time, by the sheet's column of this one.
    Beside(Vec<Option<usize>>),
    /// A label of the measurement's column, by the sheet's column.
    Across(Vec<String>),
    /// The measurement's line, where rows are subjects without a name.
    Line(Vec<String>),
}

/// A column of the long form.
#[derive(Debug, Clone)]
pub(crate) struct LongColumn {
    pub(crate) name: String,
    pub(crate) source: Source,
    pub(crate) unit: Option<String>,
}

/// A part that the layout itself gives to a column.
#[derive(Debug, Clone)]
pub(crate) struct Preset {
    pub(crate) role: Role,
    pub(crate) column: usize,
    pub(crate) reason: String,
}

/// One measurement per row, whatever the layout of the sheet.
#[derive(Debug, Clone)]
pub(crate) struct LongTable<'a> {
    pub(crate) sheet: &'a Sheet,
    pub(crate) layout: Layout,
    pub(crate) places: Vec<Place>,
    pub(crate) columns: Vec<LongColumn>,
    pub(crate) presets: Vec<Preset>,
    /// Names of the sheet's columns, for problems.
    pub(crate) sheet_names: Vec<String>,
    /// What was understood, in words.
    pub(crate) notes: Vec<String>,
}

impl LongTable<'_> {
    /// Number of measurements, missing ones included.
    pub(crate) fn rows(&self) -> usize {
        self.places.len()
    }

    /// A cell as written.
    pub(crate) fn cell(&self, row: usize, column: usize) -> &str {
        let place = self.places[row];
        match &self.columns[column].source {
            Source::Cell(at) => self.sheet.cell(place.record as usize, *at),
            Source::Down((at, from)) => self.sheet.cell(from[place.record as usize] as usize, *at),
            Source::Value => self.sheet.cell(place.record as usize, place.column as usize),
            Source::Beside(columns) => {
                columns[place.column as usize].map_or("", |at| self.sheet.cell(place.record as usize, at))
            }
            Source::Across(labels) => &labels[place.column as usize],
            Source::Line(names) => &names[place.record as usize],
        }
    }

    /// Line in the file.
    pub(crate) fn line(&self, row: usize) -> usize {
        self.sheet.line(self.places[row].record as usize)
    }

    /// Name under which people find the cell: in a wide table the name of the measurement's own column.
    pub(crate) fn shown_column(&self, row: usize, column: usize) -> &str {
        let at = self.places[row].column as usize;
        match &self.columns[column].source {
            Source::Value | Source::Across(_) => &self.sheet_names[at],
            Source::Beside(columns) => columns[at].map_or(&self.columns[column].name, |at| &self.sheet_names[at]),
            Source::Cell(_) | Source::Down(_) | Source::Line(_) => &self.columns[column].name,
        }
    }

    /// In a wide table: names of the sheet's columns that hold measurements.
    pub(crate) fn measured(&self) -> Vec<String> {
        if self.layout == Layout::Long {
            return Vec::new();
        }
        // Every record has the same columns measured.
        let first = self.places.first().map(|place| place.record);
        let own = self.places.iter().take_while(|place| Some(place.record) == first).map(|place| place.column as usize);
        let own: Vec<usize> = own.collect();
        let mut columns = own.clone();
        for column in &self.columns {
            if let Source::Beside(beside) = &column.source {
                columns.extend(own.iter().filter_map(|&at| beside[at]));
            }
        }
        columns.sort_unstable();
        columns.dedup();
        columns.into_iter().map(|column| self.sheet_names[column].clone()).collect()
    }

    /// The column of a name.
    pub(crate) fn find(&self, name: &str) -> Option<usize> {
        let name = name.trim();
        self.columns.iter().position(|column| column.name == name)
    }

    /// All names.
    pub(crate) fn names(&self) -> Vec<String> {
        self.columns.iter().map(|column| column.name.clone()).collect()
    }
}
