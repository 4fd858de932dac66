//! A look at the table as it stands: columns with samples, rows with their lines.

use crate::number::is_missing;
use crate::table::Table;
use crate::text::shortened;

/// Samples shown per column.
const SAMPLES: usize = 4;

/// The table as it stands, before any role is given.
#[derive(Debug, Clone)]
pub struct Preview {
    /// Columns, as in the header.
    pub columns: Vec<PreviewColumn>,
    /// First rows of data.
    pub rows: Vec<PreviewRow>,
    /// Rows of data in all.
    pub total_rows: usize,
    /// What was understood of titles, units and summary rows, in words.
    pub notes: Vec<String>,
    /// A row of labels over several columns, filled to the right; empty without one.
    pub spanner: Vec<String>,
}

/// A column as it stands.
#[derive(Debug, Clone)]
pub struct PreviewColumn {
    /// Name: unique, never empty.
    pub name: String,
    /// Unit, where the header or a unit row gives one.
    pub unit: Option<String>,
    /// The first different cells that are not missing (shortened if very long).
    pub samples: Vec<String>,
    /// Missing cells.
    pub missing: usize,
    /// Cells that are numbers.
    pub numbers: usize,
    /// Different cells, counted up to 50 000.
    pub distinct: usize,
}

/// A row as it stands.
#[derive(Debug, Clone)]
pub struct PreviewRow {
    /// Line in the file; the header is line 1.
    pub line: usize,
    /// Cells as written (shortened if very long).
    pub cells: Vec<String>,
}

impl Table {
    /// Columns with samples and counts, and the first `rows` rows.
    pub fn preview(&self, rows: usize) -> Preview {
        let profiles = self.plain_profiles();
        let columns = self.names().iter().enumerate().map(|(column, name)| PreviewColumn {
            name: name.clone(),
            unit: self.unit(column).map(str::to_string),
            samples: self.samples(column),
            missing: profiles[column].missing,
            numbers: profiles[column].numbers,
            distinct: profiles[column].distinct,
        });
        Preview {
            columns: columns.collect(),
            rows: self.rows(0, rows),
            total_rows: self.body().len(),
            notes: self.notes(),
            spanner: self.spanner().to_vec(),
        }
    }

    /// Rows of data from the `start`th on, as written.
    pub fn rows(&self, start: usize, count: usize) -> Vec<PreviewRow> {
        let (sheet, width) = (self.sheet(), self.names().len());
        let records = self.body().iter().skip(start).take(count).map(|&record| record as usize);
        let cells = |record| (0..width).map(|column| shortened(sheet.cell(record, column))).collect();
        records.map(|record| PreviewRow { line: sheet.line(record), cells: cells(record) }).collect()
    }

    /// The rows of data on these lines, as written.
    pub fn rows_at(&self, lines: &[usize]) -> Vec<PreviewRow> {
        let (sheet, body) = (self.sheet(), self.body());
        let at = lines.iter().filter_map(|&line| body.binary_search(&(sheet.record_at(line)? as u32)).ok());
        at.flat_map(|at| self.rows(at, 1)).collect()
    }

    fn samples(&self, column: usize) -> Vec<String> {
        let mut samples: Vec<String> = Vec::new();
        for &record in self.body().iter().take(1000) {
            let cell = self.sheet().cell(record as usize, column).trim();
            if samples.len() == SAMPLES {
                break;
            }
            let shown = shortened(cell);
            if !is_missing(cell) && !samples.contains(&shown) {
                samples.push(shown);
            }
        }
        samples
    }
}
