//! From the long form to observations, step by step.

use crate::error::TableError;
use crate::groups;
use crate::labels::Labels;
use crate::long::LongTable;
use crate::number::{NotNumber, is_missing, limit, number};
use crate::observations::{Covariate, CovariateValues, Observations, SubjectInfo};
use crate::problems::Problems;
use crate::profile::Profile;
use crate::reading::{ColumnsUsed, ProblemKind, Question, Reading};
use crate::request::{DayZero, Merge, Request, Role};
use crate::roles::{Roles, find_roles};
use crate::subjects::{Subjects, tell_apart};
use crate::text::{counted, quoted};
use crate::time::{TimeCell, Times, read_times};

/// More groups than this are no groups to compare.
const MAX_GROUPS: usize = 60;

/// Everything of one reading, as it grows.
struct Observer<'a> {
    table: &'a LongTable<'a>,
    profiles: &'a [Profile],
    request: &'a Request,
    roles: Roles,
    /// Rows of the long form that are not excluded.
    kept: Vec<u32>,
    excluded: usize,
    /// Which responses are limits, by kept row.
    limits: Vec<i8>,
    problems: Problems,
    notes: Vec<String>,
    questions: Vec<Question>,
    near_spellings: Vec<Merge>,
}

/// Reads observations from the long form.
pub(crate) fn observe(table: &LongTable<'_>, profiles: &[Profile], request: &Request) -> Result<Reading, TableError> {
    let roles = find_roles(table, profiles, request)?;
    let mut observer = Observer::new(table, profiles, request, roles);
    observer.exclude()?;
    let observations = match observer.questions.is_empty() {
        true => observer.read()?,
        false => Observations::default(),
    };
    Ok(observer.finish(observations))
}

impl<'a> Observer<'a> {
    fn new(table: &'a LongTable<'a>, profiles: &'a [Profile], request: &'a Request, roles: Roles) -> Self {
        Observer {
            table,
            profiles,
            request,
            kept: Vec::new(),
            excluded: 0,
            limits: Vec::new(),
            problems: Problems::default(),
            notes: table.notes.clone(),
            questions: roles.questions.clone(),
            near_spellings: Vec::new(),
            roles,
        }
    }
}

impl Observer<'_> {
    fn finish(mut self, observations: Observations) -> Reading {
        let name = |role: Role| self.roles.column(role).map(|column| self.table.columns[column].name.clone());
        let columns = ColumnsUsed {
            subject: name(Role::Subject),
            time: name(Role::Time),
            group: name(Role::Group),
            response: name(Role::Response),
            cluster: name(Role::Cluster),
            covariates: self.roles.covariates.iter().map(|&column| self.table.columns[column].name.clone()).collect(),
        };
        let response_unit = self
            .roles
            .column(Role::Response)
            .and_then(|column| self.table.columns[column].unit.clone().or_else(|| self.profiles[column].unit.clone()));
        let (problems, problem_counts) = self.problems.finish(&mut self.notes);
        Reading {
            observations,
            columns,
            reasons: self.roles.reasons(self.table),
            problems,
            problem_counts,
            notes: self.notes,
            questions: self.questions,
            near_spellings: self.near_spellings,
            layout: self.table.layout,
            response_unit,
            excluded: self.excluded,
            measured: self.table.measured(),
        }
    }

    /// A column that is known to be there: roles are settled before reading.
    fn needed(&self, role: Role) -> Result<usize, TableError> {
        self.roles.column(role).ok_or(TableError::Needed { role })
    }

    fn name(&self, column: usize) -> &str {
        &self.table.columns[column].name
    }

    fn cells(&self, column: usize) -> impl Iterator<Item = &str> + Clone {
        self.kept.iter().map(move |&row| self.table.cell(row as usize, column))
    }

    fn line(&self, kept: usize) -> usize {
        self.table.line(self.kept[kept] as usize)
    }

    fn exclude(&mut self) -> Result<(), TableError> {
        let mut out = vec![false; self.table.rows()];
        for exclusion in &self.request.exclusions {
            let rows = self.rows_of(exclusion.row, exclusion.column.as_deref())?;
            rows.into_iter().for_each(|row| out[row] = true);
        }
        self.kept = (0..self.table.rows() as u32).filter(|&row| !out[row as usize]).collect();
        self.excluded = self.table.rows() - self.kept.len();
        if self.excluded > 0 {
            let lines = self.request.exclusions.len();
            self.notes.push(match lines == self.excluded {
                true => format!("Excluded on request: {}.", counted(lines, "row")),
                false => {
                    format!("Excluded on request: {} with {}.", counted(lines, "row"), counted(self.excluded, "cell"))
                }
            });
        }
        match self.kept.is_empty() {
            true => Err(TableError::NothingLeft { why: "all are excluded".to_string() }),
            false => Ok(()),
        }
    }

    /// Rows of the long form that stand on a line of the file.
    fn rows_of(&self, line: usize, column: Option<&str>) -> Result<Vec<usize>, TableError> {
        let sheet = self.table.sheet;
        let refuse = |why: String| TableError::Exclusion { row: line, why };
        let Some(record) = sheet.record_at(line) else {
            let last = sheet.line(sheet.records() - 1);
            return Err(refuse(match line == 0 || line > last {
                true => format!("the table ends at row {last}"),
                false => "no row of data begins there".to_string(),
            }));
        };
        let start = self.table.places.partition_point(|place| (place.record as usize) < record);
        let end = self.table.places.partition_point(|place| place.record as usize <= record);
        if start == end {
            return Err(refuse("it holds no data (a header, title, unit or summary row)".to_string()));
        }
        let Some(column) = column else { return Ok((start..end).collect()) };
        let rows: Vec<usize> = (start..end)
            .filter(|&row| self.table.sheet_names[self.table.places[row].column as usize] == column)
            .collect();
        match rows.is_empty() {
            true => Err(refuse(format!("it has no measurement in column {}", quoted(column)))),
            false => Ok(rows),
        }
    }

    /// Cells to the right of the last named column.
    fn surplus_cells(&mut self) {
        let (sheet, width) = (self.table.sheet, self.table.sheet_names.len());
        let mut last = u32::MAX;
        for &row in &self.kept {
            let record = self.table.places[row as usize].record;
            if record == last || sheet.width_of(record as usize) <= width {
                continue;
            }
            last = record;
            let surplus =
                (width..sheet.width_of(record as usize)).find(|&at| !sheet.cell(record as usize, at).trim().is_empty());
            if let Some(at) = surplus {
                let value = sheet.cell(record as usize, at);
                self.problems.add(
                    ProblemKind::SurplusCells,
                    sheet.line(record as usize),
                    &format!("column {}", at + 1),
                    value,
                    || {
                        format!(
                            "The header names {}; this cell is not read. Check whether the row has shifted.",
                            counted(width, "column")
                        )
                    },
                );
            }
        }
    }

    fn read(&mut self) -> Result<Observations, TableError> {
        self.surplus_cells();
        let ids = self.ids()?;
        let times = self.times()?;
        let mut groups = self.groups()?;
        let subjects = tell_apart(&ids, &groups, &times.values);
        self.check_ids(&ids, &groups, &subjects)?;
        if self.questions.iter().any(|question| question.needs_answer) {
            return Ok(Observations::default());
        }
        self.near_groups(&groups);
        let responses = self.responses()?;
        let covariates = self.covariates();
        let clusters = self.clusters(&subjects)?;
        let values = self.zeroed(times, &subjects);
        let usable = self.usable(&subjects, &responses, &covariates);
        self.build(ids, &mut groups, subjects, clusters, values, responses, covariates, usable)
    }

    fn ids(&self) -> Result<Labels, TableError> {
        let column = self.needed(Role::Subject)?;
        let labels = Labels::trimmed(self.cells(column));
        match labels.index.iter().position(|&index| index == Labels::NONE) {
            None => Ok(labels),
            Some(kept) => Err(TableError::Cell {
                row: self.line(kept),
                column: self.name(column).to_string(),
                value: self.table.cell(self.kept[kept] as usize, column).to_string(),
                message: "is no subject: the id is missing. Fill it in, or exclude the row.".to_string(),
            }),
        }
    }

    fn times(&mut self) -> Result<Times, TableError> {
        let column = self.needed(Role::Time)?;
        let cells = self
            .kept
            .iter()
            .map(|&row| TimeCell { text: self.table.cell(row as usize, column), line: self.table.line(row as usize) });
        let unit = self.table.columns[column].unit.as_deref().and_then(crate::time::Unit::from_word);
        let unit = unit.or_else(|| crate::names::time_unit(self.name(column)));
        let times = read_times(cells, self.name(column), self.profiles[column].decimal, unit, self.request.date_order)
            .map_err(|error| self.with_shift(error))?;
        self.notes.extend(times.note.clone());
        Ok(self.day_numbers_as_dates(times, column))
    }

    /// Says so where the cell's row has more cells than the header: it has shifted.
    fn with_shift(&self, error: TableError) -> TableError {
        let (sheet, width) = (self.table.sheet, self.table.sheet_names.len());
        let TableError::Cell { row, column, value, message } = error else { return error };
        let cells = sheet.record_at(row).map_or(0, |record| sheet.width_of(record));
        let has_shifted = cells > width
            && sheet
                .record_at(row)
                .is_some_and(|record| (width..cells).any(|at| !sheet.cell(record, at).trim().is_empty()));
        let hint = match has_shifted {
            true => format!(
                " The row has {cells} cells and the header {width}: perhaps a separator stands inside a name; put that name in quotation marks."
            ),
            false => String::new(),
        };
        TableError::Cell { row, column, value, message: message + &hint }
    }

    /// A date column of numbers near 45000 holds a spreadsheet's day numbers.
    fn day_numbers_as_dates(&mut self, mut times: Times, column: usize) -> Times {
        let is_date = crate::names::words(self.name(column)).iter().any(|word| word == "date");
        let plausible = times.values.iter().all(|value| (20_000.0..80_000.0).contains(value));
        if is_date && !times.are_dates && plausible {
            let earliest = times.values.iter().copied().fold(f64::INFINITY, f64::min);
            times.values.iter_mut().for_each(|value| *value -= earliest);
            (times.are_dates, times.unit) = (true, Some(crate::time::Unit::Day));
            self.notes.push(format!(
                "Column {} holds a spreadsheet's day numbers: read as dates.",
                quoted(self.name(column))
            ));
        }
        times
    }

    fn groups(&mut self) -> Result<Labels, TableError> {
        let Some(column) = self.roles.column(Role::Group) else {
            return Ok(Labels { index: vec![0; self.kept.len()], names: vec!["all".to_string()] });
        };
        let mut labels = Labels::as_written(self.cells(column));
        let mut notes = Vec::new();
        groups::unite(&mut labels, &self.request.merges, &mut notes);
        if labels.names.len() > MAX_GROUPS {
            return Err(TableError::TooManyGroups { column: self.name(column).to_string(), count: labels.names.len() });
        }
        self.notes.extend(notes);
        Ok(labels)
    }

    fn check_ids(&mut self, ids: &Labels, groups: &Labels, subjects: &Subjects) -> Result<(), TableError> {
        let Some(group) = self.roles.column(Role::Group) else { return Ok(()) };
        let column = self.name(self.needed(Role::Subject)?);
        let found = subjects.check_shared_ids(ids, groups, column, self.name(group), |kept| self.line(kept))?;
        if let Some(text) = found {
            self.shared_ids(&text, group, subjects);
        }
        if !subjects.filled.is_empty() {
            let lines: Vec<usize> = subjects.filled.iter().take(6).map(|&kept| self.line(kept)).collect();
            self.notes.push(format!(
                "The group is missing in {} ({}{}) and was taken from the subject's other rows.",
                counted(subjects.filled.len(), "row"),
                crate::error::rows(&lines),
                if subjects.filled.len() > 6 { ", ..." } else { "" }
            ));
        }
        Ok(())
    }

    fn near_groups(&mut self, groups: &Labels) {
        let Some(column) = self.roles.column(Role::Group) else { return };
        for (rare, common) in groups::near_misses(groups) {
            let (rare_name, common_name) = (&groups.names[rare as usize], &groups.names[common as usize]);
            self.near_spellings.push(Merge { from: rare_name.clone(), into: common_name.clone() });
            for (kept, _) in groups.index.iter().enumerate().filter(|(_, index)| **index == rare) {
                let row = self.kept[kept] as usize;
                let shown = self.table.shown_column(row, column);
                self.problems.add(ProblemKind::NearSpelling, self.table.line(row), shown, self.table.cell(row, column), || {
                    format!("Group {} is one letter away from {}. Kept as a group of its own; unite them if they are the same.", quoted(rare_name), quoted(common_name))
                });
            }
        }
    }

    /// Responses per kept row; NaN where there is none.
    fn responses(&mut self) -> Result<Vec<f64>, TableError> {
        let column = self.needed(Role::Response)?;
        let decimal = self.profiles[column].decimal;
        let unit = self.profiles[column].unit.clone();
        let mut values = Vec::with_capacity(self.kept.len());
        self.limits = vec![0; self.kept.len()];
        for &row in &self.kept {
            let row = row as usize;
            let cell = self.table.cell(row, column);
            let value = match number(cell, decimal) {
                Ok(value) => value,
                Err(NotNumber::Unit(value, own)) if unit.as_deref() == Some(own.as_str()) => value,
                Err(NotNumber::Below | NotNumber::Above) if self.request.limits => {
                    let (value, side) = limit(cell, decimal).unwrap_or((f64::NAN, 0));
                    self.limits[values.len()] = side;
                    value
                }
                Err(odd) => {
                    let (kind, message) = odd_response(&odd, decimal);
                    let shown = self.table.shown_column(row, column);
                    self.problems.add(kind, self.table.line(row), shown, cell, || message);
                    f64::NAN
                }
            };
            values.push(value);
        }
        self.note_limits(column);
        match values.iter().any(|value| value.is_finite()) {
            true => Ok(values),
            false => Err(TableError::NoResponses {
                column: self.name(column).to_string(),
                rows: values.len(),
                example: self.cells(column).find(|cell| !is_missing(cell)).unwrap_or("").to_string(),
            }),
        }
    }

    fn note_limits(&mut self, column: usize) {
        let count = self.problems.count(ProblemKind::BeyondLimit);
        if count > 0 {
            self.notes.push(format!(
                "Column {}: {} given as below or above a limit, such as ‘<0.5’, and kept out.",
                quoted(self.name(column)),
                if count == 1 { "1 response is".to_string() } else { format!("{count} responses are") }
            ));
        }
        if let Some(unit) = &self.profiles[column].unit {
            self.notes.push(format!(
                "Cells of column {} carry the unit {}: read without it.",
                quoted(self.name(column)),
                quoted(unit)
            ));
        }
    }
}

/// What an unreadable response is, and what was done.
fn odd_response(odd: &NotNumber, decimal: crate::number::Decimal) -> (ProblemKind, String) {
    let mark = match decimal {
        crate::number::Decimal::Point => "a comma, where this column has decimal points",
        crate::number::Decimal::Comma => "a point, where this column has decimal commas",
    };
    match odd {
        NotNumber::Missing => (ProblemKind::MissingResponse, "No response: the row is left out.".to_string()),
        NotNumber::Below => (ProblemKind::BeyondLimit, "Below a limit, not a value: the row is left out.".to_string()),
        NotNumber::Above => (ProblemKind::BeyondLimit, "Above a limit, not a value: the row is left out.".to_string()),
        NotNumber::Unit(_, unit) => (
            ProblemKind::UnitInCell,
            format!("The unit {} stands in the cell: the row is left out. Write the number alone.", quoted(unit)),
        ),
        NotNumber::Infinite => {
            (ProblemKind::NotFinite, "Infinite or too large: the row is left out. Correct the value.".to_string())
        }
        NotNumber::OtherMark => {
            (ProblemKind::NotANumber, format!("It has {mark}: the row is left out. Correct the value."))
        }
        NotNumber::Text => {
            (ProblemKind::NotANumber, "Not a number: the row is left out. Correct the value.".to_string())
        }
    }
}

mod build;
mod outline;
mod shared;

pub(crate) use outline::outline;
