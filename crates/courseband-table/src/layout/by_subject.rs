//! One row per time, one column per subject; the group in a row above or below the names, or in the names.

use super::heads::read_head;
use super::{Framed, free_name};
use crate::long::{LongColumn, LongTable, Place, Preset, Source};
use crate::names::clarity;
use crate::number::{Decimal, is_missing_label};
use crate::request::{Layout, Role};
use crate::text::{folded, quoted};
use crate::time::{WrittenTime, read_time};

/// Recognises the layout. `asked`: a person says that it is this one, so weaker signs are enough.
pub(super) fn recognise(framed: Framed<'_>, asked: bool) -> Option<LongTable<'_>> {
    let summaries = framed.summary_columns();
    let subjects: Vec<usize> = (1..framed.width())
        .filter(|&column| !summaries.contains(&column) && framed.is_numeric(column) && !framed.is_blank(column))
        .collect();
    if subjects.len() < 2 || !times_down(framed) {
        return None;
    }
    let others =
        (1..framed.width()).filter(|&column| !summaries.contains(&column) && !framed.is_numeric(column)).count();
    if !asked && (others > 1 || !signs(framed, &subjects)) {
        return None;
    }
    Some(melt(framed, &subjects, &summaries))
}

/// The first column holds a different time in (nearly) every row.
fn times_down(framed: Framed<'_>) -> bool {
    // The first rows settle it for most tables.
    let head: Vec<&str> = framed.cells(0).take(100).collect();
    are_times(head) && are_times(framed.cells(0).collect())
}

fn are_times(mut cells: Vec<&str>) -> bool {
    let is_time =
        |cell: &&&str| [Decimal::Point, Decimal::Comma].iter().any(|&decimal| read_time(cell, decimal).is_some());
    let (total, times) = (cells.len(), cells.iter().filter(is_time).count());
    cells.sort_unstable();
    cells.dedup();
    total >= 2 && times * 10 >= total * 8 && cells.len() * 10 >= total * 9
}

/// A row of groups, or names that are ids, beside a first column of times.
fn signs(framed: Framed<'_>, subjects: &[usize]) -> bool {
    let corner = framed.written(0);
    let says_subject = clarity(corner, Role::Subject) == 4;
    let says_time = clarity(corner, Role::Time) >= 3 && !says_subject;
    let heads_are_times =
        subjects.iter().all(|&column| read_head(framed.written(column)).is_some_and(|head| head.clear));
    // `s1`, `d2` may be subjects as well as seconds and days: beside heads that are times they are subjects.
    let is_short = |cell: &str| {
        let mut letters = cell.trim().chars();
        letters.next().is_some_and(char::is_alphabetic) && letters.next().is_some_and(|c| c.is_ascii_digit())
    };
    let worded = |cell: &&str| {
        matches!(
            read_time(cell, Decimal::Point),
            Some(WrittenTime::WithUnit(..) | WrittenTime::Dashed(..) | WrittenTime::Date(_))
        ) && !(heads_are_times && is_short(cell))
    };
    let mostly_worded = framed.cells(0).filter(worded).count() * 2 > framed.frame.body.len();
    let times = says_time || (mostly_worded && clarity(corner, Role::Subject) < 3);
    let grouped = group_labels(framed, subjects).is_some();
    if times {
        return grouped || are_ids(framed, subjects);
    }
    if !framed.names.spanner.is_empty() {
        return grouped && !(says_subject && heads_are_times);
    }
    // Nothing names either side: subjects are counted from 1, times start at 0.
    let first = framed.cells(0).next().map(str::trim);
    corner.is_empty() && heads_are_times && framed.written(subjects[0]) == "1" && first == Some("0")
}

/// Numbers, or names with digits, or repeated names.
fn are_ids(framed: Framed<'_>, subjects: &[usize]) -> bool {
    let names: Vec<&str> = subjects.iter().map(|&column| framed.written(column)).collect();
    let with_digits = names.iter().filter(|name| name.contains(|c: char| c.is_ascii_digit())).count();
    let units: Vec<bool> = names.iter().map(|name| read_head(name).is_some_and(|head| head.unit.is_some())).collect();
    let all_times = units.iter().all(|&unit| unit) && names.iter().all(|name| name.len() > 3);
    let mut distinct = names.clone();
    distinct.sort_unstable();
    distinct.dedup();
    !all_times && (with_digits * 10 >= names.len() * 8 || distinct.len() < names.len())
}

/// The group of each subject's column: from the spanning row, or from the names (`Saline 1`, `Saline 2`, `Drug 1`).
fn group_labels(framed: Framed<'_>, subjects: &[usize]) -> Option<Vec<String>> {
    let spanner = &framed.names.spanner;
    let mut labels = vec![String::new(); framed.width()];
    for &column in subjects {
        labels[column] = match spanner.is_empty() {
            false => spanner.get(column).cloned().unwrap_or_default(),
            true => stem_of(framed.written(column)),
        };
    }
    let mut counts: Vec<(String, usize)> = Vec::new();
    for &column in subjects {
        let key = folded(&labels[column]);
        match counts.iter_mut().find(|(known, _)| *known == key) {
            Some((_, count)) => *count += 1,
            None => counts.push((key, 1)),
        }
    }
    let named = counts.iter().all(|(label, _)| !label.is_empty() || !spanner.is_empty());
    let shared = counts.iter().filter(|(_, count)| *count >= 2).count();
    let enough = if spanner.is_empty() { shared >= 2 && shared * 2 > counts.len() } else { counts.len() >= 2 };
    (named && enough).then_some(labels)
}

/// `Saline` of `Saline 1`, `Saline_2`, `Saline` itself.
fn stem_of(name: &str) -> String {
    let stem = name.trim_end_matches(|c: char| c.is_ascii_digit()).trim_end_matches(['_', ' ', '.', '-', '#']);
    stem.to_string()
}

fn melt<'a>(framed: Framed<'a>, subjects: &[usize], summaries: &[usize]) -> LongTable<'a> {
    let corners = corners(framed);
    let corner = |role: Role, fallback: &str| {
        corners.iter().find(|corner| clarity(corner, role) >= 3).map_or(fallback, |corner| *corner).to_string()
    };
    let (first, last) = (framed.written(subjects[0]), framed.written(subjects[subjects.len() - 1]));
    let mut table = LongTable {
        sheet: framed.sheet,
        layout: Layout::WideBySubject,
        places: places(framed, subjects),
        columns: Vec::new(),
        presets: Vec::new(),
        sheet_names: framed.names.names.clone(),
        notes: framed.summary_note(summaries).into_iter().collect(),
    };
    add(
        &mut table,
        Role::Time,
        corner(Role::Time, "time"),
        Source::Cell(0),
        None,
        "Its rows are the times.".to_string(),
    );
    let reason = format!("Each column is one subject, {} to {}.", quoted(first), quoted(last));
    add(
        &mut table,
        Role::Subject,
        corner(Role::Subject, "subject"),
        Source::Across(subject_names(framed, subjects)),
        None,
        reason,
    );
    if let Some(labels) = group_labels(framed, subjects) {
        let reason = match framed.names.spanner.is_empty() {
            true => "The columns' names begin with it.",
            false => "It stands in a row of its own with the columns' names.",
        };
        add(&mut table, Role::Group, corner(Role::Group, "group"), Source::Across(labels), None, reason.to_string());
    }
    let (name, unit) = framed.response_from_title();
    add(&mut table, Role::Response, name, Source::Value, unit, "It stands under the subjects.".to_string());
    for column in 1..framed.width() {
        if !subjects.contains(&column) && !summaries.contains(&column) && !framed.is_blank(column) {
            let mut extra = framed.cell_column(column);
            extra.name = free_name(&extra.name, &table.columns);
            table.columns.push(extra);
        }
    }
    table
}

fn add(table: &mut LongTable<'_>, role: Role, name: String, source: Source, unit: Option<String>, reason: String) {
    table.presets.push(Preset { role, column: table.columns.len(), reason });
    let name = free_name(&name, &table.columns);
    table.columns.push(LongColumn { name, source, unit });
}

/// First cells of the header rows: they may name the times, the subjects or the groups.
fn corners(framed: Framed<'_>) -> Vec<&str> {
    let records = [framed.frame.header, framed.frame.spanner, framed.frame.titles.last().copied()];
    records
        .iter()
        .flatten()
        .map(|&record| framed.sheet.cell(record, 0).trim())
        .filter(|cell| !cell.is_empty())
        .collect()
}

fn places(framed: Framed<'_>, subjects: &[usize]) -> Vec<Place> {
    let body = framed.frame.body.iter();
    body.flat_map(|&record| subjects.iter().map(move |&column| Place { record, column: column as u32 })).collect()
}

/// Names by column: as written, numbered only where one occurs twice in a group.
fn subject_names(framed: Framed<'_>, subjects: &[usize]) -> Vec<String> {
    let label = |column: usize| framed.names.spanner.get(column).map_or("", String::as_str);
    let mut names = vec![String::new(); framed.width()];
    let mut seen: std::collections::HashSet<(&str, String)> = std::collections::HashSet::new();
    for &column in subjects {
        let written = framed.written(column);
        let fresh = !is_missing_label(written) && seen.insert((label(column), folded(written)));
        names[column] = if fresh { written.to_string() } else { framed.names.names[column].clone() };
    }
    names
}
