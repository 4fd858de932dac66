//! The demo tables open under their plans, and the findings hold the truths they were made from.
//!
//! The truths are the numbers of `demo-data/make.py`, typed again here.

use courseband_study::{Curve, Difference, Direction, Findings, FitStatus, Plan, run};
use serde_json::Value;

fn path(file: &str) -> String {
    format!("{}/../demo-data/{file}", env!("CARGO_MANIFEST_DIR"))
}

fn list() -> Vec<Value> {
    let text = std::fs::read_to_string(path("demos.json")).unwrap();
    serde_json::from_str(&text).unwrap()
}

fn findings(file: &str) -> Findings {
    let demos = list();
    let demo = demos.iter().find(|demo| demo["file"] == file).unwrap_or_else(|| panic!("{file} is not in demos.json"));
    let plan = Plan::from_json(&demo["plan"].to_string()).unwrap_or_else(|refusal| panic!("{file}: {refusal}"));
    let bytes = std::fs::read(path(file)).unwrap();
    run(&bytes, &plan).unwrap_or_else(|refusal| panic!("{file}: {refusal}"))
}

fn curve<'a>(findings: &'a Findings, group: &str) -> &'a Curve {
    findings.curves.iter().find(|curve| curve.group == group).unwrap_or_else(|| panic!("no curve of {group}"))
}

fn gap<'a>(findings: &'a Findings, from: &str, to: &str) -> &'a Difference {
    let named = findings.differences.iter().find(|gap| gap.from == from && gap.to == to);
    named.unwrap_or_else(|| panic!("{to} is not compared with {from}"))
}

/// Times at which a true course is outside a curve's band.
fn missed(curve: &Curve, truth: impl Fn(f64) -> f64) -> Vec<f64> {
    let grid = &curve.grid;
    let outside = |k: &usize| {
        let value = truth(grid.time[*k]);
        grid.lower[*k].is_some_and(|low| value < low) || grid.upper[*k].is_some_and(|high| value > high)
    };
    (0..grid.time.len()).filter(outside).map(|k| grid.time[k]).collect()
}

/// The stepped course through (time, value) points of `make.py`.
fn stepped(points: &[(f64, f64)], t: f64) -> f64 {
    let k = points.windows(2).position(|pair| t <= pair[1].0).unwrap_or(points.len() - 2);
    let ((t0, v0), (t1, v1)) = (points[k], points[k + 1]);
    let x = ((t - t0) / (t1 - t0)).clamp(0.0, 1.0);
    v0 + (v1 - v0) * x * x * (3.0 - 2.0 * x)
}

#[test]
fn every_demo_is_listed_with_its_words_and_is_fitted() {
    let demos = list();
    assert_eq!(demos.len(), 4);
    for demo in demos {
        let file = demo["file"].as_str().unwrap();
        assert!(demo["blurb"].as_str().unwrap().starts_with("Invented."), "{file} must say that it is invented");
        assert!(!demo["title"].as_str().unwrap().is_empty());
        let findings = findings(file);
        assert_ne!(findings.fit.status, FitStatus::Failed, "{file}: {:?}", findings.fit.remarks);
        assert!(!findings.sentences.is_empty(), "{file}");
        assert!(findings.differences.iter().all(|gap| gap.support.is_some()), "{file}");
    }
}

#[test]
fn wounds_one_group_early_one_later() {
    let findings = findings("wounds.csv");
    assert_eq!((findings.subjects, findings.groups.len()), (36, 3));
    let gauze = |t: f64| libm::log(61.0) - 0.034 * t - 0.0017 * t * t;
    assert_eq!(missed(curve(&findings, "Plain gauze"), gauze), [0.0; 0]);
    assert_eq!(missed(curve(&findings, "Foam pad"), |t| gauze(t) - 0.058 * (t - 7.0).max(0.0)), [0.0; 0]);
    assert_eq!(missed(curve(&findings, "Gel film"), |t| gauze(t) - 0.080 * (t - 3.0).max(0.0)), [0.0; 0]);

    let from = |to: &str, truth: f64| {
        let stretch = gap(&findings, "Plain gauze", to).beyond.last().unwrap_or_else(|| panic!("{to} is never beyond"));
        assert!(stretch.open_end && stretch.direction == Some(Direction::Below), "{to}: {stretch:?}");
        // A band that holds shows a gap beyond the margin only where it is.
        assert!(stretch.start > truth, "{to}: shown from {}, true from {truth}", stretch.start);
        stretch.start
    };
    let early = from("Gel film", 3.0 - libm::log(0.9) / 0.080);
    let late = from("Foam pad", 7.0 - libm::log(0.9) / 0.058);
    assert!(early < late, "Gel film from {early}, foam pad from {late}");
}

#[test]
fn ferritin_arms_part_and_meet_again() {
    let findings = findings("ferritin.csv");
    let infusion = |t: f64| libm::log(17.0) + stepped(&[(0.0, 0.0), (35.0, 1.55), (182.0, 0.95)], t);
    let oral = |t: f64| libm::log(17.0) + stepped(&[(0.0, 0.0), (110.0, 0.85), (182.0, 0.95)], t);
    let gap = gap(&findings, "oral weekly", "infusion");
    let stretch = gap.stretches.first().expect("the arms are apart for a while");
    assert_eq!(stretch.direction, Some(Direction::Above));
    assert!(stretch.start > 0.0 && stretch.end < 182.0, "{stretch:?}");
    // Where the band says apart, the arms are apart.
    for t in [stretch.start, (stretch.start + stretch.end) / 2.0, stretch.end] {
        assert!(infusion(t) > oral(t), "at {t}");
    }
    assert!(!findings.problems.is_empty(), "empty cells are listed");
}

#[test]
fn weights_a_column_per_week_with_cages() {
    let findings = findings("weights.csv");
    assert_eq!((findings.subjects, findings.columns.cluster.as_deref()), (36, Some("cage")));
    assert!(findings.notes.iter().any(|note| note.message.contains("cage")), "what cages mean is said");
    let fat = gap(&findings, "standard", "high fat");
    let stretch = fat.beyond.last().expect("high fat ends far above standard");
    assert!(stretch.open_end && stretch.direction == Some(Direction::Above), "{stretch:?}");
    let standard = |t: f64| stepped(&[(0.0, 21.0), (6.0, 24.6), (12.0, 26.4)], t);
    let high = |t: f64| stepped(&[(0.0, 21.0), (6.0, 28.2), (12.0, 35.2)], t);
    assert!(high(stretch.start) - standard(stretch.start) > 2.0, "shown beyond 2 g from {}", stretch.start);
    let (low, high) = (fat.grid.lower.last().unwrap().unwrap(), fat.grid.upper.last().unwrap().unwrap());
    assert!(low < 8.8 && 8.8 < high, "week 12: {low} to {high}, true 8.8");
}
