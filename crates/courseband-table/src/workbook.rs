//! Workbooks: packed XML with one or several sheets, as spreadsheets save them (`.xlsx`, `.ods`).
//!
//! A sheet becomes the same [`Sheet`] that text becomes: cells as written, with the number of each row.
//! Numbers are written with the 15 digits that spreadsheets show, dates as `2024-03-05`, formulas as the
//! value last stored with them. Formats: ECMA-376 (Office Open XML) and OASIS OpenDocument 1.3, from memory.

mod archive;
mod document;
mod grid;
mod ods;
mod values;
mod write;
mod xlsx;
mod xml;

pub use document::{Block, write_document};
pub use grid::CellRange;
pub use write::{WrittenSheet, write_workbook};

use crate::error::TableError;
use crate::sheet::Sheet;
use crate::table::Table;
use archive::Archive;

/// A workbook, with the names of its sheets.
#[derive(Debug, Clone)]
pub struct Workbook {
    book: Book,
    names: Vec<String>,
}

#[derive(Debug, Clone)]
enum Book {
    Xlsx(Box<xlsx::Xlsx>),
    Ods(ods::Ods),
}

/// First bytes of a packed file, and of the older kind of workbook.
const PACKED: [&[u8]; 2] = [b"PK\x03\x04", b"PK\x05\x06"];
const COMPOUND: &[u8] = b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1";

impl Workbook {
    /// Opens a workbook; `None` for bytes that are not packed like one.
    ///
    /// # Errors
    /// Workbooks of another kind, protected or damaged ones, and packed files that are no workbooks.
    pub fn open(bytes: &[u8]) -> Result<Option<Workbook>, TableError> {
        if bytes.starts_with(COMPOUND) {
            // Protected workbooks of today stand in the older container.
            let name: Vec<u8> = "EncryptedPackage".encode_utf16().flat_map(u16::to_le_bytes).collect();
            let start = &bytes[..bytes.len().min(1 << 22)];
            let is_locked = start.windows(name.len()).any(|window| window == name);
            return Err(if is_locked { TableError::LockedWorkbook } else { other_kind("an older workbook (.xls)") });
        }
        if !PACKED.iter().any(|start| bytes.starts_with(start)) {
            return Ok(None);
        }
        let archive = Archive::open(bytes)?;
        let (book, names) = if archive.has("content.xml") {
            let (ods, names) = ods::Ods::open(&archive)?;
            (Book::Ods(ods), names)
        } else if archive.has("xl/workbook.bin") {
            return Err(other_kind("a binary workbook (.xlsb)"));
        } else if archive.has("word/document.xml") || archive.has("ppt/presentation.xml") {
            return Err(TableError::NotText { seems: "a document or slides" });
        } else if archive.has("Index/Document.iwa") || archive.has("Index.zip") {
            return Err(other_kind("a workbook of another kind"));
        } else if archive.has("_rels/.rels") {
            let (xlsx, names) = xlsx::Xlsx::open(archive)?;
            (Book::Xlsx(Box::new(xlsx)), names)
        } else {
            return Err(TableError::NotText { seems: "a compressed file" });
        };
        match names.is_empty() {
            true => Err(TableError::Empty),
            false => Ok(Some(Workbook { book, names })),
        }
    }

    /// Names of the sheets, in their order; charts are none.
    pub fn sheets(&self) -> &[String] {
        &self.names
    }

    /// The cells of a sheet, or of a part of it. Without a name the first sheet that holds a table.
    ///
    /// # Errors
    /// A sheet that is not there, damaged ones, and sheets without cells.
    pub fn read(&self, sheet: Option<&str>, range: Option<CellRange>) -> Result<Sheet, TableError> {
        let range = range.unwrap_or_default();
        if let Some(name) = sheet {
            let wanted = name.trim();
            let at = self.names.iter().position(|known| known == name);
            let at = at.or_else(|| self.names.iter().position(|known| known.trim().eq_ignore_ascii_case(wanted)));
            let Some(at) = at else {
                return Err(TableError::NoSuchSheet { name: name.to_string(), sheets: self.names.clone() });
            };
            return self.cells(at, range);
        }
        let mut first = Err(TableError::Empty);
        for at in 0..self.names.len() {
            let cells = self.cells(at, range);
            match &cells {
                Ok(sheet) if sheet.records() >= 2 && sheet.width() >= 2 => return cells,
                Ok(_) if first.is_err() => first = cells,
                Err(TableError::Empty) | Ok(_) => {}
                Err(_) => return cells,
            }
        }
        first
    }

    /// The table on a sheet, or on a part of it such as `B3:F90`. Without a name the first sheet that is one.
    ///
    /// # Errors
    /// As [`Workbook::read`], and sheets that hold no table.
    pub fn table(&self, sheet: Option<&str>, cells: Option<&str>) -> Result<Table, TableError> {
        let range = cells.map(CellRange::parse).transpose()?;
        if sheet.is_some() {
            return Table::from_sheet(self.read(sheet, range)?);
        }
        let mut first = None;
        for at in 0..self.names.len() {
            match self.cells(at, range.unwrap_or_default()).and_then(Table::from_sheet) {
                Ok(table) => return Ok(table),
                Err(TableError::Empty) => {}
                Err(error) => first = first.or(Some(error)),
            }
        }
        Err(first.unwrap_or(TableError::Empty))
    }

    fn cells(&self, at: usize, range: CellRange) -> Result<Sheet, TableError> {
        let name = &self.names[at];
        let mut grid = grid::Grid::new(name, range);
        match &self.book {
            Book::Xlsx(book) => book.fill(at, &mut grid)?,
            Book::Ods(book) => book.fill(at, &mut grid)?,
        }
        grid.finish(self.names.len())
    }
}

fn other_kind(kind: &'static str) -> TableError {
    TableError::OtherWorkbook { kind }
}

/// A workbook that cannot be understood.
fn damaged(what: &str) -> TableError {
    TableError::DamagedWorkbook { what: what.to_string() }
}

#[cfg(test)]
mod tests;
