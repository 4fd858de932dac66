//! A table that was read: the entry to everything else.

use crate::error::TableError;
use crate::frame::{Frame, Names, column_names, find_frame};
use crate::layout::{Framed, long_form};
use crate::long::LongTable;
use crate::observe::observe;
use crate::profile::profile_all;
use crate::reading::Reading;
use crate::request::Request;
use crate::sheet::{Sheet, read_bytes};

/// A table that was read, before anything is asked of it.
#[derive(Debug, Clone)]
pub struct Table {
    sheet: Sheet,
    frame: Frame,
    names: Names,
}

impl Table {
    /// Reads a table from the bytes of a file or of pasted text.
    ///
    /// # Errors
    /// Bytes that are no table of text, and tables without rows.
    pub fn read(bytes: &[u8]) -> Result<Table, TableError> {
        let sheet = read_bytes(bytes)?;
        let frame = find_frame(&sheet);
        if frame.body.is_empty() {
            return Err(TableError::NoRows);
        }
        let names = column_names(&sheet, &frame);
        Ok(Table { sheet, frame, names })
    }

    /// Observations, problems and questions.
    ///
    /// # Errors
    /// What makes the table unusable as asked: see [`TableError`].
    pub fn observe(&self, request: &Request) -> Result<Reading, TableError> {
        let long = self.long(request);
        observe(&long, &profile_all(&long), request)
    }

    /// The cells as written.
    pub fn sheet(&self) -> &Sheet {
        &self.sheet
    }

    /// Column names: unique, never empty.
    pub fn names(&self) -> &[String] {
        &self.names.names
    }

    fn long(&self, request: &Request) -> LongTable<'_> {
        long_form(Framed { sheet: &self.sheet, frame: &self.frame, names: &self.names }, request)
    }
}
