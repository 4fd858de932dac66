//! A case: a table, a plan, and what must come of it; and the table that most cases spoil.

use serde_json::{Value, json};

/// What must come of a case.
#[derive(Debug, Clone)]
pub(crate) enum Outcome {
    /// The findings of the plain table, whatever the table looks like.
    AsPlain,
    /// Findings of so many groups. The fit may fail, but must say so.
    Groups(usize),
    /// Exit 2 with a message that holds these words.
    Refused(&'static str),
}

/// A hostile or degenerate table.
#[derive(Debug, Clone)]
pub(crate) struct Case {
    pub(crate) name: String,
    pub(crate) table: Vec<u8>,
    pub(crate) plan: Value,
    pub(crate) outcome: Outcome,
}

/// A case under the plan of defaults.
pub(crate) fn case(name: &str, table: impl Into<Vec<u8>>, outcome: Outcome) -> Case {
    planned(name, table, json!({}), outcome)
}

pub(crate) fn planned(name: &str, table: impl Into<Vec<u8>>, plan: Value, outcome: Outcome) -> Case {
    Case { name: name.to_string(), table: table.into(), plan, outcome }
}

/// Rows of the plain table: subject, group, time, response.
pub(crate) type Row = [String; 4];

/// Ten subjects in two groups over five days; the second group falls away. Made up by a rule.
pub(crate) fn rows() -> Vec<Row> {
    let mut rows = Vec::new();
    for s in 0..10u32 {
        for (visit, day) in [0u32, 2, 5, 9, 14].into_iter().enumerate() {
            let wave = f64::from((s * 7 + visit as u32 * 5) % 11) * 0.07;
            let fall = if s % 2 == 0 { 0.1 } else { 0.8 };
            let y = 20.0 + f64::from(s) * 0.3 - fall * f64::from(day) + wave;
            let group = if s % 2 == 0 { "Plain" } else { "Grün" };
            rows.push([format!("s{s}"), group.to_string(), day.to_string(), format!("{y:.2}")]);
        }
    }
    rows
}

pub(crate) const HEAD: &str = "subject,group,day,y";

/// A table of rows.
pub(crate) fn table(rows: &[Row]) -> String {
    let lines = rows.iter().map(|row| row.join(","));
    std::iter::once(HEAD.to_string()).chain(lines).map(|line| line + "\n").collect()
}

/// The plain table.
pub(crate) fn plain() -> String {
    table(&rows())
}

/// The plain table with every response replaced: by subject, visit and the response itself.
pub(crate) fn with_y(change: impl Fn(usize, usize, f64) -> String) -> String {
    let mut rows = rows();
    for (at, row) in rows.iter_mut().enumerate() {
        row[3] = change(at / 5, at % 5, row[3].parse().expect("a number"));
    }
    table(&rows)
}

/// The plain table with every time replaced.
pub(crate) fn with_times(change: impl Fn(usize, usize) -> String) -> String {
    let mut rows = rows();
    for (at, row) in rows.iter_mut().enumerate() {
        row[2] = change(at / 5, at % 5);
    }
    table(&rows)
}

/// The plain table with its rows changed.
pub(crate) fn changed(change: impl FnOnce(&mut Vec<Row>)) -> String {
    let mut rows = rows();
    change(&mut rows);
    table(&rows)
}
