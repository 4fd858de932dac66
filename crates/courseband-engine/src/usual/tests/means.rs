//! Checks of the usual analyses: means against values from outside.

use super::super::*;
use super::{check, invented};

const SLEEP_FIRST: [f64; 10] = [0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0];
const SLEEP_SECOND: [f64; 10] = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4];

#[test]
fn welch_on_published_sleep_data() {
    // Student 1908, Biometrika 6:1. Widely printed: t = 1.8608, df = 17.776, p = 0.07939, interval -0.2054832 to
    // 3.3654832 (from memory, reproduced).
    let welch = compare_means(&SLEEP_FIRST, &SLEEP_SECOND, Variances::Unequal, 0.95).unwrap();
    assert!((welch.t - 1.8608).abs() < 5e-5);
    assert!((welch.df - 17.776).abs() < 5e-4);
    assert!((welch.p - 0.07939).abs() < 5e-6);
    assert!((welch.interval.0 + 0.205_483_2).abs() < 5e-8);
    assert!((welch.interval.1 - 3.365_483_2).abs() < 5e-8);
}

#[test]
fn satterthwaite_reproduces_welch_and_the_pooled_case() {
    // One variance on nu degrees of freedom: v = c s^2 has exactly nu.
    let (s2, nu, c): (f64, f64, f64) = (3.7, 11.0, 0.4);
    let df = satterthwaite_df(c * s2, &[c], &[2.0 * s2 * s2 / nu]).unwrap();
    assert!((df - nu).abs() < 1e-12);
    // Two correlated parameters, by hand: v = 3, g = (1, 2), W = (0.5 0.1; 0.1 0.2), g'Wg = 1.7, df = 18 / 1.7.
    let df = satterthwaite_df(3.0, &[1.0, 2.0], &[0.5, 0.1, 0.1, 0.2]).unwrap();
    assert!((df - 18.0 / 1.7).abs() < 1e-12);
    assert_eq!(satterthwaite_df(0.0, &[1.0], &[1.0]), None);
    assert_eq!(satterthwaite_df(1.0, &[0.0], &[1.0]), None);
}

#[test]
fn every_day_agrees_with_scipy() {
    let panel = invented();
    let pairs = [(0, 1), (0, 2)];
    for (name, variances) in [("welch", Variances::Unequal), ("student", Variances::Equal)] {
        let tests = tests_by_time(&panel, &pairs, variances, 0.95);
        assert_eq!(tests.len(), 12);
        for (index, test) in tests.iter().enumerate() {
            let (a, b) = test.pair;
            let case = format!("{name}_{a}_{b}_{}", panel.times[test.time]);
            let c = test.comparison.unwrap();
            check(&case, "difference", c.difference);
            check(&case, "t", c.t);
            check(&case, "df", c.df);
            check(&case, "p", c.p);
            check(&case, "low", c.interval.0);
            check(&case, "high", c.interval.1);
            if name == "welch" {
                check("welch_holm", &index.to_string(), test.p_holm.unwrap());
            }
        }
    }
}

#[test]
fn days_that_cannot_be_tested_name_the_group_and_leave_the_family() {
    let mut panel = invented();
    for (row, group) in panel.values.iter_mut().zip(&panel.group_of_subject) {
        if *group == 2 {
            row[3] = None;
        }
        row[0] = Some(1.0);
    }
    let tests = tests_by_time(&panel, &[(0, 2)], Variances::Unequal, 0.95);
    assert_eq!(tests[0].comparison, Err(Undefined::NoVariation));
    assert_eq!(tests[3].comparison, Err(Undefined::TooFewValues { group: 2, have: 0, need: 2 }));
    assert_eq!(tests[3].p_holm, None);
    let smallest = tests.iter().filter_map(|t| t.comparison.ok()).map(|c| c.p).fold(1.0, f64::min);
    let adjusted = tests.iter().filter_map(|t| t.p_holm).fold(1.0, f64::min);
    assert!((adjusted - (4.0 * smallest).min(1.0)).abs() < 1e-15);
}

#[test]
fn summaries_agree_with_numpy_and_statsmodels() {
    let panel = invented();
    let pairs = [(0, 1), (0, 2), (1, 2)];
    for (name, measure) in
        [("area", SummaryMeasure::Area), ("level", SummaryMeasure::MeanLevel), ("slope", SummaryMeasure::Slope)]
    {
        let result = compare_summaries(&panel, measure, &pairs, 0.95);
        assert_eq!(result.left_out, 0);
        for (subject, value) in result.by_subject.iter().enumerate() {
            check(&format!("summary_{name}"), &subject.to_string(), value.unwrap());
        }
        let overall = result.overall.unwrap();
        let case = format!("summary_{name}_overall");
        check(&case, "f", overall.f);
        check(&case, "p", overall.p);
        check(&case, "df_error", overall.df_error);
        for (index, pair) in result.pairs.iter().enumerate() {
            let case = format!("summary_{name}_pair_{index}");
            check(&case, "p", pair.comparison.unwrap().p);
            check(&case, "p_holm", pair.p_holm.unwrap());
        }
        let mut groups = vec![Vec::new(); 3];
        for (value, group) in result.by_subject.iter().zip(&panel.group_of_subject) {
            groups[*group].extend(*value);
        }
        let equal = one_way(&groups).unwrap();
        check(&format!("summary_{name}_one_way"), "f", equal.f);
        check(&format!("summary_{name}_one_way"), "p", equal.p);
    }
}

#[test]
fn a_subject_seen_once_has_no_summary() {
    assert_eq!(summarise(&[(1.0, 2.0)], SummaryMeasure::MeanLevel), None);
    assert_eq!(summarise(&[], SummaryMeasure::Slope), None);
    // By hand: area 2*(1+3)/2 + 1*(3+3)/2 = 7 over 3 days.
    let points = [(0.0, 1.0), (2.0, 3.0), (3.0, 3.0)];
    assert_eq!(summarise(&points, SummaryMeasure::Area), Some(7.0));
    assert_eq!(summarise(&points, SummaryMeasure::MeanLevel), Some(7.0 / 3.0));
}

#[test]
fn one_way_layouts_without_error_say_so() {
    assert_eq!(one_way(&[vec![1.0, 2.0], vec![]]), Err(Undefined::OneGroup));
    assert_eq!(one_way(&[vec![1.0], vec![2.0]]), Err(Undefined::TooFewSubjects { have: 0, need: 1 }));
    assert_eq!(one_way(&[vec![1.0, 1.0], vec![2.0, 2.0]]), Err(Undefined::NoVariation));
    let short = one_way_welch(&[vec![1.0, 2.0], vec![2.0]]);
    assert_eq!(short, Err(Undefined::TooFewValues { group: 1, have: 1, need: 2 }));
}
