//! Bytes of a table to observations and the problems found in it.
//!
//! The way is: bytes, [`Sheet`] (cells as written, with their lines), frame
//! (titles, header, units, body, summary rows), long form (one measurement per
//! row, whatever the layout), roles (which column plays which part), then
//! [`Observations`] with problems, notes and questions.
//!
//! Nothing here is random and nothing depends on the order of a hash table:
//! the same bytes and request give the same reading. There is no I/O.

mod bytes;
mod checks;
mod date;
mod delimiter;
mod describe;
mod error;
mod frame;
mod groups;
mod labels;
mod layout;
mod long;
mod names;
mod notes;
mod number;
mod observations;
mod observe;
mod preview;
mod problems;
mod profile;
mod reading;
mod request;
mod roles;
mod sheet;
mod subjects;
mod table;
mod text;
mod time;
mod workbook;

pub use describe::{Description, describe};
pub use error::{GroupChange, TableError};
pub use observations::{Covariate, CovariateValues, Observations, SubjectInfo};
pub use preview::{Preview, PreviewColumn, PreviewRow};
pub use problems::LISTED_PER_KIND;
pub use reading::{ColumnsUsed, Problem, ProblemKind, Question, Reading, Reason, Topic};
pub use request::{ColumnRequest, DateOrder, DayZero, Exclusion, Layout, Merge, Request, Role, SharedIds};
pub use sheet::{Sheet, read_bytes};
pub use table::Table;
pub use workbook::{Block, CellRange, Workbook, WrittenSheet, write_document, write_workbook};
