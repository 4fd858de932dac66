//! Times: numbers, numbers with a unit, and dates.

use crate::date::{WrittenDate, read_date};
use crate::error::TableError;
use crate::number::{Decimal, NotNumber, is_missing_label, number};
use crate::request::DateOrder;

/// A unit of time.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Unit {
    Second,
    Minute,
    Hour,
    Day,
    Week,
    Month,
    Year,
    Visit,
}

impl Unit {
    /// The unit in words, one of it.
    pub(crate) fn word(self) -> &'static str {
        match self {
            Unit::Second => "second",
            Unit::Minute => "minute",
            Unit::Hour => "hour",
            Unit::Day => "day",
            Unit::Week => "week",
            Unit::Month => "month",
            Unit::Year => "year",
            Unit::Visit => "visit",
        }
    }

    /// Length in seconds; months, years and visits have none that is fixed.
    fn seconds(self) -> Option<f64> {
        match self {
            Unit::Second => Some(1.0),
            Unit::Minute => Some(60.0),
            Unit::Hour => Some(3600.0),
            Unit::Day => Some(86_400.0),
            Unit::Week => Some(604_800.0),
            Unit::Month | Unit::Year | Unit::Visit => None,
        }
    }

    /// Reads `days`, `d`, `wk`.
    pub(crate) fn from_word(word: &str) -> Option<Unit> {
        Some(match word.trim_end_matches('.').to_lowercase().as_str() {
            "s" | "sec" | "secs" | "second" | "seconds" => Unit::Second,
            "min" | "mins" | "minute" | "minutes" => Unit::Minute,
            "h" | "hr" | "hrs" | "hour" | "hours" => Unit::Hour,
            "d" | "day" | "days" | "dpi" | "dpo" | "dpt" => Unit::Day,
            "w" | "wk" | "wks" | "week" | "weeks" => Unit::Week,
            "mo" | "mon" | "mth" | "mths" | "month" | "months" => Unit::Month,
            "y" | "yr" | "yrs" | "year" | "years" => Unit::Year,
            "v" | "visit" | "visits" => Unit::Visit,
            _ => return None,
        })
    }
}

/// One time as written.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum WrittenTime {
    Number(f64),
    WithUnit(f64, Unit),
    /// `d-1`: one day before, or day 1 behind a dash. The column decides.
    Dashed(f64, Unit),
    Date(WrittenDate),
}

/// Reads one time; `None` where it cannot be read.
pub(crate) fn read_time(cell: &str, decimal: Decimal) -> Option<WrittenTime> {
    if let Ok(value) = number(cell, decimal) {
        return Some(WrittenTime::Number(value));
    }
    read_with_unit(cell.trim(), decimal).or_else(|| read_date(cell).map(WrittenTime::Date))
}

/// `day 7`, `d7`, `week -2`, `7 d`, `T0`, `baseline`.
fn read_with_unit(cell: &str, decimal: Decimal) -> Option<WrittenTime> {
    if cell.len() > 40 {
        return None;
    }
    if cell.eq_ignore_ascii_case("baseline") {
        return Some(WrittenTime::Number(0.0));
    }
    let digit = cell.find(|c: char| c.is_ascii_digit())?;
    let start = match cell[..digit].chars().next_back() {
        Some(sign @ ('-' | '−' | '+')) if is_sign(&cell[..digit - sign.len_utf8()]) => digit - sign.len_utf8(),
        _ => digit,
    };
    let dashed = cell[..start].ends_with(['-', '−']);
    let word = cell[..start].trim().trim_end_matches(['_', '-', '−', '.', ':', ' ']);
    if word.is_empty() {
        let end = cell.rfind(|c: char| c.is_ascii_digit())? + 1;
        let unit = Unit::from_word(cell[end..].trim_start_matches(['_', '-', ' ']).trim())?;
        return Some(WrittenTime::WithUnit(number(&cell[..end], decimal).ok()?, unit));
    }
    let value = number(&cell[start..], decimal).ok()?;
    if word.eq_ignore_ascii_case("t") || word.eq_ignore_ascii_case("time") {
        return Some(WrittenTime::Number(value));
    }
    let unit = Unit::from_word(word)?;
    Some(if dashed { WrittenTime::Dashed(value, unit) } else { WrittenTime::WithUnit(value, unit) })
}

/// A dash is a sign after white space (`day -1`) or at the start, but not in `day-1`.
fn is_sign(before: &str) -> bool {
    before.is_empty() || before.ends_with(char::is_whitespace)
}

/// Times of a column, in one unit.
#[derive(Debug, Clone)]
pub(crate) struct Times {
    /// One per row; dates count from the earliest.
    pub(crate) values: Vec<f64>,
    /// The unit, where the cells say it.
    pub(crate) unit: Option<Unit>,
    pub(crate) are_dates: bool,
    /// What was converted, in words.
    pub(crate) note: Option<String>,
}

/// One time cell with its place.
pub(crate) struct TimeCell<'a> {
    pub(crate) text: &'a str,
    pub(crate) line: usize,
}

/// Reads a column of times. `header_unit`: the unit that the header gives.
///
/// # Errors
/// The first cell that cannot be read, units that cannot be converted, dates whose order is open.
pub(crate) fn read_times<'a>(
    cells: impl Iterator<Item = TimeCell<'a>> + Clone,
    column: &str,
    decimal: Decimal,
    header_unit: Option<Unit>,
    order: Option<DateOrder>,
) -> Result<Times, TableError> {
    let numbers: Option<Vec<f64>> = cells.clone().map(|cell| number(cell.text, decimal).ok()).collect();
    if let Some(values) = numbers {
        return Ok(Times { values, unit: header_unit, are_dates: false, note: None });
    }
    let mut written = Vec::new();
    for cell in cells.clone() {
        let time = read_time(cell.text, decimal).ok_or_else(|| unreadable(&cell, column, decimal))?;
        written.push(time);
    }
    let first_date = written.iter().position(|time| matches!(time, WrittenTime::Date(_)));
    let first_other = written.iter().position(|time| !matches!(time, WrittenTime::Date(_)));
    match (first_date, first_other) {
        (Some(_), None) => read_dates(&written, cells, column, order),
        (Some(date), Some(other)) => Err(mixed_with_dates(&written, cells, column, date, other)),
        _ => {
            settle_dashes(&mut written);
            one_unit(&written, cells, column, header_unit)
        }
    }
}

/// A dash is a minus where other times have none (`d-1, d0, d7`), and only a dash where all have it (`day-0, day-7`).
fn settle_dashes(written: &mut [WrittenTime]) {
    let plain = written.iter().any(|time| matches!(time, WrittenTime::WithUnit(..)));
    for time in written {
        if let WrittenTime::Dashed(value, unit) = *time {
            *time = WrittenTime::WithUnit(if plain { -value } else { value }, unit);
        }
    }
}

fn unreadable(cell: &TimeCell<'_>, column: &str, decimal: Decimal) -> TableError {
    let message = match number(cell.text, decimal) {
        Err(NotNumber::Infinite) => "is not a finite time. Correct it, or exclude the row.",
        _ if is_missing_label(cell.text) => "is no time: the time is missing. Fill it in, or exclude the row.",
        _ => {
            "is no time that can be read. Write a number, a day such as ‘day 7’ or a date such as 2024-03-05, or exclude the row."
        }
    };
    TableError::Cell {
        row: cell.line,
        column: column.to_string(),
        value: cell.text.to_string(),
        message: message.to_string(),
    }
}

fn mixed_with_dates<'a>(
    written: &[WrittenTime],
    cells: impl Iterator<Item = TimeCell<'a>> + Clone,
    column: &str,
    date: usize,
    other: usize,
) -> TableError {
    let dates = written.iter().filter(|time| matches!(time, WrittenTime::Date(_))).count();
    let mostly_dates = dates * 2 >= written.len();
    let odd = if mostly_dates { other } else { date };
    let (row, value) = cells.clone().nth(odd).map_or((0, String::new()), |cell| (cell.line, cell.text.to_string()));
    let message = match mostly_dates {
        true => "is no date, but most cells of this column are dates. Correct it, or exclude the row.",
        false => "is a date, but most cells of this column are none. Correct it, or exclude the row.",
    };
    TableError::Cell { row, column: column.to_string(), value, message: message.to_string() }
}

fn read_dates<'a>(
    written: &[WrittenTime],
    cells: impl Iterator<Item = TimeCell<'a>> + Clone,
    column: &str,
    order: Option<DateOrder>,
) -> Result<Times, TableError> {
    let dates: Vec<WrittenDate> = written
        .iter()
        .filter_map(|time| match time {
            WrittenTime::Date(date) => Some(*date),
            _ => None,
        })
        .collect();
    let open = dates.iter().position(|date| matches!(date, WrittenDate::Open { .. }));
    let (used, note) = match open {
        None => (DateOrder::DayFirst, None),
        Some(example) => order_of(&dates, cells.clone(), column, order, example)?,
    };
    let mut values = Vec::with_capacity(dates.len());
    for (cell, date) in cells.zip(&dates) {
        let days = date.days(used).ok_or_else(|| TableError::Cell {
            row: cell.line,
            column: column.to_string(),
            value: cell.text.to_string(),
            message: "is no date if read like the other dates of this column. Correct it, or exclude the row."
                .to_string(),
        })?;
        values.push(days);
    }
    let earliest = values.iter().copied().fold(f64::INFINITY, f64::min);
    values.iter_mut().for_each(|value| *value -= earliest);
    Ok(Times { values, unit: Some(Unit::Day), are_dates: true, note })
}

/// The order of day and month that the whole column allows.
fn order_of<'a>(
    dates: &[WrittenDate],
    mut cells: impl Iterator<Item = TimeCell<'a>>,
    column: &str,
    asked: Option<DateOrder>,
    example: usize,
) -> Result<(DateOrder, Option<String>), TableError> {
    if let Some(order) = asked {
        return Ok((order, None));
    }
    let fits = |order: DateOrder| dates.iter().filter(|date| date.days(order).is_some()).count();
    let (day, month) = (fits(DateOrder::DayFirst), fits(DateOrder::MonthFirst));
    let words = |order: &str| {
        Some(format!("Dates in column {} are read {order} first: no other order fits.", crate::text::quoted(column)))
    };
    match day.cmp(&month) {
        std::cmp::Ordering::Greater => Ok((DateOrder::DayFirst, words("day"))),
        std::cmp::Ordering::Less => Ok((DateOrder::MonthFirst, words("month"))),
        std::cmp::Ordering::Equal => {
            let (row, value) = cells.nth(example).map_or((0, String::new()), |cell| (cell.line, cell.text.to_string()));
            Err(TableError::DateOrder { column: column.to_string(), row, value })
        }
    }
}

/// Converts times with units into the smallest unit among them.
fn one_unit<'a>(
    written: &[WrittenTime],
    cells: impl Iterator<Item = TimeCell<'a>> + Clone,
    column: &str,
    header_unit: Option<Unit>,
) -> Result<Times, TableError> {
    let place =
        |index: usize| cells.clone().nth(index).map_or((0, String::new()), |cell| (cell.line, cell.text.to_string()));
    let mut units: Vec<(Unit, usize)> = Vec::new();
    let mut bare = None;
    for (index, time) in written.iter().enumerate() {
        match time {
            WrittenTime::WithUnit(_, unit) if units.iter().all(|(known, _)| known != unit) => {
                units.push((*unit, index))
            }
            WrittenTime::Number(value) if *value != 0.0 && bare.is_none() => bare = Some(index),
            _ => {}
        }
    }
    let Some(&(first, first_index)) = units.first() else {
        let values =
            written.iter().map(|time| if let WrittenTime::Number(value) = time { *value } else { 0.0 }).collect();
        return Ok(Times { values, unit: header_unit, are_dates: false, note: None });
    };
    if let (Some(index), None) = (bare, header_unit) {
        return Err(TableError::MixedUnits {
            column: column.to_string(),
            first: place(first_index),
            second: place(index),
        });
    }
    let smallest =
        units.iter().map(|(unit, _)| *unit).chain(header_unit.filter(|_| bare.is_some())).min().unwrap_or(first);
    let mixed =
        units.iter().find(|(unit, _)| *unit != smallest && (unit.seconds().is_none() || smallest.seconds().is_none()));
    if let Some(&(_, index)) = mixed {
        let other = units.iter().find(|(unit, _)| *unit == smallest).map_or(first_index, |(_, index)| *index);
        return Err(TableError::MixedUnits { column: column.to_string(), first: place(other), second: place(index) });
    }
    let factor = |unit: Unit| match (unit.seconds(), smallest.seconds()) {
        (Some(from), Some(to)) if unit != smallest => from / to,
        _ => 1.0,
    };
    let values = written.iter().map(|time| match time {
        WrittenTime::WithUnit(value, unit) => value * factor(*unit),
        WrittenTime::Number(value) => value * header_unit.map_or(1.0, factor),
        WrittenTime::Date(_) | WrittenTime::Dashed(..) => f64::NAN,
    });
    let note = (units.len() > 1).then(|| {
        format!(
            "Column {} mixes time units; all times are converted to {}s.",
            crate::text::quoted(column),
            smallest.word()
        )
    });
    Ok(Times { values: values.collect(), unit: Some(smallest), are_dates: false, note })
}

#[cfg(test)]
mod tests;
