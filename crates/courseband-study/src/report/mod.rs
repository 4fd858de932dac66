//! The report: question, data, methods, results, cautions and tables, composed from findings.
//!
//! Every number in it is in the findings or in what the author did, and printed as they print it.

mod effects;
mod files;
mod items;
mod methods;
mod subjects;
mod tables;

use crate::cohort::Cohort;
use crate::findings::{Findings, FitStatus};
use crate::plan::Plan;
use crate::refusal::Refusal;
use crate::sentences::{joined, percent, plain};
use crate::study::{Refits, Study};
pub use files::{GivenReport, report_document, tables_workbook};
use serde::{Deserialize, Serialize};

/// What the report knows beyond findings: what the author did with the table.
#[derive(Debug, Clone, Default, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct ReportContext {
    /// Name of the table, as the author knows it.
    pub table: String,
    /// True for an invented example.
    pub invented: bool,
    /// Lines left out after findings had been seen.
    pub excluded_late: Vec<usize>,
    /// Lines left out while the groups' names were masked.
    pub excluded_masked: Vec<usize>,
    /// What else was looked at, in words: other models, other scales.
    pub looked_at: Vec<String>,
    /// Where the plan departs from the one that was fixed beforehand.
    pub departures: Vec<String>,
    /// What the checks said, in one sentence; empty where they were not looked at.
    pub checks: String,
}

/// A report.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Report {
    /// Its title.
    pub title: String,
    /// Sections in order.
    pub sections: Vec<ReportSection>,
    /// Tables in order.
    pub tables: Vec<ReportTable>,
    /// What reporting standards ask of the statistics.
    pub items: Vec<ReportItem>,
    /// Publications behind the methods that were used.
    pub references: Vec<String>,
    /// True where numbers may still change, because bands are not calibrated though the plan asks for it.
    pub provisional: bool,
}

/// A section.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ReportSection {
    /// `question`, `data`, `methods`, `results`, `cautions`.
    pub key: String,
    /// Its title.
    pub title: String,
    /// Its paragraphs.
    pub paragraphs: Vec<String>,
}

/// A table of texts.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct ReportTable {
    /// `curves`, `gaps`, `stretches`, `effects`, `subjects`, `responses`.
    pub key: String,
    /// Its title, with what the numbers are.
    pub title: String,
    /// Heads of the columns.
    pub heads: Vec<String>,
    /// Cells as printed.
    pub rows: Vec<Vec<String>>,
}

/// One item of a reporting standard, in words of our own.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ReportItem {
    /// `ARRIVE 2.0`, `CONSORT 2025` or `SAMPL`.
    pub standard: String,
    /// What it asks.
    pub asks: String,
    /// Where or how it is answered; empty where only the author can.
    pub answer: String,
}

impl Study {
    /// The report of a plan, with the critical values of `refits` where there are any.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn report(&mut self, plan: &Plan, refits: Option<&Refits>, context: &ReportContext) -> Result<Report, Refusal> {
        let findings = match refits {
            Some(refits) => self.run_calibrated(plan, refits)?,
            None => self.run(plan)?,
        };
        let mut report = compose(&findings, refits.is_some(), context);
        let cohort = Cohort::new(self.reading(plan)?, plan)?;
        report.tables.push(subjects::table(&cohort, &findings, subjects::is_log(&findings)));
        Ok(report)
    }
}

fn compose(findings: &Findings, calibrated: bool, context: &ReportContext) -> Report {
    let (methods, references) = methods::paragraphs(findings, calibrated);
    let section = |key: &str, title: &str, paragraphs: Vec<String>| ReportSection {
        key: key.into(),
        title: title.into(),
        paragraphs: paragraphs.into_iter().filter(|text| !text.is_empty()).collect(),
    };
    let sections = vec![
        section("question", "Question", vec![question(findings)]),
        section("data", "Data", data(findings, context)),
        section("methods", "Statistical methods", methods),
        section("results", "Results", results(findings)),
        section("cautions", "What to keep in mind", cautions(findings, context)),
    ];
    let mark = if context.invented { " (invented example)" } else { "" };
    Report {
        title: format!("{} over {}{mark}", response(findings), findings.scale.time_word),
        items: items::items(findings, context),
        tables: tables::tables(findings),
        sections,
        references,
        provisional: !calibrated && methods::wants_calibration(findings),
    }
}

fn response(findings: &Findings) -> String {
    if findings.scale.response.is_empty() { "The response".into() } else { findings.scale.response.clone() }
}

fn quoted_groups(findings: &Findings) -> String {
    joined(&findings.groups.iter().map(|g| g.name.clone()).collect::<Vec<_>>())
}

fn question(findings: &Findings) -> String {
    let word = &findings.scale.time_word;
    let span = match (findings.visits.first(), findings.visits.last()) {
        (Some(first), Some(last)) => format!(" from {word} {} to {word} {}", plain(*first), plain(*last)),
        _ => String::new(),
    };
    if findings.groups.len() < 2 {
        return format!("What is the course of {}{span}?", response(findings));
    }
    let c = &findings.plan.comparisons;
    let margin = if c.margin > 0.0 {
        let unit = if c.margin_unit == crate::plan::MarginUnit::Percent { " percent" } else { "" };
        format!(" A gap under {}{unit} was set not to matter.", plain(c.margin))
    } else {
        String::new()
    };
    format!(
        "When{span}, by how much and how surely do the courses of {} come apart between {}?{margin}",
        response(findings),
        quoted_groups(findings)
    )
}

fn data(findings: &Findings, context: &ReportContext) -> Vec<String> {
    let words = &findings.plan.words;
    let per_group: Vec<String> =
        findings.groups.iter().map(|g| format!("{} in {} ({} measurements)", g.subjects, g.name, g.rows)).collect();
    let mut paragraphs = Vec::new();
    if context.invented {
        paragraphs.push("These data are an invented example: nothing here was measured.".to_string());
    }
    let from = if context.table.is_empty() { String::new() } else { format!(" of the table \"{}\"", context.table) };
    paragraphs.push(format!(
        "{} measurements{from} on {} {} were analysed: {}. There were {} distinct times.",
        findings.rows,
        findings.subjects,
        words.subjects,
        joined(&per_group),
        findings.visits.len()
    ));
    paragraphs.push(missing(findings));
    let excluded = &findings.plan.exclusions;
    if excluded.is_empty() {
        paragraphs.push("No row was left out by hand.".into());
    } else {
        let each: Vec<String> = (excluded.iter())
            .map(|e| {
                let late = if context.excluded_late.contains(&e.row) { ", after findings had been seen" } else { "" };
                let masked =
                    if context.excluded_masked.contains(&e.row) { ", with the groups' names masked" } else { "" };
                format!("line {} ({}{late}{masked})", e.row, e.reason)
            })
            .collect();
        paragraphs.push(format!("Left out by hand: {}.", each.join("; ")));
    }
    if !findings.problems.is_empty() {
        paragraphs.push(format!(
            "The reader listed {} places of the table; unusable values were left out and are named in the record.",
            findings.problems.len()
        ));
    }
    paragraphs
}

/// Who is seen at the last visit, where visits are shared.
fn missing(findings: &Findings) -> String {
    let complete: usize = findings.groups.iter().map(|g| g.subjects * findings.visits.len()).sum();
    if findings.visits.len() > 20 || complete == 0 {
        return String::new();
    }
    let seen: usize = findings.groups.iter().map(|g| g.at_visit.iter().sum::<usize>()).sum();
    let last: Vec<String> = (findings.groups.iter())
        .map(|g| format!("{} of {} in {}", g.at_visit.last().copied().unwrap_or(0), g.subjects, g.name))
        .collect();
    format!(
        "Of {complete} combinations of {} and visit {} were measured; at the last visit {}.",
        findings.plan.words.subject,
        seen,
        joined(&last)
    )
}

fn results(findings: &Findings) -> Vec<String> {
    if findings.fit.status == FitStatus::Failed {
        let why = findings.fit.remarks.join(" ");
        return vec![format!("No model was fitted, so no result is reported. {why}")];
    }
    let mut paragraphs: Vec<String> =
        findings.sentences.iter().map(|s| format!("{} {}", s.headline, s.text).trim().to_string()).collect();
    paragraphs.extend(effects::sentences(findings));
    paragraphs
}

fn cautions(findings: &Findings, context: &ReportContext) -> Vec<String> {
    let mut paragraphs: Vec<String> = findings
        .notes
        .iter()
        .filter(|note| note.about == "fit" || note.about == "curves")
        .map(|note| note.message.clone())
        .collect();
    if !context.checks.is_empty() {
        paragraphs.push(context.checks.clone());
    }
    if !context.looked_at.is_empty() {
        paragraphs.push(format!(
            "Also looked at: {}. The bands do not account for a choice among models.",
            joined(&context.looked_at)
        ));
    }
    if !context.departures.is_empty() {
        paragraphs
            .push(format!("Departures from the plan that was fixed beforehand: {}.", context.departures.join("; ")));
    }
    if findings.groups.len() > 1 {
        paragraphs.push(format!(
            "A stretch without a shown gap is no proof of equality: there the {} band holds both a gap and none.",
            percent(findings.plan.comparisons.level)
        ));
    }
    paragraphs.push("Not treatment advice; have confirmatory analyses reviewed.".into());
    paragraphs
}

#[cfg(test)]
mod tests;
