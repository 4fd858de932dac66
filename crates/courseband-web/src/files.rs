//! What the page gives out, and one plan over many response columns.

use crate::refused::Refused;
use crate::session::Session;
use crate::wire;
use courseband_study::{GivenReport, Marker, MarkersFindings, ReportTable, report_document, tables_workbook};
use wasm_bindgen::prelude::wasm_bindgen;

#[wasm_bindgen]
impl Session {
    /// Names of the columns that could be the response of a plan, as a JSON list.
    ///
    /// # Errors
    /// As [`Session::run`].
    pub fn marker_columns(&mut self, plan: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        wire::text(&study.marker_columns(&plan)?)
    }

    /// What a plan says of its response, as one of many, under the name it is called by.
    ///
    /// # Errors
    /// A plan that cannot be read. A column that cannot be used is no error: it says why.
    pub fn marker(&mut self, plan: &str, name: &str) -> Result<String, Refused> {
        let (study, plan) = self.with(plan)?;
        wire::text(&study.marker(&plan, name))
    }
}

/// All markers together: `markers` is a JSON list of what [`Session::marker`] gave.
///
/// # Errors
/// Text that cannot be read.
#[wasm_bindgen]
pub fn markers_answer(markers: &str, rate: f64, level: f64) -> Result<String, Refused> {
    let markers: Vec<Marker> = wire::parsed(markers, "markers")?;
    wire::text(&MarkersFindings::new(&markers, rate, level))
}

/// Tables of a report, a JSON list, as the bytes of an `.xlsx` file; `about` is a JSON list of lines for its first sheet.
///
/// # Errors
/// Text that cannot be read.
#[wasm_bindgen]
pub fn tables_xlsx(tables: &str, about: &str) -> Result<Vec<u8>, Refused> {
    let tables: Vec<ReportTable> = wire::parsed(tables, "tables")?;
    let about: Vec<String> = wire::parsed(about, "lines")?;
    Ok(tables_workbook(&tables, &about))
}

/// A report as it is given out (JSON, see the study crate's `GivenReport`) as the bytes of a `.docx` file, with its figure as
/// the bytes of a PNG, or none.
///
/// # Errors
/// Text that cannot be read.
#[wasm_bindgen]
pub fn report_docx(report: &str, picture: &[u8]) -> Result<Vec<u8>, Refused> {
    let report: GivenReport = wire::parsed(report, "report")?;
    Ok(report_document(&report, picture))
}
