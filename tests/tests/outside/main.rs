//! Findings against values that nobody here wrote or that dense matrices give.
//!
//! `reference/README.md` says where each file of expected values comes from and how to make it again.

mod cases;
mod expected;
mod quantities;

use cases::Cases;
use expected::Expected;
use quantities::{Got, got};
use std::collections::BTreeMap;

/// How far findings may lie from the values of one file, where a row does not say itself.
struct Allowed {
    log_reml: f64,
    /// Means and differences, in standard errors.
    in_se: f64,
    /// Standard errors, standard deviations, correlations, effective degrees of freedom, areas.
    relative: f64,
    critical: f64,
}

/// A tenth of what would be good enough (log-REML 0.002, curves 0.02 SE, the rest 1 %), since all of it is reached.
/// The critical value of a band comes from random directions: three root mean square errors (30 seeds, three pairs).
const ALLOWED: Allowed = Allowed { log_reml: 1e-4, in_se: 0.002, relative: 1e-3, critical: 0.015 };

impl Allowed {
    fn at(&self, e: &Expected, got: &Got) -> f64 {
        e.tolerance.unwrap_or(match e.quantity.as_str() {
            "log_reml" => self.log_reml,
            "mean" | "difference" => self.in_se * got.se,
            "critical" => self.critical,
            _ => self.relative * e.value.abs(),
        })
    }
}

/// Runs every case of a file once and compares every row. `least` guards against a file that lost its rows.
fn check(file: &str, source: &str, allowed: &Allowed, least: usize) {
    let rows = expected::read(file, source);
    assert!(rows.len() >= least, "{file} has {} rows", rows.len());
    let cases = Cases::read();
    let mut kept = BTreeMap::new();
    let mut wrong = Vec::new();
    for e in &rows {
        let findings = kept.entry(e.case.clone()).or_insert_with(|| cases.findings(&e.case));
        let got = got(findings, e);
        let tolerance = allowed.at(e, &got);
        // Written so that a value that is no number fails too.
        let holds = (got.value - e.value).abs() <= tolerance;
        if !holds {
            let time = e.time.map(|t| format!(" at {t}")).unwrap_or_default();
            wrong.push(format!(
                "{}: {} {}{time}: expected {}, got {}, tolerance {tolerance:.3e}; source: {}",
                e.case, e.quantity, e.group, e.value, got.value, e.source
            ));
        }
    }
    assert!(wrong.is_empty(), "{file}: {} of {} values differ:\n{}", wrong.len(), rows.len(), wrong.join("\n"));
}

#[test]
fn published_values() {
    check("published.csv", "", &ALLOWED, 13);
}

#[test]
fn straight_lines_against_statsmodels() {
    check("mixed.csv", "statsmodels 0.15.0, MixedLM", &ALLOWED, 110);
}

#[test]
fn mixed_models_against_second_computations() {
    // Here the critical values are those of one pair at five visits, where the directions serve better.
    let allowed = Allowed { critical: 0.008, ..ALLOWED };
    check("checked.csv", "reference/README.md, ", &allowed, 2000);
}

#[test]
fn counts_and_positive_values_against_statsmodels() {
    check("families.csv", "statsmodels 0.15.0, GLM", &ALLOWED, 12);
}

#[test]
fn curves_against_dense_matrices() {
    check("dense.csv", "numpy 2.4.6 and scipy 1.17.1, reference/dense.py", &ALLOWED, 1000);
}

#[test]
fn clusters_and_explanatory_columns_against_dense_matrices() {
    check("housed.csv", "numpy 2.4.6, scipy 1.17.1, statsmodels 0.15.0, reference/housed.py", &ALLOWED, 150);
}
