//! What reporting standards ask of the statistics, answered or left to the author.
//!
//! The standards: ARRIVE 2.0 (Percie du Sert et al. 2020, PLoS Biol 18:e3000410) for animals, CONSORT 2025 for
//! trials, SAMPL (Lang & Altman 2015, Int J Nurs Stud 52:5) for numbers. Items are put in words of our own, from memory.

use super::{ReportContext, ReportItem};
use crate::findings::Findings;

pub(super) fn items(findings: &Findings, context: &ReportContext) -> Vec<ReportItem> {
    let n: Vec<String> = findings.groups.iter().map(|g| format!("{} {}", g.name, g.subjects)).collect();
    let unit = match (&findings.clusters, &findings.columns.cluster) {
        (Some(clusters), Some(column)) if clusters.nested && clusters.effects != "none" => {
            format!("The {column} is the unit that is compared; see Statistical methods.")
        }
        _ => format!("The {} is the unit; see Statistical methods.", findings.plan.words.subject),
    };
    let excluded = match findings.plan.exclusions.len() {
        0 => "No row was left out by hand; see Data.".to_string(),
        count => format!("{count} rows were left out, each with its reason; see Data."),
    };
    let checks = if context.checks.is_empty() { String::new() } else { "See What to keep in mind.".to_string() };
    let see = |text: &str| text.to_string();
    let item = |standard: &str, asks: &str, answer: String| ReportItem {
        standard: standard.into(),
        asks: asks.into(),
        answer,
    };
    vec![
        item("ARRIVE 2.0", "The groups that are compared, and the unit that was treated", unit),
        item(
            "ARRIVE 2.0",
            "How many in each group, and how that number was decided",
            format!("In the analysis: {}. How it was decided: the author.", n.join(", ")),
        ),
        item("ARRIVE 2.0", "Rules for leaving out animals or values, set beforehand, and what was left out", excluded),
        item("ARRIVE 2.0", "How animals came into groups, and order effects", String::new()),
        item("ARRIVE 2.0", "Who knew the groups when treating, measuring and analysing", String::new()),
        item(
            "ARRIVE 2.0",
            "What was measured, and which measure decides",
            format!("{}; which decides: the author.", findings.scale.response),
        ),
        item(
            "ARRIVE 2.0",
            "Statistical methods, software, and how assumptions were looked at",
            see("See Statistical methods."),
        ),
        item(
            "ARRIVE 2.0",
            "Animals: species, strain, sex, age, housing; ethics approval; humane end points",
            String::new(),
        ),
        item(
            "ARRIVE 2.0",
            "Results with a measure of spread, effect sizes and their intervals",
            see("See Results and the tables."),
        ),
        item(
            "CONSORT 2025",
            "Methods for comparing groups, with adjustments and for whom the comparison holds",
            see("See Statistical methods."),
        ),
        item(
            "CONSORT 2025",
            "Who is in each analysis, and how missing values were handled",
            see(
                "See Data; the model uses every measurement and assumes that what is missing depends on what was measured.",
            ),
        ),
        item(
            "CONSORT 2025",
            "For each outcome and group: result, effect size and its precision",
            see("See Results and the tables."),
        ),
        item("CONSORT 2025", "Registration, protocol, changes after the start, harms, funding", String::new()),
        item(
            "SAMPL",
            "Total and group sizes with every analysis; exact p-values; intervals, not p-values alone",
            see("See Data, Results and the tables."),
        ),
        item("SAMPL", "Whether the assumptions of the model held", checks),
        item(
            "SAMPL",
            "Adjustment for several comparisons, and the software with its version",
            see("See Statistical methods."),
        ),
    ]
}
