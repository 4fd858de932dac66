//! The frame of a table: titles, header rows, unit row, body, summary rows at the foot.

use crate::names::{Summary, clarity, is_unit, split_unit, summarises, summary};
use crate::number::{Decimal, number};
use crate::request::Role;
use crate::sheet::Sheet;
use crate::text::folded;
use crate::time::{Unit, read_time};

/// Records looked at to find the header.
const HEAD: usize = 50;

/// Which records of a sheet are what. Records are indices into the sheet.
#[derive(Debug, Clone, Default)]
pub(crate) struct Frame {
    /// Lines above the header that are no part of the table.
    pub(crate) titles: Vec<usize>,
    /// A header row whose cells span several columns, above or below the header.
    pub(crate) spanner: Option<usize>,
    /// A row of times above the header: each holds for its column and the blank ones to its right.
    pub(crate) times: Option<usize>,
    /// The row with the column names; none where the first row holds data already.
    pub(crate) header: Option<usize>,
    /// A row of units below the header.
    pub(crate) units: Option<usize>,
    /// Rows of data.
    pub(crate) body: Vec<u32>,
    /// Rows that summarise others.
    pub(crate) summaries: Vec<usize>,
    /// Copies of the header between the rows.
    pub(crate) repeated: Vec<usize>,
}

/// Finds the frame.
pub(crate) fn find_frame(sheet: &Sheet) -> Frame {
    let mut frame = Frame::default();
    let header = header_record(sheet);
    let mut next = header;
    frame.titles = (0..header).filter(|&record| filled(sheet, record) > 0).collect();
    if has_names(sheet, header) {
        next += 1;
        frame.header = Some(header);
        if header > 0 && times_above(sheet, header - 1, header) {
            frame.times = Some(header - 1);
            frame.titles.retain(|&record| record != header - 1);
        } else if times_above(sheet, header, header + 1) {
            frame.times = Some(header);
            frame.header = Some(header + 1);
            next += 1;
        } else if two_header_rows(sheet, header) {
            frame.spanner = Some(header);
            frame.header = Some(header + 1);
            next += 1;
        } else if is_group_row(sheet, header, next) {
            frame.spanner = Some(next);
            next += 1;
        } else if let Some(&above) = frame.titles.last().filter(|&&above| spans(sheet, above)) {
            frame.spanner = Some(above);
            frame.titles.pop();
        }
        if next < sheet.records() && is_unit_row(sheet, next) {
            frame.units = Some(next);
            next += 1;
        }
    }
    sort_body(sheet, next, &mut frame);
    frame
}

fn sort_body(sheet: &Sheet, start: usize, frame: &mut Frame) {
    let records: Vec<u32> =
        (start as u32..sheet.records() as u32).filter(|&record| !is_blank(sheet, record as usize)).collect();
    let signs: Vec<Summary> = records.iter().map(|&record| summary_sign(sheet, record as usize)).collect();
    for (&record, summarises) in records.iter().zip(summarises(&signs)) {
        if summarises {
            frame.summaries.push(record as usize);
        } else if frame.header.is_some_and(|header| repeats(sheet, header, record as usize)) {
            frame.repeated.push(record as usize);
        } else {
            frame.body.push(record);
        }
    }
}

fn is_blank(sheet: &Sheet, record: usize) -> bool {
    sheet.cells(record).all(|cell| cell.trim().is_empty())
}

/// A summary word in the first cell, and something to summarise in the same row.
fn summary_sign(sheet: &Sheet, record: usize) -> Summary {
    let first = sheet.cells(record).find(|cell| !cell.trim().is_empty()).unwrap_or("");
    match summary(first) {
        sign if sign != Summary::None && filled(sheet, record) >= 2 => sign,
        _ => Summary::None,
    }
}

/// A copy of the header.
fn repeats(sheet: &Sheet, header: usize, record: usize) -> bool {
    // The last cell differs in nearly every row: compare it first.
    let last = sheet.width_of(header) - 1;
    sheet.cell(header, last).trim() == sheet.cell(record, last).trim()
        && filled(sheet, header) > 1
        && sheet.cells(header).map(str::trim).eq(sheet.cells(record).map(str::trim))
}

/// Number of cells that are not blank.
pub(crate) fn filled(sheet: &Sheet, record: usize) -> usize {
    sheet.cells(record).filter(|cell| !cell.trim().is_empty()).count()
}

/// The first record that is filled like the rows of the table.
fn header_record(sheet: &Sheet) -> usize {
    let mut counts: Vec<usize> =
        (0..sheet.records().min(500)).map(|record| filled(sheet, record)).filter(|&n| n > 0).collect();
    counts.sort_unstable();
    let typical = counts.get(counts.len() / 2).copied().unwrap_or(1);
    let needed = if typical <= 1 { 1 } else { 2.max((typical * 3).div_ceil(5)) };
    let limit = sheet.records().min(HEAD);
    let mut header = (0..limit).find(|&record| filled(sheet, record) >= needed).unwrap_or(0);
    if header == 0 && sheet.cell(0, 0).starts_with("sep=") && sheet.records() > 1 {
        header = 1;
    }
    // A line such as "Operator, A. B." above the names: the names are more, and all words.
    while header + 1 < limit
        && filled(sheet, header + 1) > filled(sheet, header)
        && !spans(sheet, header)
        && (all_words(sheet, header + 1) || begins_with_part(sheet, header + 1))
        && header + 2 < sheet.records()
        && !all_words(sheet, header + 2)
    {
        header += 1;
    }
    header
}

fn is_number(cell: &str) -> bool {
    number(cell, Decimal::Point).is_ok() || number(cell, Decimal::Comma).is_ok()
}

/// The first cell names a part, such as `mouse` or `day`.
fn begins_with_part(sheet: &Sheet, record: usize) -> bool {
    let first = sheet.cell(record, 0);
    !is_number(first) && Role::ALL.iter().any(|&role| clarity(first, role) >= 3)
}

fn all_words(sheet: &Sheet, record: usize) -> bool {
    sheet.cells(record).filter(|cell| !cell.trim().is_empty()).all(|cell| !is_number(cell))
}

/// False where the record starts with a number and holds another: data, not names.
fn has_names(sheet: &Sheet, record: usize) -> bool {
    let first = sheet.cell(record, 0).trim();
    let later = sheet.cells(record).skip(1).any(is_number);
    !(is_number(first) && (later || sheet.width() == 1))
}

/// Labels over several columns: cells after the first that leave blanks or repeat each other,
/// are no numbers, and stand beside an empty corner or the name of a part.
fn spans(sheet: &Sheet, record: usize) -> bool {
    let corner = sheet.cell(record, 0).trim();
    let names_part = Role::ALL.iter().any(|&role| clarity(corner, role) >= 2);
    if !corner.is_empty() && !names_part {
        return false;
    }
    let labels: Vec<&str> = sheet.cells(record).skip(1).map(str::trim).filter(|cell| !cell.is_empty()).collect();
    let mut distinct = labels.clone();
    distinct.sort_unstable();
    distinct.dedup();
    let columns = sheet.width().saturating_sub(1);
    distinct.len() >= 2
        && distinct.len() < columns
        && labels.iter().all(|label| read_time(label, Decimal::Point).is_none())
}

/// A row of spanning labels, then a row of names, then rows that start with a time or number.
fn two_header_rows(sheet: &Sheet, record: usize) -> bool {
    if record + 2 >= sheet.records() || !spans(sheet, record) {
        return false;
    }
    let corner = sheet.cell(record + 1, 0).trim();
    let is_name = corner.is_empty()
        || (read_time(corner, Decimal::Point).is_none()
            && [Role::Subject, Role::Time].iter().any(|&role| clarity(corner, role) >= 2));
    let below = sheet.cell(record + 2, 0);
    is_name && filled(sheet, record + 1) >= filled(sheet, record).min(2) && read_time(below, Decimal::Point).is_some()
}

/// Times over names that come back under each of them: `day 0, , day 7, ` over `mouse, weight, size, weight, size`.
fn times_above(sheet: &Sheet, above: usize, names: usize) -> bool {
    if names + 1 >= sheet.records() || sheet.width_of(names) < 3 {
        return false;
    }
    let labels: Vec<(usize, &str)> =
        sheet.cells(above).map(str::trim).enumerate().skip(1).filter(|(_, cell)| !cell.is_empty()).collect();
    let Some(&(first, _)) = labels.first() else { return false };
    let mut times: Vec<&str> = labels.iter().map(|(_, label)| *label).collect();
    times.sort_unstable();
    times.dedup();
    let mut under: Vec<String> = sheet.cells(names).skip(first).map(folded).collect();
    let count = under.len();
    let worded = under.iter().all(|name| !name.is_empty() && read_time(name, Decimal::Point).is_none());
    under.sort_unstable();
    under.dedup();
    let below = |column: usize| sheet.cell(names + 1, column).trim();
    let numbers = labels.iter().filter(|(column, _)| is_number(below(*column))).count();
    times.len() >= 2
        && labels.iter().all(|(_, label)| read_time(label, Decimal::Point).is_some())
        && worded
        && under.len() < count
        && numbers * 2 > labels.len()
}

/// A row below the header that says the group of each column: `group, Saline, Saline, Drug`.
fn is_group_row(sheet: &Sheet, header: usize, record: usize) -> bool {
    record < sheet.records()
        && clarity(sheet.cell(record, 0), Role::Group) >= 3
        && clarity(sheet.cell(header, 0), Role::Group) < 3
        && sheet.width() > 2
        && all_words(sheet, record)
        && filled(sheet, record) * 2 >= sheet.width().min(filled(sheet, header))
}

/// Units, and no numbers, where the rows below hold numbers.
fn is_unit_row(sheet: &Sheet, record: usize) -> bool {
    let below: Vec<usize> = (record + 1..sheet.records()).take(20).collect();
    let (mut units, mut numbers) = (0, 0);
    for (column, cell) in sheet.cells(record).enumerate() {
        if cell.trim().is_empty() {
            continue;
        }
        numbers += usize::from(is_number(cell));
        let numeric_below = below.iter().filter(|&&row| is_number(sheet.cell(row, column))).count();
        units += usize::from(is_unit(cell) && numeric_below * 2 > below.len());
    }
    units > 0 && numbers == 0 && !below.is_empty()
}

/// Column names: unique, never empty; with the units that the header gives.
#[derive(Debug, Clone)]
pub(crate) struct Names {
    /// As written, trimmed; `column 3` where empty, `weight (2)` where repeated.
    pub(crate) names: Vec<String>,
    /// As written, trimmed; empty and repeated ones left so.
    pub(crate) written: Vec<String>,
    /// Unit in brackets or in the unit row.
    pub(crate) units: Vec<Option<String>>,
    /// Labels spanning several columns, filled to the right; empty without such a row.
    pub(crate) spanner: Vec<String>,
    /// Times above the names, filled to the right; empty without such a row.
    pub(crate) times: Vec<String>,
    /// The unit that the first cell of that row gives to its times.
    pub(crate) times_unit: Option<Unit>,
}

/// Names of the columns.
pub(crate) fn column_names(sheet: &Sheet, frame: &Frame) -> Names {
    let mut written: Vec<String> = match frame.header {
        Some(header) => sheet.cells(header).map(|cell| cell.split_whitespace().collect::<Vec<_>>().join(" ")).collect(),
        None => Vec::new(),
    };
    let body = frame.body.iter().take(200).map(|&record| sheet.width_of(record as usize));
    let (total, one_more) =
        body.fold((0, 0), |(total, more), width| (total + 1, more + usize::from(width == written.len() + 1)));
    if frame.header.is_none() {
        written = vec![String::new(); sheet.width()];
    } else if total > 0 && one_more * 10 >= total * 9 && written.iter().all(|name| !name.is_empty()) {
        written.insert(0, "row name".to_string());
    }
    trim_blank_end(sheet, frame, &mut written);
    let units = (0..written.len()).map(|column| unit_of(sheet, frame, column, &written[column])).collect();
    let times = filled_labels(sheet, frame.times, written.len());
    let times_unit = frame.times.and_then(|record| crate::names::time_unit(sheet.cell(record, 0)));
    let shown: Vec<String> = (written.iter().enumerate())
        .map(|(column, name)| match times.get(column).filter(|time| !time.is_empty()) {
            Some(time) => format!("{name} {time}"),
            None => name.clone(),
        })
        .collect();
    let spanner = filled_labels(sheet, frame.spanner, written.len());
    Names { names: unique(&shown), units, spanner, times, times_unit, written }
}

/// Drops unnamed columns without data at the right.
fn trim_blank_end(sheet: &Sheet, frame: &Frame, written: &mut Vec<String>) {
    while written.len() > 1 && written.last().is_some_and(String::is_empty) {
        let column = written.len() - 1;
        if frame.body.iter().any(|&record| !sheet.cell(record as usize, column).trim().is_empty()) {
            return;
        }
        written.pop();
    }
}

fn unit_of(sheet: &Sheet, frame: &Frame, column: usize, name: &str) -> Option<String> {
    let below = frame
        .units
        .map(|record| sheet.cell(record, column).trim().trim_matches(['(', ')', '[', ']']))
        .filter(|unit| !unit.is_empty());
    below.or(split_unit(name).1).map(str::to_string)
}

/// The labels of a record, each filled to the right over blanks; the first column has none.
fn filled_labels(sheet: &Sheet, record: Option<usize>, width: usize) -> Vec<String> {
    let Some(record) = record else { return Vec::new() };
    let mut labels = vec![String::new(); width];
    let mut label = "";
    for (column, slot) in labels.iter_mut().enumerate().skip(1) {
        let cell = sheet.cell(record, column).trim();
        label = if cell.is_empty() { label } else { cell };
        slot.push_str(label);
    }
    labels
}

fn unique(written: &[String]) -> Vec<String> {
    let mut seen = std::collections::HashMap::new();
    let mut names = Vec::with_capacity(written.len());
    for (column, name) in written.iter().enumerate() {
        let name = if name.is_empty() { format!("column {}", column + 1) } else { name.clone() };
        let count = seen.entry(name.clone()).and_modify(|count| *count += 1).or_insert(1);
        names.push(if *count == 1 { name } else { format!("{name} ({count})") });
    }
    names
}
