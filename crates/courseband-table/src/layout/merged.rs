//! Merged cells: a label written once, with blanks below it, holds for the rows below.

use super::Framed;
use crate::long::{LongTable, Source};
use crate::names::clarity;
use crate::request::Role;
use crate::text::quoted;

/// Fills labels of subjects, groups and clusters down over merged blanks.
///
/// Only where the column is clearly written so: it starts with a label, most
/// labels are followed by a blank, and no label comes back further down. A
/// single blank in a column that is filled otherwise stays a missing label.
pub(super) fn fill_down(table: &mut LongTable<'_>, framed: Framed<'_>) {
    for column in 0..table.columns.len() {
        let Source::Cell(at) = table.columns[column].source else { continue };
        let name = framed.written(at);
        let is_label = [Role::Subject, Role::Group, Role::Cluster].iter().any(|&role| clarity(name, role) >= 3);
        if (is_label || name.is_empty()) && is_merged(framed, at) {
            table.columns[column].source = Source::Down(filled_from(framed, at));
            table.notes.push(format!(
                "Column {} is written once per block: each label holds for the blank cells below it.",
                quoted(&framed.names.names[at])
            ));
        }
    }
}

fn is_merged(framed: Framed<'_>, column: usize) -> bool {
    let (mut labels, mut total, mut blank_after, mut after_label) = (Vec::new(), 0, 0, false);
    for cell in framed.cells(column) {
        let cell = cell.trim();
        if total == 0 && cell.is_empty() {
            return false;
        }
        total += 1;
        match cell.is_empty() {
            true => blank_after += usize::from(after_label),
            false => labels.push(cell),
        }
        after_label = !cell.is_empty();
        // A column without blanks is settled soon.
        if total == 1000 && labels.len() > 900 {
            return false;
        }
    }
    let count = labels.len();
    labels.sort_unstable();
    labels.dedup();
    count * 2 <= total && labels.len() == count && blank_after * 3 >= count * 2
}

/// For each record the record whose label holds.
fn filled_from(framed: Framed<'_>, column: usize) -> (usize, Vec<u32>) {
    let mut from = vec![0; framed.sheet.records()];
    let mut current = 0;
    for &record in &framed.frame.body {
        if !framed.sheet.cell(record as usize, column).trim().is_empty() {
            current = record;
        }
        from[record as usize] = current;
    }
    (column, from)
}
