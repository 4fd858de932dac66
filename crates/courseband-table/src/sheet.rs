//! A sheet: cells as written, with the line of each record.

use crate::bytes::{Decoded, decode};
use crate::delimiter::sniff;
use crate::error::TableError;
use crate::workbook::Workbook;

/// More columns than this are no table of measurements.
pub(crate) const MAX_COLUMNS: usize = 5_000;

/// Cells as written, row by row, with each record's line in the file.
///
/// One buffer holds all cells, so that a million rows cost little more than their text.
#[derive(Debug, Clone)]
pub struct Sheet {
    text: String,
    /// End of each cell in `text`.
    ends: Vec<u32>,
    /// Index of each record's first cell, with one entry more than records.
    first: Vec<u32>,
    /// Line in the file of each record.
    lines: Vec<u32>,
    width: usize,
    delimiter: char,
    encoding: &'static str,
    damaged: bool,
    /// In a workbook: the sheet's name, its cells in use, and what must be known about it.
    place: Option<(String, String)>,
    notes: Vec<String>,
}

/// Splits a table's bytes into cells.
///
/// Reads UTF-8, UTF-16 and Windows-1252; commas, semicolons and tabs; quotes;
/// every kind of line end. Empty lines are skipped but counted.
///
/// A workbook is read too: the first sheet that holds a table.
///
/// # Errors
/// Binary files of other kinds, an empty table, an open quotation mark.
pub fn read_bytes(bytes: &[u8]) -> Result<Sheet, TableError> {
    if let Some(workbook) = Workbook::open(bytes)? {
        return workbook.read(None, None);
    }
    let Decoded { text, encoding, damaged } = decode(bytes)?;
    let delimiter = sniff(&text);
    let mut sheet = Sheet {
        text: String::new(),
        ends: Vec::new(),
        first: vec![0],
        lines: Vec::new(),
        width: 0,
        delimiter: char::from(delimiter),
        encoding,
        damaged,
        place: None,
        notes: Vec::new(),
    };
    sheet.fill(&text, delimiter)?;
    match sheet.records() {
        0 => Err(TableError::Empty),
        _ => Ok(sheet),
    }
}

impl Sheet {
    /// A sheet without cells, to be filled from a workbook.
    pub(crate) fn of_workbook() -> Sheet {
        Sheet {
            text: String::new(),
            ends: Vec::new(),
            first: vec![0],
            lines: Vec::new(),
            width: 0,
            delimiter: '\t',
            encoding: "workbook",
            damaged: false,
            place: None,
            notes: Vec::new(),
        }
    }

    /// Adds a record. Lines ascend.
    pub(crate) fn push(&mut self, line: usize, cells: &[String]) -> Result<(), TableError> {
        for cell in cells {
            self.text.push_str(cell);
            self.ends.push(self.text.len() as u32);
        }
        if self.text.len() > crate::bytes::MAX_BYTES {
            let what = format!("over {} megabytes of text", crate::bytes::MAX_BYTES >> 20);
            return Err(TableError::TooLarge { what });
        }
        self.first.push(self.ends.len() as u32);
        self.lines.push(line as u32);
        self.width = self.width.max(cells.len());
        Ok(())
    }

    /// Says which sheet of a workbook it is, and which cells are in use.
    pub(crate) fn named(&mut self, name: String, cells: String, notes: Vec<String>) {
        (self.place, self.notes) = (Some((name, cells)), notes);
    }

    /// In a workbook: the sheet's name and the cells in use, such as `A1 to F90`.
    pub fn place(&self) -> Option<(&str, &str)> {
        self.place.as_ref().map(|(name, cells)| (name.as_str(), cells.as_str()))
    }

    /// What must be known about how the cells were had, in words.
    pub(crate) fn notes(&self) -> &[String] {
        &self.notes
    }

    fn fill(&mut self, text: &str, delimiter: u8) -> Result<(), TableError> {
        let bytes = text.as_bytes();
        let mut reader =
            csv::ReaderBuilder::new().has_headers(false).flexible(true).delimiter(delimiter).from_reader(bytes);
        let mut record = csv::ByteRecord::new();
        let mut cells = Vec::with_capacity(bytes.len());
        // Start of the last record and whether one of its cells spans lines.
        let mut last = (0, 0, false);
        // Reading bytes from memory into byte records has no way to fail.
        while let Ok(true) = reader.read_byte_record(&mut record) {
            let position = record.position().map_or((0, 1), |at| (at.byte() as usize, at.line()));
            let skipped = bytes[position.0..].iter().take_while(|&&byte| byte == b'\n').count();
            let line = position.1 as usize + skipped;
            last = (position.0, line, record.as_slice().contains(&b'\n'));
            if record.len() > MAX_COLUMNS {
                return Err(TableError::TooLarge {
                    what: format!("row {line} has {} columns, the limit is {MAX_COLUMNS}", record.len()),
                });
            }
            for cell in record.iter() {
                cells.extend_from_slice(cell);
                self.ends.push(cells.len() as u32);
            }
            self.first.push(self.ends.len() as u32);
            self.lines.push(line as u32);
            self.width = self.width.max(record.len());
        }
        let quotes = bytes[last.0..].iter().filter(|&&byte| byte == b'"').count();
        if last.2 && quotes % 2 == 1 {
            return Err(TableError::OpenQuote { row: last.1 });
        }
        // Cells of valid text, cut at ASCII characters, are valid text.
        self.text = String::from_utf8(cells).map_err(|_| TableError::NotText { seems: "a damaged file" })?;
        Ok(())
    }

    /// Number of records; empty lines are none.
    pub fn records(&self) -> usize {
        self.lines.len()
    }

    /// Number of cells in the widest record.
    pub fn width(&self) -> usize {
        self.width
    }

    /// Number of cells in a record.
    pub fn width_of(&self, record: usize) -> usize {
        (self.first[record + 1] - self.first[record]) as usize
    }

    /// Line in the file on which a record begins; the first line is 1.
    pub fn line(&self, record: usize) -> usize {
        self.lines[record] as usize
    }

    /// The record that begins on a line.
    pub fn record_at(&self, line: usize) -> Option<usize> {
        let line = u32::try_from(line).ok()?;
        self.lines.binary_search(&line).ok()
    }

    /// A cell as written; empty where the record is too short.
    pub fn cell(&self, record: usize, column: usize) -> &str {
        if column >= self.width_of(record) {
            return "";
        }
        let index = self.first[record] as usize + column;
        let start = if index == 0 { 0 } else { self.ends[index - 1] as usize };
        &self.text[start..self.ends[index] as usize]
    }

    /// The cells of a record.
    pub fn cells(&self, record: usize) -> impl Iterator<Item = &str> {
        (0..self.width_of(record)).map(move |column| self.cell(record, column))
    }

    /// What separates the cells: a comma, a semicolon or a tab.
    pub fn delimiter(&self) -> char {
        self.delimiter
    }

    /// Name of the encoding.
    pub fn encoding(&self) -> &'static str {
        self.encoding
    }

    /// True where characters could not be decoded and were replaced.
    pub fn damaged(&self) -> bool {
        self.damaged
    }
}
