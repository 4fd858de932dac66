//! A table that was read: the entry to everything else.

use crate::error::TableError;
use crate::frame::{Frame, Names, column_names, find_frame};
use crate::layout::{Framed, long_form, plain};
use crate::long::LongTable;
use crate::notes::frame_notes;
use crate::observe::{observe, outline};
use crate::profile::{Profile, profile_all};
use crate::reading::Reading;
use crate::request::Request;
use crate::sheet::{Sheet, read_bytes};
use crate::workbook::Workbook;

/// A table that was read, before anything is asked of it.
#[derive(Debug, Clone)]
pub struct Table {
    sheet: Sheet,
    frame: Frame,
    names: Names,
}

impl Table {
    /// Reads a table from the bytes of a file or of pasted text. Of a workbook, the first sheet that is a table.
    ///
    /// # Errors
    /// Bytes that are no table of text, and tables without rows.
    pub fn read(bytes: &[u8]) -> Result<Table, TableError> {
        match Workbook::open(bytes)? {
            Some(workbook) => workbook.table(None, None),
            None => Table::from_sheet(read_bytes(bytes)?),
        }
    }

    /// Reads a table from cells, such as those of a workbook's sheet.
    ///
    /// # Errors
    /// Tables without rows or with one column only.
    pub fn from_sheet(sheet: Sheet) -> Result<Table, TableError> {
        let frame = find_frame(&sheet);
        if frame.body.is_empty() {
            return Err(TableError::NoRows);
        }
        let names = column_names(&sheet, &frame);
        if let [name] = names.names.as_slice() {
            return Err(TableError::OneColumn { name: name.clone() });
        }
        Ok(Table { sheet, frame, names })
    }

    /// Observations, problems and questions.
    ///
    /// # Errors
    /// What makes the table unusable as asked: see [`TableError`].
    pub fn observe(&self, request: &Request) -> Result<Reading, TableError> {
        let mut long = self.long(request);
        long.notes.splice(0..0, self.notes());
        observe(&long, &profile_all(&long), request)
    }

    /// What can be shown where the table cannot be used as asked: roles, every cell that stops the
    /// reading, and what else stands out. There are no observations.
    pub fn outline(&self, request: &Request) -> Reading {
        let mut long = self.long(request);
        long.notes.splice(0..0, self.notes());
        let profiles = profile_all(&long);
        let error = observe(&long, &profiles, request).err();
        outline(&long, &profiles, request, error.as_ref())
    }

    /// A cell as written, by its line in the file and its column's name.
    #[must_use]
    pub fn cell_at(&self, line: usize, column: &str) -> Option<&str> {
        let (record, at) = (self.sheet.record_at(line)?, self.names().iter().position(|name| name == column)?);
        Some(self.sheet.cell(record, at))
    }

    /// Names of the columns, in the long form of the table, nearly all of whose cells are numbers of more than two kinds.
    #[must_use]
    pub fn number_columns(&self, request: &Request) -> Vec<String> {
        let long = self.long(request);
        let profiles = profile_all(&long);
        let is_measured = |profile: &Profile| profile.is_numeric(0.8) && profile.distinct > 2;
        let kept = long.columns.iter().zip(&profiles).filter(|(_, profile)| is_measured(profile));
        kept.map(|(column, _)| column.name.clone()).collect()
    }

    /// The cells as written.
    pub fn sheet(&self) -> &Sheet {
        &self.sheet
    }

    /// Column names: unique, never empty.
    pub fn names(&self) -> &[String] {
        &self.names.names
    }

    fn framed(&self) -> Framed<'_> {
        Framed { sheet: &self.sheet, frame: &self.frame, names: &self.names }
    }

    fn long(&self, request: &Request) -> LongTable<'_> {
        long_form(self.framed(), request)
    }

    /// Records of data.
    pub(crate) fn body(&self) -> &[u32] {
        &self.frame.body
    }

    pub(crate) fn unit(&self, column: usize) -> Option<&str> {
        self.names.units[column].as_deref()
    }

    pub(crate) fn spanner(&self) -> &[String] {
        &self.names.spanner
    }

    /// Profiles of the columns as they stand in the sheet.
    pub(crate) fn plain_profiles(&self) -> Vec<Profile> {
        profile_all(&plain(self.framed()))
    }

    /// What was understood of the frame.
    pub(crate) fn notes(&self) -> Vec<String> {
        frame_notes(&self.sheet, &self.frame)
    }
}
