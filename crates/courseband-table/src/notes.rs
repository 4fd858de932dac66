//! What was understood of a table's frame, in words.

use crate::error::rows;
use crate::frame::Frame;
use crate::sheet::Sheet;
use crate::text::{listed, quoted};

/// Notes on encoding, titles, units, summary rows and repeated headers.
pub(crate) fn frame_notes(sheet: &Sheet, frame: &Frame) -> Vec<String> {
    let mut notes = sheet.notes().to_vec();
    let lines = |records: &[usize]| rows(&records.iter().map(|&record| sheet.line(record)).collect::<Vec<_>>());
    if sheet.damaged() {
        notes.push(
            "Some characters could not be decoded and were replaced. Save the table as UTF-8 if names look wrong."
                .to_string(),
        );
    } else if sheet.encoding() == "windows-1252" {
        notes.push("The table is not in UTF-8; it was read as Windows-1252.".to_string());
    }
    let titles: Vec<usize> =
        frame.titles.iter().copied().filter(|&record| !sheet.cell(record, 0).starts_with("sep=")).collect();
    if !titles.is_empty() {
        let texts: Vec<String> = titles.iter().map(|&record| first_cell(sheet, record).to_string()).collect();
        notes.push(format!("Titles above the header, {}: {}.", lines(&titles), listed(&texts)));
    }
    if frame.header.is_none() {
        notes.push(
            "The first row holds numbers, so there is no header: columns are called ‘column 1’ and so on.".to_string(),
        );
    }
    if let Some(record) = frame.units {
        notes.push(format!("Row {} holds units.", sheet.line(record)));
    }
    if let Some(&first) = frame.summaries.first() {
        notes.push(format!(
            "Summaries kept out: {} (such as {}).",
            lines(&frame.summaries),
            quoted(first_cell(sheet, first))
        ));
    }
    if !frame.repeated.is_empty() {
        notes.push(format!("The header is repeated in {}: kept out.", lines(&frame.repeated)));
    }
    notes
}

fn first_cell(sheet: &Sheet, record: usize) -> &str {
    sheet.cells(record).map(str::trim).find(|cell| !cell.is_empty()).unwrap_or("")
}
