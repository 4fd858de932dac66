//! What can be shown of a table that cannot be used as asked: roles, and every cell that stops the reading.

use super::*;
use crate::number::is_missing_label;
use crate::time::read_time;

/// The roles and problems of a table, whatever stops its reading. There are no observations.
///
/// `error`: why it cannot be used; the cells that it names are listed as problems.
pub(crate) fn outline(
    table: &LongTable<'_>,
    profiles: &[Profile],
    request: &Request,
    error: Option<&TableError>,
) -> Reading {
    // Where columns are named that do not exist, the inferred ones are shown.
    let inferred = Request { layout: request.layout, ..Request::default() };
    let roles = find_roles(table, profiles, request).or_else(|_| find_roles(table, profiles, &inferred));
    let mut observer = Observer::new(table, profiles, request, roles.unwrap_or_default());
    if observer.exclude().is_err() {
        observer.kept = (0..table.rows() as u32).collect();
    }
    observer.list_missing_ids();
    observer.list_unreadable_times();
    if let Some(error) = error {
        for (row, column, value, message) in error.places() {
            let known = |one: &crate::reading::Problem| one.row == row && one.column == column;
            if !observer.problems.listed().iter().any(known) {
                observer.problems.add(ProblemKind::StopsReading, row, &column, &value, || message);
            }
        }
    }
    // Why there are no responses has been said by the error.
    let _ = observer.responses();
    observer.questions.clear();
    observer.finish(Observations::default())
}

impl Observer<'_> {
    fn list_missing_ids(&mut self) {
        if let Some(column) = self.roles.column(Role::Subject) {
            let message = "The id is missing. Fill it in, or exclude the row.";
            self.list_cells(column, |cell| is_missing_label(cell).then_some(message));
        }
    }

    fn list_unreadable_times(&mut self) {
        if let Some(column) = self.roles.column(Role::Time) {
            let decimal = self.profiles[column].decimal;
            self.list_cells(column, |cell| match read_time(cell, decimal) {
                Some(_) => None,
                None if is_missing_label(cell) => Some("The time is missing. Fill it in, or exclude the row."),
                None => Some("No time that can be read. Correct it, or exclude the row."),
            });
        }
    }

    fn list_cells(&mut self, column: usize, message: impl Fn(&str) -> Option<&'static str>) {
        for &row in &self.kept {
            let cell = self.table.cell(row as usize, column);
            if let Some(message) = message(cell) {
                let (line, shown) = (self.table.line(row as usize), self.table.shown_column(row as usize, column));
                self.problems.add(ProblemKind::StopsReading, line, shown, cell, || message.to_string());
            }
        }
    }
}
