//! One row per subject, one column per time.

use super::heads::{TimeHead, read_head};
use super::{Framed, free_name};
use crate::long::{LongColumn, LongTable, Place, Preset, Source};
use crate::names::clarity;
use crate::number::is_missing_label;
use crate::request::{Layout, Role};
use crate::text::{folded, quoted};
use crate::time::Unit;
use std::collections::HashMap;

/// Columns that hold one measurement at different times.
struct Family {
    /// What is measured; empty where the heads do not say.
    stem: String,
    /// Column and head, in the order of the sheet.
    members: Vec<(usize, TimeHead)>,
}

/// Recognises the layout. `asked`: a person says that it is this one, so weaker signs are enough.
pub(super) fn recognise(framed: Framed<'_>, asked: bool) -> Option<LongTable<'_>> {
    let mut families = families(framed);
    families.retain(|family| asked || is_plausible(framed, family));
    let most = families.iter().map(|family| family.members.len()).max()?;
    families.retain(|family| family.members.len() * 2 > most && family.members.len() >= 2);
    // Heads such as pre_1 and post_1 are times only if a unit says so.
    let unclear = families.iter().filter(|family| !family.members[0].1.clear).count();
    if families.is_empty() || (!asked && unclear > 1) || (!asked && has_time_column(framed, &families)) {
        return None;
    }
    Some(melt(framed, &families))
}

fn families(framed: Framed<'_>) -> Vec<Family> {
    let mut families: Vec<Family> = Vec::new();
    let mut places: HashMap<(String, bool), usize> = HashMap::new();
    for column in 0..framed.width() {
        let Some(head) = head_of(framed, column).filter(|_| framed.is_numeric(column)) else {
            continue;
        };
        let stem = match framed.names.spanner.get(column) {
            Some(label) if head.stem.is_empty() => label.clone(),
            _ => head.stem.clone(),
        };
        let place = *places.entry((folded(&stem), head.clear)).or_insert(families.len());
        match families.get_mut(place) {
            Some(family) => family.members.push((column, head)),
            None => families.push(Family { stem, members: vec![(column, head)] }),
        }
    }
    families
}

/// The time of a column: above its name, or in it.
fn head_of(framed: Framed<'_>, column: usize) -> Option<TimeHead> {
    let above = framed.names.times.get(column).filter(|time| !time.is_empty());
    let Some(above) = above else { return read_head(framed.written(column)) };
    let stem = framed.written(column).to_string();
    let unit = framed.names.times_unit;
    // A bare number is read as a time too, though `read_head` wants a digit behind letters.
    let head = read_head(above)?;
    Some(TimeHead { stem, clear: true, unit: head.unit.or(unit), ..head })
}

/// Clear heads: two different times. Others: three or more, ascending, beside a column that tells subjects apart.
fn is_plausible(framed: Framed<'_>, family: &Family) -> bool {
    let values: Vec<f64> = family.members.iter().map(|(_, head)| head.value).collect();
    let differ = values.iter().any(|&value| value != values[0]);
    let ascending = values.windows(2).all(|pair| pair[1] > pair[0]);
    match family.members[0].1.clear {
        true => differ,
        false => {
            let first = family.members[0].0;
            values.len() >= 3
                && ascending
                && (0..first).any(|column| clarity(framed.written(column), Role::Subject) >= 3)
        }
    }
}

/// A column of its own says the time: then the table is long, or one column per subject.
fn has_time_column(framed: Framed<'_>, families: &[Family]) -> bool {
    let is_member =
        |column: usize| families.iter().any(|family| family.members.iter().any(|(member, _)| *member == column));
    (0..framed.width()).any(|column| {
        !is_member(column)
            && clarity(framed.written(column), Role::Time) == 4
            && clarity(framed.written(column), Role::Subject) < 4
            && framed.is_numeric(column)
            && changes(framed, column)
    })
}

fn changes(framed: Framed<'_>, column: usize) -> bool {
    let first = framed.cells(column).next().unwrap_or("");
    framed.cells(column).any(|cell| cell != first)
}

fn melt<'a>(framed: Framed<'a>, families: &[Family]) -> LongTable<'a> {
    let lead = &families[0];
    let summaries = framed.summary_columns();
    let is_member =
        |column: usize| families.iter().any(|family| family.members.iter().any(|(member, _)| *member == column));
    let beside: Vec<usize> = (0..framed.width())
        .filter(|column| !is_member(*column) && !summaries.contains(column) && !framed.is_blank(*column))
        .collect();
    let mut table = LongTable {
        sheet: framed.sheet,
        layout: Layout::WideByTime,
        places: places(framed, lead),
        columns: beside.iter().map(|&column| framed.cell_column(column)).collect(),
        presets: Vec::new(),
        sheet_names: framed.names.names.clone(),
        notes: framed.summary_note(&summaries).into_iter().collect(),
    };
    if !beside.iter().any(|&column| tells_subjects(framed, column)) {
        add_line_subjects(framed, &mut table);
    }
    add_time(framed, lead, &mut table);
    add_values(framed, families, &mut table);
    table
}

fn places(framed: Framed<'_>, lead: &Family) -> Vec<Place> {
    let columns: Vec<u32> = lead.members.iter().map(|(column, _)| *column as u32).collect();
    framed.frame.body.iter().flat_map(|&record| columns.iter().map(move |&column| Place { record, column })).collect()
}

/// Named as a subject, or a different label in every row.
fn tells_subjects(framed: Framed<'_>, column: usize) -> bool {
    let mut labels: Vec<&str> = framed.cells(column).map(str::trim).filter(|cell| !is_missing_label(cell)).collect();
    let total = labels.len();
    labels.sort_unstable();
    labels.dedup();
    clarity(framed.written(column), Role::Subject) >= 3 || (total == framed.frame.body.len() && labels.len() == total)
}

fn add_line_subjects(framed: Framed<'_>, table: &mut LongTable<'_>) {
    let names = (0..framed.sheet.records()).map(|record| format!("row {}", framed.sheet.line(record))).collect();
    let name = free_name("subject", &table.columns);
    table.presets.push(Preset {
        role: Role::Subject,
        column: table.columns.len(),
        reason: "No column tells the subjects apart: each row is one subject.".to_string(),
    });
    table.columns.push(LongColumn { name, source: Source::Line(names), unit: None });
}

fn add_time(framed: Framed<'_>, lead: &Family, table: &mut LongTable<'_>) {
    let mut labels = vec![String::new(); framed.width()];
    lead.members.iter().for_each(|(column, head)| labels[*column].clone_from(&head.text));
    let above = framed.title().filter(|title| clarity(title, Role::Time) >= 3);
    let unit: Option<Unit> = lead.members[0].1.unit.or_else(|| above.and_then(crate::names::time_unit));
    let name = unit.map_or("time", Unit::word);
    let (first, last) = (&lead.members[0].1.text, &lead.members[lead.members.len() - 1].1.text);
    table.presets.push(Preset {
        role: Role::Time,
        column: table.columns.len(),
        reason: format!("The column heads are times, {} to {}: one row per subject.", quoted(first), quoted(last)),
    });
    let name = free_name(name, &table.columns);
    table.columns.push(LongColumn {
        name,
        source: Source::Across(labels),
        unit: unit.map(|unit| unit.word().to_string()),
    });
}

/// One column of the long form per measurement; the response is clear where there is just one.
fn add_values(framed: Framed<'_>, families: &[Family], table: &mut LongTable<'_>) {
    let lead = &families[0];
    let (title, title_unit) = framed.response_from_title();
    for (index, family) in families.iter().enumerate() {
        let (name, unit) = match family.stem.is_empty() {
            true => (title.clone(), title_unit.clone()),
            false => (family.stem.clone(), crate::names::split_unit(&family.stem).1.map(str::to_string)),
        };
        let source = match index {
            0 => Source::Value,
            _ => Source::Beside(counterparts(framed, lead, family)),
        };
        if families.len() == 1 {
            table.presets.push(Preset {
                role: Role::Response,
                column: table.columns.len(),
                reason: "It stands under the times.".to_string(),
            });
        }
        let name = free_name(&name, &table.columns);
        table.columns.push(LongColumn { name, source, unit });
    }
}

/// For each of the leading family's columns the other family's column at the same time.
fn counterparts(framed: Framed<'_>, lead: &Family, other: &Family) -> Vec<Option<usize>> {
    let mut found = vec![None; framed.width()];
    for (column, head) in &lead.members {
        found[*column] = other.members.iter().find(|(_, own)| own.value == head.value).map(|(own, _)| *own);
    }
    found
}
