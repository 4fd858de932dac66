//! The report says what the findings say, and nothing else.

use super::*;
use std::fmt::Write;

fn table() -> String {
    let mut text = String::from("mouse,arm,day,size\n");
    for s in 0..16 {
        for day in [0, 2, 5, 9] {
            let wave = f64::from((s * 7 + day * 5) % 11) * 0.08;
            let gap = if s % 2 == 1 { 0.5 * f64::from(day) } else { 0.0 };
            let _ = writeln!(text, "m{s},{},{day},{:.3}", ["a", "b"][s as usize % 2], 10.0 + wave + gap);
        }
    }
    text
}

fn report(plan: &str, context: &ReportContext) -> (Findings, Report) {
    let plan = Plan::from_json(plan).unwrap();
    let mut study = Study::open(table().as_bytes()).unwrap();
    (study.run(&plan).unwrap(), study.report(&plan, None, context).unwrap())
}

#[test]
fn it_carries_counts_exclusions_and_every_finding() {
    let context = ReportContext { table: "mice.csv".into(), excluded_late: vec![3], ..ReportContext::default() };
    let plan = r#"{"exclusions": [{"row": 3, "reason": "tail clip lost"}], "comparisons": {"margin": 1}}"#;
    let (findings, report) = report(plan, &context);
    let text = serde_json::to_string(&report).unwrap();
    for part in ["63 measurements", "16 subjects", "mice.csv", "line 3 (tail clip lost, after findings had been seen)"]
    {
        assert!(text.contains(part), "{part}");
    }
    for sentence in &findings.sentences {
        let whole = serde_json::to_string(&sentence.text).unwrap();
        assert!(text.contains(whole.trim_matches('"')), "{}", sentence.text);
    }
    let methods = &report.sections[2].paragraphs.join(" ");
    assert!(methods.contains("penalised natural cubic regression spline") && methods.contains("random level"));
    assert!(report.provisional && report.items.iter().any(|item| item.answer.is_empty()));
}

#[test]
fn methods_follow_the_plan() {
    let plan = r#"{"curves": {"shape": "straight"}, "response": {"transform": "log"}, "subjects": "slope",
        "errors": {"serial": "ar1"}, "comparisons": {"small_sample": "none", "band": "pointwise"}}"#;
    let (_, report) = report(plan, &ReportContext { invented: true, ..ReportContext::default() });
    let methods = report.sections[2].paragraphs.join(" ");
    for part in
        ["straight line", "geometric means", "level and trend", "AR(1)", "at each time by itself", "normal theory"]
    {
        assert!(methods.contains(part), "{part}: {methods}");
    }
    assert!(report.title.contains("invented") && !report.provisional);
}

#[test]
fn numbers_of_the_tables_are_those_of_the_findings() {
    let (findings, report) = report("{}", &ReportContext::default());
    let gaps = report.tables.iter().find(|t| t.key == "gaps").unwrap();
    let first = findings.differences[0].at_visits.response_estimate[2].unwrap();
    let printed: f64 = gaps.rows[2][3].replace('\u{2212}', "-").parse().unwrap();
    assert!((printed - first).abs() < 0.01, "{printed} {first}");
}
