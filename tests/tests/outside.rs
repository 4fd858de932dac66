//! Findings against values that nobody here wrote or that dense matrices give.
//!
//! - `expected/published.csv`: printed values, each row with its source and tolerance;
//! - `expected/mixed.csv`: statsmodels 0.15.0 MixedLM, by `reference/mixed.py`;
//! - `expected/dense.csv`: N x N matrices in numpy 2.4.6 and scipy 1.17.1, by `reference/dense.py`.
//!
//! `cargo xtask reference` runs the generators again.

use courseband_study::{Findings, FitStatus, Plan, run};
use std::collections::BTreeMap;

struct Expected {
    case: String,
    quantity: String,
    group: String,
    time: Option<f64>,
    value: f64,
    tolerance: Option<f64>,
    source: String,
}

fn folder() -> String {
    format!("{}/reference", env!("CARGO_MANIFEST_DIR"))
}

fn expected(file: &str, source: &str) -> Vec<Expected> {
    let path = format!("{}/expected/{file}", folder());
    let mut reader = csv::Reader::from_path(&path).unwrap_or_else(|error| panic!("{path}: {error}"));
    let rows = reader.records().map(|record| {
        let record = record.unwrap();
        let cell = |k: usize| record.get(k).unwrap_or("").to_string();
        Expected {
            case: cell(0),
            quantity: cell(1),
            group: cell(2),
            time: cell(3).parse().ok(),
            value: cell(4).parse().unwrap(),
            tolerance: cell(5).parse().ok(),
            source: if cell(6).is_empty() { source.to_string() } else { cell(6) },
        }
    });
    rows.collect()
}

/// `table.what.what`: the table's name and the choices.
fn findings(case: &str) -> Findings {
    let words: Vec<&str> = case.split('.').collect();
    let has = |word: &str| words.contains(&word);
    let table = match words[0] {
        "sitka" => "sitka1988",
        other => other,
    };
    let subjects = if has("slope") { "slope" } else if has("none") { "none" } else { "intercept" };
    let plan = serde_json::json!({
        "columns": {
            "subject": "subject", "time": "time", "response": "y", "cluster": false,
            "group": if table == "sleepstudy" || has("one") { serde_json::json!(false) } else { serde_json::json!("group") },
        },
        "curves": { "shape": if has("straight") || has("one") { "straight" } else { "smooth" }, "dimension": "full" },
        "subjects": subjects,
        "subjects_spread": if has("by-group") { "by-group" } else { "common" },
        "errors": {
            "serial": if has("ar1") { "ar1" } else { "none" },
            "nugget": has("nugget"),
            "spread": if has("spread") && case != "spread.slope.by-group" { "by-group" } else { "common" },
        },
        "comparisons": { "small_sample": "none" },
        "grid": { "count": 21 },
    });
    let bytes = std::fs::read(format!("{}/data/{table}.csv", folder())).unwrap();
    let plan = Plan::from_json(&plan.to_string()).unwrap();
    let findings = run(&bytes, &plan).unwrap_or_else(|refusal| panic!("{case}: {refusal}"));
    assert_ne!(findings.fit.status, FitStatus::Failed, "{case}: {:?}", findings.fit.remarks);
    findings
}

/// The quantity, and the standard error there where the quantity is a mean.
fn got(findings: &Findings, e: &Expected) -> (f64, f64) {
    let fit = &findings.fit;
    let index = findings.groups.iter().position(|g| g.name == e.group).unwrap_or(0);
    let covariance = fit.subject_covariance_by_group.get(index).unwrap_or(&fit.subject_covariance);
    let at = || {
        let points = &findings.curves[index].grid;
        let t = e.time.unwrap();
        let near = |k: &usize| (points.time[*k] - t).abs() < 1e-9 * (1.0 + t.abs());
        let k = (0..points.time.len()).find(near).unwrap_or_else(|| panic!("{}: no grid point at {t}", e.case));
        (points.mean[k].unwrap(), points.se[k].unwrap())
    };
    let value = match e.quantity.as_str() {
        "log_reml" => fit.log_reml.unwrap(),
        "criterion" => -2.0 * fit.log_reml.unwrap(),
        "residual_sd" => fit.residual_sd.0[index].1,
        "var_residual" => fit.residual_sd.0[index].1.powi(2),
        "sd_level" => covariance[0][0].sqrt(),
        "var_level" => covariance[0][0],
        "sd_trend" => covariance[1][1].sqrt(),
        "var_trend" => covariance[1][1],
        "phi" => fit.serial_correlation.unwrap(),
        "nugget" => fit.measurement_error_share.unwrap(),
        "mean" => return at(),
        "se" => at().1,
        other => panic!("unknown quantity {other}"),
    };
    (value, 0.0)
}

/// Tolerance where the row states none: log-REML 0.002; curves 0.02 SE; all else 1 %.
fn tolerance(e: &Expected, se: f64) -> f64 {
    e.tolerance.unwrap_or(match e.quantity.as_str() {
        "log_reml" => 0.002,
        "mean" => 0.02 * se,
        _ => 0.01 * e.value.abs(),
    })
}

fn check(file: &str, source: &str, least: usize) {
    let rows = expected(file, source);
    assert!(rows.len() >= least, "{file} has {} rows", rows.len());
    let mut kept: BTreeMap<String, Findings> = BTreeMap::new();
    let mut wrong = Vec::new();
    for e in &rows {
        let findings = kept.entry(e.case.clone()).or_insert_with(|| findings(&e.case));
        let (value, se) = got(findings, e);
        let allowed = tolerance(e, se);
        if (value - e.value).abs() > allowed {
            wrong.push(format!(
                "{} {} {} {:?}: expected {} ({}), got {value}, tolerance {allowed}",
                e.case, e.quantity, e.group, e.time, e.value, e.source
            ));
        }
    }
    assert!(wrong.is_empty(), "{} of {} values differ:\n{}", wrong.len(), rows.len(), wrong.join("\n"));
}

#[test]
fn published_values() {
    check("published.csv", "", 10);
}

#[test]
fn straight_lines_against_statsmodels() {
    check("mixed.csv", "statsmodels 0.15.0, MixedLM", 40);
}

#[test]
fn curves_against_dense_matrices() {
    check("dense.csv", "numpy 2.4.6 and scipy 1.17.1, reference/dense.py", 400);
}
