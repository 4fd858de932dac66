//! Usual analyses of whole tables against `expected/usual_tables.csv`, by `reference/usual_tables.py`, which names tables,
//! publications, methods and library versions.

use courseband_study::{Borne, Plan, Study, UsualAnalysis, UsualFindings, UsualKind};
use std::collections::BTreeSet;

fn folder() -> String {
    format!("{}/reference", env!("CARGO_MANIFEST_DIR"))
}

fn usual(table: &str) -> UsualFindings {
    let bytes = std::fs::read(format!("{}/data/{table}.csv", folder())).unwrap();
    let plan = serde_json::json!({
        "columns": { "subject": "subject", "time": "time", "response": "y", "cluster": false, "group": "group" },
    });
    let plan = Plan::from_json(&plan.to_string()).unwrap();
    Study::open(&bytes).unwrap().usual(&plan).unwrap()
}

fn analysis<'a>(findings: &'a UsualFindings, kind: &str) -> &'a UsualAnalysis {
    let named = |a: &&UsualAnalysis| serde_json::to_value(a.kind).unwrap() == kind;
    findings.analyses.iter().find(named).unwrap()
}

fn value(findings: &UsualFindings, kind: &str, table: &str, labels: &str, head: &str) -> f64 {
    let place = format!("{kind} / {table} / {labels} / {head}");
    let table = analysis(findings, kind).tables.iter().find(|t| t.title == table).unwrap_or_else(|| panic!("{place}"));
    let row = table.rows.iter().find(|r| r.labels.join("|") == labels).unwrap_or_else(|| panic!("{place}"));
    let column = table.heads.iter().position(|h| h == head).unwrap_or_else(|| panic!("{place}"));
    row.cells[column].value.unwrap_or_else(|| panic!("{place}: no value"))
}

/// Compares all values of a table; returns which analyses had any.
fn check(case: &str, findings: &UsualFindings) -> BTreeSet<String> {
    let path = format!("{}/expected/usual_tables.csv", folder());
    let mut kinds = BTreeSet::new();
    for record in csv::Reader::from_path(path).unwrap().records() {
        let record = record.unwrap();
        if &record[0] != case {
            continue;
        }
        let (expected, tolerance): (f64, f64) = (record[5].parse().unwrap(), record[6].parse().unwrap());
        let got = value(findings, &record[1], &record[2], &record[3], &record[4]);
        let close = (got - expected).abs() <= tolerance * expected.abs();
        assert!(close, "{case} {record:?}: got {got}");
        kinds.insert(record[1].to_string());
    }
    kinds
}

#[test]
fn obrien_and_kaiser_1985() {
    let treatments = usual("obrien_treatments");
    assert_eq!(check("obrien_treatments", &treatments).len(), 1);
    let anova = &treatments.analyses[0];
    assert_eq!((anova.used.subjects, anova.used.dropped_subjects), (16, 0));
    assert_eq!(anova.bearing.verdict, Borne::Yes);
    let cells = usual("obrien_cells");
    check("obrien_cells", &cells);
    // Epsilons of phase with the six cells as groups, as printed in Fox, Friendly & Weisberg 2013, R Journal 5:39 (from
    // memory, four digits).
    for (head, printed) in [("Greenhouse-Geisser epsilon", 0.7995), ("Huynh-Feldt epsilon (Lecoutre)", 0.9279)] {
        let got = value(&cells, "repeated-anova", "Sphericity", "Differences between visits", head);
        assert!((got - printed).abs() < 5e-5, "{head}: {got}");
    }
}

#[test]
fn sitka_spruces() {
    let findings = usual("sitka1988");
    assert_eq!(check("sitka1988", &findings).len(), 4);
    // The p-values as printed: two or three digits, "< 0.001" below.
    let text = serde_json::to_string(&findings).unwrap();
    for said in ["F(4, 77) = 4.17, p = 0.004", "t(314) = 3.83, p < 0.001", "t(43.3) = 2.68, p = 0.010"] {
        assert!(text.contains(said), "{said}");
    }
    // Lines through a course that bends: said, with the likelihood that says so.
    let lines = analysis(&findings, "straight-lines");
    assert_eq!(lines.bearing.verdict, Borne::No);
    assert_eq!(lines.lines.len(), 2);
}

#[test]
fn times_that_nobody_shares() {
    let findings = usual("uneven");
    assert_eq!(findings.shared_visits, None);
    let done: Vec<UsualKind> = findings.analyses.iter().filter(|a| a.done).map(|a| a.kind).collect();
    assert_eq!(done, [UsualKind::StraightLines, UsualKind::OnePerSubject]);
    assert_eq!(check("uneven", &findings).len(), 2);
    for refused in findings.analyses.iter().filter(|a| !a.done) {
        assert!(refused.result.contains("need common visits"), "{}", refused.result);
        assert!(refused.tables.is_empty());
    }
}

/// Cars of two countries in the two-sample example of the NIST/SEMATECH e-Handbook of Statistical Methods, section 1.3.5.3
/// (miles per gallon: 249 with mean 20.14458 and SD 6.41470, 79 with mean 30.48101 and SD 6.10771): printed t and
/// degrees of freedom, by Satterthwaite's rule for unequal variances. Values recalled from memory; they agree with the printed moments.
#[test]
fn two_means_of_the_handbook() {
    use courseband_engine::usual::{Variances, compare_means};
    let sample = |n: usize, mean: f64, sd: f64| -> Vec<f64> {
        (0..n).map(|k| if k == 0 { mean } else { mean + if k % 2 == 0 { sd } else { -sd } }).collect()
    };
    let (first, second) = (sample(249, 20.14458, 6.41470), sample(79, 30.48101, 6.10771));
    for (variances, t, df) in [(Variances::Unequal, 12.94627, 136.8750), (Variances::Equal, 12.62059, 326.0)] {
        let got = compare_means(&first, &second, variances, 0.95).unwrap();
        assert!((got.t - t).abs() < 2e-5 * t && (got.df - df).abs() < 2e-3, "{got:?}");
    }
}
