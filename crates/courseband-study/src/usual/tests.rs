//! Sentences, what is left out, and what cannot be done. Numbers are held against the outside in the tests package.

use super::print::{days, degrees, p_said, p_value};
use super::*;
use crate::findings::FitStatus;
use courseband_engine::special::Rng;
use serde_json::json;

fn plan(changes: serde_json::Value) -> Plan {
    let mut plan = json!({
        "columns": { "subject": "subject", "time": "day", "group": "group", "response": "y", "cluster": false },
        "words": { "subject": "mouse", "subjects": "mice" },
    });
    for (key, value) in changes.as_object().unwrap() {
        plan[key] = value.clone();
    }
    Plan::from_json(&plan.to_string()).unwrap()
}

/// An invented table: `size` mice in each group of `groups`, values by `value(group, day, level, noise)`; `keep` false
/// leaves a row out.
fn table(
    groups: &[&str],
    size: usize,
    days: &[f64],
    value: impl Fn(usize, f64, f64, f64) -> f64,
    keep: impl Fn(usize, f64) -> bool,
) -> String {
    let mut rng = Rng::new(17);
    let mut text = String::from("subject,group,day,y\n");
    for (g, name) in groups.iter().enumerate() {
        for k in 0..size {
            let level = rng.normal();
            for &day in days {
                let y = value(g, day, level, rng.normal());
                if keep(g * size + k, day) {
                    text.push_str(&format!("m{},{name},{day},{y:.6}\n", g * size + k));
                }
            }
        }
    }
    text
}

const DAYS: [f64; 5] = [0.0, 3.0, 5.0, 7.0, 10.0];

/// Groups part from day 3 on and come together at the end.
fn bump(group: usize, day: f64, level: f64, noise: f64) -> f64 {
    let apart = if group == 1 && (3.0..=7.0).contains(&day) { 6.0 } else { 0.0 };
    20.0 + apart + level + 0.5 * noise
}

fn usual(text: &str, plan: &Plan) -> UsualFindings {
    Study::open(text.as_bytes()).unwrap().usual(plan).unwrap()
}

fn of(findings: &UsualFindings, kind: UsualKind) -> &UsualAnalysis {
    findings.analyses.iter().find(|a| a.kind == kind).unwrap()
}

#[test]
fn p_values_have_two_or_three_digits() {
    for (p, text) in [
        (0.2345, "0.23"),
        (0.0342, "0.034"),
        (0.09951, "0.10"),
        (0.001, "0.001"),
        (0.00099, "< 0.001"),
        (0.995, "> 0.99"),
    ] {
        assert_eq!(p_value(p), text);
    }
    assert_eq!(p_said(0.0342), "p = 0.034");
    assert_eq!(p_said(1e-9), "p < 0.001");
    assert_eq!((degrees(17.00001), degrees(17.26)), ("17".into(), "17.3".into()));
    assert_eq!(days("day", &[7.0, 9.5, 11.0]), "day 7, 9.5 and 11");
}

#[test]
fn incomplete_mice_are_dropped_by_one_analysis_and_kept_by_others() {
    let keep = |mouse: usize, day: f64| !(mouse % 4 == 1 && day > 4.0);
    let findings = usual(&table(&["Saline", "Drug"], 8, &DAYS, bump, keep), &plan(json!({})));
    let anova = of(&findings, UsualKind::RepeatedAnova);
    let expected = Used { subjects: 12, rows: 60, dropped_subjects: 4, dropped_rows: 8 };
    assert_eq!(anova.used, expected);
    assert!(
        anova.result.contains("It uses 12 mice with all visits and leaves out 4 mice with 8 measurements."),
        "{}",
        anova.result
    );
    for kind in [UsualKind::StraightLines, UsualKind::DayAsCategory, UsualKind::DayByDay, UsualKind::OnePerSubject] {
        let used = of(&findings, kind).used;
        assert_eq!((used.subjects, used.dropped_rows), (16, 0), "{kind:?}");
    }
    // Some left early, so levels are compared, not areas.
    assert_eq!(of(&findings, UsualKind::OnePerSubject).tables[0].title, "Mean level");
    assert!(of(&findings, UsualKind::OnePerSubject).bearing.sentence.contains("12 of 16 mice"));
}

#[test]
fn a_gap_that_comes_and_goes() {
    let findings = usual(&table(&["Saline", "Drug"], 8, &DAYS, bump, |_, _| true), &plan(json!({})));
    assert_eq!(findings.pairs[0].curves_days, [3.0, 5.0, 7.0]);
    // By the day's own means the same days.
    for kind in [UsualKind::DayAsCategory, UsualKind::DayByDay] {
        let analysis = of(&findings, kind);
        assert_eq!(analysis.beside.pairs[0].days, [3.0, 5.0, 7.0], "{kind:?}");
        assert_eq!(analysis.beside.agrees, Some(true));
        assert!(analysis.result.starts_with("Drug and Saline are apart at day 3, 5 and 7"), "{}", analysis.result);
    }
    // Lines are too stiff for it: other days, said with the reason, and the check that says so.
    let lines = of(&findings, UsualKind::StraightLines);
    assert_eq!(lines.bearing.verdict, Borne::No);
    assert_eq!(lines.beside.agrees, Some(false));
    assert!(lines.beside.sentence.contains("the lines cannot bend"), "{}", lines.beside.sentence);
    // A slope says nothing of it.
    let summary = of(&findings, UsualKind::OnePerSubject);
    assert!(summary.beside.sentence.contains("a slope sees only steady change"), "{}", summary.beside.sentence);
    assert_eq!(summary.tables[0].title, "Area under the course");
}

#[test]
fn the_bend_is_measured_by_the_two_fits() {
    let text = table(&["Saline", "Drug"], 8, &DAYS, bump, |_, _| true);
    let log_reml = |shape: &str| {
        let mut study = Study::open(text.as_bytes()).unwrap();
        let findings = study.run(&plan(json!({ "curves": { "shape": shape } }))).unwrap();
        assert_ne!(findings.fit.status, FitStatus::Failed);
        findings.fit.log_reml.unwrap()
    };
    let gain = log_reml("smooth") - log_reml("straight");
    for shape in ["smooth", "straight", "by-time"] {
        let findings = usual(&text, &plan(json!({ "curves": { "shape": shape } })));
        let number = &of(&findings, UsualKind::StraightLines).bearing.numbers[0];
        assert!((number.value.unwrap() - gain).abs() < 1e-6, "{shape}: {number:?} instead of {gain}");
    }
}

#[test]
fn slopes_that_differ_within_groups_are_seen() {
    let fan = |_: usize, day: f64, level: f64, noise: f64| 20.0 + level * day + 0.3 * noise;
    let text = table(&["Saline", "Drug"], 8, &DAYS, fan, |_, _| true);
    let said = |subjects: &str| {
        let findings = usual(&text, &plan(json!({ "subjects": subjects })));
        of(&findings, UsualKind::StraightLines).bearing.sentence.contains("Slopes differ from mouse to mouse")
    };
    assert!(said("intercept"));
    assert!(!said("slope"));
}

#[test]
fn replicates_are_averaged() {
    let once = table(&["Saline", "Drug"], 8, &DAYS, bump, |_, _| true);
    // Every row twice, moved up and down by the same.
    let mut twice = String::from("subject,group,day,y\n");
    for line in once.lines().skip(1) {
        let (rest, y) = line.rsplit_once(',').unwrap();
        let y: f64 = y.parse().unwrap();
        twice.push_str(&format!("{rest},{:.6}\n{rest},{:.6}\n", y - 0.25, y + 0.25));
    }
    let (a, b) = (usual(&once, &plan(json!({}))), usual(&twice, &plan(json!({}))));
    assert!(b.notes.iter().any(|n| n.message.contains("averaged")), "{:?}", b.notes);
    assert!(a.notes.is_empty());
    for kind in [UsualKind::RepeatedAnova, UsualKind::DayAsCategory, UsualKind::DayByDay, UsualKind::OnePerSubject] {
        for (x, y) in of(&a, kind).tables.iter().zip(&of(&b, kind).tables) {
            for (x, y) in x.rows.iter().zip(&y.rows).flat_map(|(x, y)| x.cells.iter().zip(&y.cells)) {
                let (x, y) = (x.value.unwrap_or(0.0), y.value.unwrap_or(0.0));
                assert!((x - y).abs() <= 1e-5 * x.abs().max(1e-3), "{kind:?}: {x} and {y}");
            }
        }
        assert_eq!(of(&b, kind).used.rows, 160);
    }
}

#[test]
fn a_log_scale_gives_ratios() {
    let grow = |g: usize, day: f64, level: f64, noise: f64| {
        libm::exp(3.0 + 0.1 * day * (1.0 + g as f64) + 0.1 * level + 0.05 * noise)
    };
    let text = table(&["Saline", "Drug"], 8, &DAYS, grow, |_, _| true);
    let findings = usual(&text, &plan(json!({ "response": { "transform": "log" } })));
    assert!(findings.ratio);
    let lines = of(&findings, UsualKind::StraightLines);
    let slope = &lines.tables[1].rows[0].cells[0];
    assert!((slope.value.unwrap() - libm::exp(0.1)).abs() < 0.02, "{slope:?}");
    assert!(lines.result.contains("Drug's factor is"), "{}", lines.result);
    let summary = of(&findings, UsualKind::OnePerSubject);
    assert_eq!((summary.tables[0].title.as_str(), summary.tables[1].title.as_str()), ("Mean level", "Factor per day"));
    // The lines are curves in the response's own unit.
    assert!(lines.lines[0].time.len() > 2 && lines.lines[0].response_mean.iter().all(|y| *y > 10.0));
}

#[test]
fn too_few_mice_for_any_covariance_fall_back_to_ar1() {
    let findings = usual(&table(&["Saline", "Drug"], 3, &DAYS, bump, |_, _| true), &plan(json!({})));
    let category = of(&findings, UsualKind::DayAsCategory);
    assert!(category.done && category.name.contains("AR(1)"));
    assert!(
        category.result.starts_with("An unstructured covariance cannot be estimated: subjects less groups are 4"),
        "{}",
        category.result
    );
    assert_eq!(category.tables[0].rows.len(), 5);
    assert!(category.assumption.contains("AR(1)"));
    assert_eq!(category.bearing.verdict, Borne::Doubtful);
}

#[test]
fn visits_that_few_share_are_left_out_and_named() {
    // One mouse has a row of its own on day 6.
    let mut text = table(&["Saline", "Drug"], 8, &DAYS, bump, |_, _| true);
    text.push_str("m3,Saline,6,20\n");
    let findings = usual(&text, &plan(json!({})));
    assert_eq!(findings.shared_visits.as_deref(), Some(DAYS.as_slice()));
    assert!(findings.notes.iter().any(|n| n.message.starts_with("1 row at day 6")), "{:?}", findings.notes);
    assert_eq!(of(&findings, UsualKind::DayByDay).used.dropped_rows, 1);
    assert_eq!(of(&findings, UsualKind::StraightLines).used.dropped_rows, 0);
}

#[test]
fn one_group_is_not_compared() {
    let findings = usual(&table(&["Saline"], 9, &DAYS, bump, |_, _| true), &plan(json!({})));
    assert!(findings.pairs.is_empty());
    let done: Vec<bool> = findings.analyses.iter().map(|a| a.done).collect();
    assert_eq!(done, [true, true, true, false, false]);
    assert!(of(&findings, UsualKind::RepeatedAnova).result.contains("A change over visits"));
}

#[test]
fn a_failed_fit_leaves_the_rest() {
    // Values on one line without any error: nothing to estimate a spread from.
    let exact = |g: usize, day: f64, _: f64, _: f64| 20.0 + day + g as f64;
    let findings = usual(&table(&["Saline", "Drug"], 6, &DAYS, exact, |_, _| true), &plan(json!({})));
    assert!(findings.pairs[0].curves_apart.is_none());
    assert!(!of(&findings, UsualKind::StraightLines).done);
    let category = of(&findings, UsualKind::DayAsCategory);
    assert!(!category.done && category.result.contains("do not vary"), "{}", category.result);
    assert!(findings.notes.iter().any(|n| n.message.contains("could not be fitted")));
}

#[test]
fn a_calibrated_plan_is_compared_by_the_band_it_is_given() {
    let text = table(&["Saline", "Drug"], 8, &DAYS, bump, |_, _| true);
    let plan = plan(json!({ "comparisons": { "small_sample": "calibrated", "refits": 99 } }));
    let mut study = Study::open(text.as_bytes()).unwrap();
    let quick = study.usual(&plan).unwrap();
    assert!(quick.notes.iter().any(|n| n.about == "bands"));
    let refits = study.calibration(&plan).unwrap().unwrap().refits(0, 99);
    let calibrated = study.usual_calibrated(&plan, &refits).unwrap();
    assert!(calibrated.notes.is_empty());
    assert_eq!(calibrated.pairs[0].curves_days, [3.0, 5.0, 7.0]);
}
