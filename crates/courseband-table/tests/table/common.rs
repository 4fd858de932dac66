//! Text forms of readings, and cases in files.

use courseband_table::{
    ColumnRequest, CovariateValues, DateOrder, DayZero, Exclusion, Layout, Merge, Observations, Reading, Request,
    SharedIds, Table, TableError,
};
use std::fmt::Write;

/// Reads a table as asked.
pub(crate) fn read(bytes: &[u8], request: &Request) -> Result<Reading, TableError> {
    Table::read(bytes)?.observe(request)
}

/// The reading of a table, or its refusal, as text.
pub(crate) fn told(bytes: &[u8], request: &Request) -> String {
    match read(bytes, request) {
        Ok(reading) => dump(&reading),
        Err(error) => format!("refused: {error}\n"),
    }
}

/// Everything in a reading, as text.
pub(crate) fn dump(reading: &Reading) -> String {
    let mut out = String::new();
    let shown = |name: &Option<String>| name.clone().unwrap_or_else(|| "none".to_string());
    let columns = &reading.columns;
    let _ = writeln!(
        out,
        "{:?}: subject {}, time {}, group {}, response {}, cluster {}",
        reading.layout,
        shown(&columns.subject),
        shown(&columns.time),
        shown(&columns.group),
        shown(&columns.response),
        shown(&columns.cluster)
    );
    if let Some(unit) = &reading.response_unit {
        let _ = writeln!(out, "unit {unit}");
    }
    out.push_str(&subjects(&reading.observations));
    for question in &reading.questions {
        let must = if question.needs_answer { "must" } else { "may" };
        let _ = writeln!(out, "? {must}: {} {:?}", question.text, question.choices);
    }
    for note in &reading.notes {
        let _ = writeln!(out, "- {note}");
    }
    for problem in &reading.problems {
        let _ = writeln!(out, "! row {}, {}, {:?}: {}", problem.row, problem.column, problem.value, problem.message);
    }
    out
}

/// One line per subject: name, group, cluster, then time=response@line.
fn subjects(observations: &Observations) -> String {
    let mut out = String::new();
    if !observations.time.is_empty() {
        let _ = writeln!(out, "groups {}; time in {}", observations.groups.join(", "), observations.time_word);
    }
    for (index, subject) in observations.subjects.iter().enumerate() {
        let _ = write!(out, "  {} [{}]", subject.name, observations.groups[subject.group as usize]);
        if let Some(cluster) = subject.cluster {
            let _ = write!(out, " in {}", observations.clusters[cluster as usize]);
        }
        out.push(':');
        for at in (0..observations.time.len()).filter(|&at| observations.subject[at] as usize == index) {
            let _ = write!(out, " {}={}@{}", observations.time[at], observations.response[at], observations.line[at]);
            for covariate in &observations.covariates {
                let _ = match &covariate.values {
                    CovariateValues::Numeric(values) => write!(out, " {}={}", covariate.name, values[at]),
                    CovariateValues::Categorical { levels, index } => {
                        write!(out, " {}={}", covariate.name, levels[index[at] as usize])
                    }
                };
            }
        }
        out.push('\n');
    }
    out
}

/// A request as written in a case: one `key: value` per line.
pub(crate) fn request(text: &str) -> Request {
    let mut request = Request::default();
    for line in text.lines().filter(|line| !line.trim().is_empty()) {
        let (key, value) = line.split_once(':').unwrap_or((line, ""));
        let value = value.trim();
        let column = || if value == "false" { ColumnRequest::Absent } else { ColumnRequest::Named(value.to_string()) };
        match key {
            "subject" => request.subject = column(),
            "time" => request.time = column(),
            "group" => request.group = column(),
            "response" => request.response = column(),
            "cluster" => request.cluster = column(),
            "covariate" => request.covariates.push(value.to_string()),
            "exclude" => {
                let (row, column) =
                    value.split_once(' ').map_or((value, None), |(row, column)| (row, Some(column.to_string())));
                let row = row.parse().expect("a row number");
                request.exclusions.push(Exclusion { row, column, reason: "test".to_string() });
            }
            "merge" => {
                let (from, into) = value.split_once(" into ").expect("two spellings");
                request.merges.push(Merge { from: from.to_string(), into: into.to_string() });
            }
            "layout" => {
                request.layout = Some(match value {
                    "long" => Layout::Long,
                    "by time" => Layout::WideByTime,
                    "by subject" => Layout::WideBySubject,
                    other => panic!("no layout {other}"),
                });
            }
            "shared ids" => {
                request.shared_ids = Some(match value {
                    "different" => SharedIds::Different,
                    "same" => SharedIds::Same,
                    _ => SharedIds::Mistake,
                });
            }
            "zero" => request.day_zero = if value == "subject" { DayZero::PerSubject } else { DayZero::Common },
            "dates" => {
                request.date_order = Some(if value == "day" { DateOrder::DayFirst } else { DateOrder::MonthFirst })
            }
            other => panic!("no request {other}"),
        }
    }
    request
}
