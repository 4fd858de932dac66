//! The findings' own JSON is what a figure reads: its keys, a whole figure from it, on every theme.

use courseband_figure::{Estimate, LaneState, Source, StripKind, Theme, Traces, View, describe, to_svg};
use courseband_study::{Findings, Plan, Study};

/// Two groups of six that come apart: invented by a rule, the same every time.
fn table() -> String {
    let mut text = String::from("mouse,diet,day,weight\n");
    for mouse in 0..12 {
        let diet = if mouse % 2 == 0 { "plain" } else { "rich & <sweet>" };
        for day in [0, 3, 7, 10, 14] {
            let wobble = f64::from((mouse * 7 + day * 5) % 11) / 11.0 - 0.5;
            let gain = if mouse % 2 == 0 { 0.2 } else { 0.8 };
            text += &format!(
                "m{mouse},{diet},{day},{:.3}\n",
                20.0 + 0.3 * f64::from(mouse % 5) + gain * f64::from(day) + wobble
            );
        }
    }
    text
}

fn findings(plan: &str) -> Findings {
    let plan = Plan::from_json(plan).expect("a plan");
    Study::open(table().as_bytes()).expect("a table").run(&plan).expect("findings")
}

fn source(findings: &Findings) -> Source {
    serde_json::from_str(&serde_json::to_string(findings).expect("writes")).expect("the findings' keys")
}

/// Equal but for the last digit, which reading a decimal number may lose.
fn same(read: &[Option<f64>], written: &[Option<f64>]) {
    assert_eq!(read.len(), written.len());
    for (a, b) in read.iter().zip(written) {
        let (Some(a), Some(b)) = (a, b) else { panic!("{a:?} {b:?}") };
        assert!((a - b).abs() <= 1e-14 * b.abs(), "{a} {b}");
    }
}

#[test]
fn the_source_says_what_the_findings_say() {
    let findings = findings(r#"{"response":{"transform":"log"},"comparisons":{"margin":5,"margin_unit":"percent"}}"#);
    let source = source(&findings);
    same(&source.curves[1].response_mean, &findings.curves[1].grid.response_mean);
    same(&source.curves[0].at_visits.response_upper, &findings.curves[0].at_visits.response_upper);
    same(&source.differences[0].response_lower, &findings.differences[0].grid.response_lower);
    assert_eq!(source.differences[0].support, findings.differences[0].support);
    assert_eq!(source.differences[0].stretches.len(), findings.differences[0].stretches.len());
    assert_eq!(source.groups[0].last_times, findings.groups[0].last_times);
    assert_eq!((source.scale.ratio, source.scale.time_word.as_str()), (true, "day"));
    assert_eq!((source.plan.comparisons.margin, source.plan.comparisons.margin_unit.as_str()), (5.0, "percent"));
    let figure = describe(&source, &Traces::default(), &View::default());
    let lane = figure.strips.iter().find_map(|s| s.lane.as_ref()).expect("a lane");
    assert!(lane.segments.iter().any(|s| s.state == LaneState::Beyond && s.up == Some(true)), "{lane:?}");
}

#[test]
fn every_shape_and_theme_gives_a_whole_file() {
    for shape in ["smooth", "straight", "by-time"] {
        let source = source(&findings(&format!(r#"{{"curves":{{"shape":"{shape}"}}}}"#)));
        for theme in [Theme::Light, Theme::Dark, Theme::Print] {
            let view = View { theme, width: 700.0, margin: 12.0, ..View::default() };
            let figure = describe(&source, &Traces::default(), &view);
            let kinds: Vec<StripKind> = figure.strips.iter().map(|s| s.kind).collect();
            assert_eq!(kinds, [StripKind::Courses, StripKind::Gap, StripKind::Followed]);
            let svg = to_svg(&figure, &Estimate).expect("a file");
            assert!(svg.starts_with("<svg width=\"700\" height="), "{}", &svg[..80]);
            assert!(svg.contains(" viewBox=\"0 0 7000 ") && svg.trim_end().ends_with("</svg>"));
            assert!(svg.contains("rich &amp; &lt;sweet&gt;") && !svg.contains("<sweet>"), "names are escaped");
            assert!(!svg.contains("NaN") && !svg.contains("inf"));
        }
    }
}

#[test]
fn text_sizes_in_the_file_are_the_asked_ones() {
    let source = source(&findings("{}"));
    let svg = to_svg(&describe(&source, &Traces::default(), &View::default()), &Estimate).expect("a file");
    let sizes = svg.match_indices("font-size=\"").map(|(at, key)| &svg[at + key.len()..]);
    let sizes: Vec<f64> = sizes.filter_map(|rest| rest.split('"').next()?.parse().ok()).collect();
    // Text of 12 and 0.92 times 12 pixels on a grid of ten.
    assert!(
        sizes.len() > 10 && sizes.iter().all(|s| (s - 120.0).abs() < 1e-6 || (s - 110.4).abs() < 1e-6),
        "{sizes:?}"
    );
}
