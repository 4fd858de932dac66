//! Seeded faults are caught, and clean tables are left alone.
//!
//! Ten subjects a group, two groups, eight visits. Faults: AR(1) errors with correlation 0.6 from visit
//! to visit; standard deviation 2.5 times as large in one group; one value off by six error SDs; trends with
//! SD 0.35 per visit in a model with levels only; lognormal values with SD 0.6 of the logs on the raw scale.

use super::{Check, ChecksFindings, Outcome};
use crate::{Plan, Study};
use courseband_engine::special::Rng;
use std::fmt::Write as _;

#[derive(Clone, Copy, PartialEq)]
enum Fault {
    None,
    Serial,
    Spread,
    Outlying,
    Trend,
    Scale,
}

fn table(fault: Fault, seed: u64) -> String {
    let mut rng = Rng::new(seed);
    let mut text = String::from("mouse,arm,day,y\n");
    for s in 0..20 {
        let wide = if fault == Fault::Spread && s % 2 == 1 { 2.5 } else { 1.0 };
        let level = wide * rng.normal();
        let trend = if fault == Fault::Trend { 0.35 * rng.normal() } else { 0.0 };
        let mut state = rng.normal();
        for day in 0..8 {
            let carry = if fault == Fault::Serial { 0.6 } else { 0.0 };
            state = carry * state + libm::sqrt(1.0 - carry * carry) * rng.normal();
            let t = f64::from(day);
            let mut y = 10.0 + libm::sin(t / 3.0) + level + trend * (t - 3.5) + wide * 0.7 * state;
            if fault == Fault::Outlying && s == 7 && day == 4 {
                y += 6.0 * 0.7;
            }
            if fault == Fault::Scale {
                y = libm::exp(2.0 + 0.8 * libm::sin(t / 3.0) + 0.5 * level + 0.6 * state);
            }
            let _ = writeln!(text, "m{s},{},{day},{y:.4}", ["a", "b"][s % 2]);
        }
    }
    text
}

fn lit(fault: Fault, seed: u64) -> Vec<String> {
    Study::open(table(fault, seed).as_bytes()).unwrap().checks_lit(&Plan::default()).unwrap()
}

fn lights(fault: Fault, key: &str, runs: u64) -> u64 {
    (0..runs).filter(|&k| lit(fault, 100 + k).iter().any(|own| key.is_empty() || own == key)).count() as u64
}

#[test]
fn seeded_faults_light_the_right_check() {
    for (fault, key) in [
        (Fault::Serial, "serial"),
        (Fault::Spread, "spread"),
        (Fault::Outlying, "outlying"),
        (Fault::Trend, "subjects"),
        (Fault::Scale, "scale"),
    ] {
        let lit = lights(fault, key, 20);
        assert!(lit >= 17, "{key}: {lit} of 20");
    }
}

#[test]
fn clean_tables_stay_dark() {
    let lit = lights(Fault::None, "", 60);
    assert!(lit <= 9, "{lit} of 60");
}

fn checked(table: &str) -> ChecksFindings {
    Study::open(table.as_bytes()).unwrap().checks(&Plan::default()).unwrap()
}

fn find<'a>(findings: &'a ChecksFindings, key: &str) -> &'a Check {
    findings.checks.iter().find(|check| check.key == key).unwrap()
}

#[test]
fn remedies_are_tried_and_named() {
    let findings = checked(&table(Fault::Serial, 100));
    for check in &findings.checks {
        let consequence = check.consequence.as_ref().unwrap_or_else(|| panic!("{} has no remedy", check.key));
        assert_eq!(consequence.pairs.len(), 1, "{}", check.key);
        assert!(check.trial.is_some());
    }
    let serial = find(&findings, "serial");
    assert!(serial.lit && serial.more.len() == 1);
    // What goes on from visit to visit leaves the envelope of tables in which nothing does.
    let out = serial.plot.series[0].y.iter().zip(&serial.plot.envelope).any(|(y, [low, high])| y < low || y > high);
    assert!(out, "{:?}", serial.plot);
    assert!(findings.verdict.contains(" of 8 checks speak"), "{}", findings.verdict);
}

/// Both tables differ in one subject only, and the remedy that leaves it out says what that does.
#[test]
fn leaving_out_the_odd_subject_is_one_trial() {
    let mut text = table(Fault::None, 7);
    let far = |line: &str| {
        let (head, y) = line.rsplit_once(',').unwrap();
        format!("{head},{:.4}", y.parse::<f64>().unwrap() + 12.0)
    };
    text = text.lines().map(|line| if line.starts_with("m7,") { far(line) } else { line.into() } + "\n").collect();
    let findings = checked(&text);
    let odd = find(&findings, "subject");
    assert!(odd.lit, "{odd:?}");
    let trial = odd.trial.as_ref().unwrap();
    assert_eq!(trial.exclusions.len(), 8);
    let lines: Vec<&str> = text.lines().collect();
    assert!(trial.exclusions.iter().all(|e| lines[e.row - 1].starts_with("m7,") && e.column.is_none()));
    assert_ne!(odd.consequence.as_ref().unwrap().outcome, Outcome::Unknown);
}

/// Cages that are ignored light their check, and the remedy holds them.
#[test]
fn cages_that_are_ignored_are_seen() {
    let mut rng = Rng::new(5);
    let mut text = String::from("mouse,cage,arm,day,y\n");
    for cage in 0..10 {
        let own = 1.5 * rng.normal();
        for k in 0..4 {
            let level = 0.5 * rng.normal();
            for day in 0..6 {
                let y = 10.0 + own + level + 0.5 * rng.normal();
                let _ = writeln!(text, "m{cage}_{k},c{cage},{},{day},{y:.4}", ["a", "b"][cage % 2]);
            }
        }
    }
    let checks = |plan: &str| Study::open(text.as_bytes()).unwrap().checks(&Plan::from_json(plan).unwrap()).unwrap();
    let ignored = checks(r#"{"clusters": "none"}"#);
    let clusters = find(&ignored, "clusters");
    assert!(clusters.lit && clusters.consequence.is_some(), "{clusters:?}");
    let held = checks("{}");
    assert!(!find(&held, "clusters").lit);
}
