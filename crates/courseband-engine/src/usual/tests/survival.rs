//! Checks of the usual analyses: survival against values from outside.

use super::super::*;
use super::check;

// Weeks in remission of leukaemia, Freireich et al. 1963, Blood 21:699, as tabulated by Cox 1972, JRSS-B 34:187.
const DRUG: [f64; 21] =
    [6., 6., 6., 6., 7., 9., 10., 10., 11., 13., 16., 17., 19., 20., 22., 23., 25., 32., 32., 34., 35.];
const DRUG_EVENT: [u8; 21] = [1, 1, 1, 0, 1, 0, 1, 0, 0, 1, 1, 0, 0, 0, 1, 1, 0, 0, 0, 0, 0];
const CONTROL: [f64; 21] = [1., 1., 2., 2., 3., 4., 4., 5., 5., 8., 8., 8., 8., 11., 11., 12., 12., 15., 17., 22., 23.];

fn drug_events() -> Vec<bool> {
    DRUG_EVENT.iter().map(|e| *e == 1).collect()
}

#[test]
fn remission_curves_are_the_published_ones() {
    let drug = kaplan_meier(&DRUG, &drug_events(), 0.95);
    let control = kaplan_meier(&CONTROL, &[true; 21], 0.95);
    for (case, curve) in [("km_drug", &drug), ("km_control", &control)] {
        for step in &curve.steps {
            check(case, &format!("survival {}", step.time), step.survival);
            if step.survival > 0.0 {
                check(case, &format!("se {}", step.time), step.se);
            }
        }
    }
    assert_eq!((drug.steps.len(), drug.censored.len(), control.censored.len()), (7, 12, 0));
    // Medians 23 (13, not reached) and 8 (4, 11): printed in many texts, from memory.
    assert_eq!((drug.median, drug.median_interval), (Some(23.0), (Some(13.0), None)));
    assert_eq!((control.median, control.median_interval), (Some(8.0), (Some(4.0), Some(11.0))));
    let last = control.steps.last().unwrap();
    assert_eq!((last.survival, last.interval), (0.0, None));
}

#[test]
fn log_rank_of_two_groups_is_the_published_one() {
    let times = [DRUG, CONTROL].concat();
    let events = [drug_events(), vec![true; 21]].concat();
    let group: Vec<usize> = (0..42).map(|i| i / 21).collect();
    let test = log_rank(&times, &events, &group, 2).unwrap();
    // Observed 9 and 21, expected 19.25 and 10.75, chi-squared 16.79: printed in many texts, from memory.
    assert_eq!(test.observed, [9.0, 21.0]);
    assert!((test.expected[0] - 19.25).abs() < 0.005 && (test.expected[1] - 10.75).abs() < 0.005);
    assert!((test.chi2 - 16.79).abs() < 0.005);
    check("logrank_two", "chi2", test.chi2);
    check("logrank_two", "p", test.p);
    // An empty group in between changes nothing.
    let spread: Vec<usize> = group.iter().map(|g| 2 * g).collect();
    let again = log_rank(&times, &events, &spread, 3).unwrap();
    assert!((again.chi2 - test.chi2).abs() < 1e-12 && again.df == 1.0);
}

#[test]
fn log_rank_of_three_groups_agrees_with_statsmodels() {
    let times = [DRUG, CONTROL].concat();
    let events = [drug_events(), vec![true; 21]].concat();
    let group: Vec<usize> = (0..42).map(|i| i % 3).collect();
    let test = log_rank(&times, &events, &group, 3).unwrap();
    assert_eq!(test.df, 2.0);
    check("logrank_three", "chi2", test.chi2);
    check("logrank_three", "p", test.p);
    let total = test.observed.iter().sum::<f64>();
    assert!((total - test.expected.iter().sum::<f64>()).abs() < 1e-10);
}

#[test]
fn nothing_to_compare_says_why() {
    let quiet = log_rank(&[1.0, 2.0], &[false, false], &[0, 1], 2);
    assert_eq!(quiet, Err(Undefined::NoEvents));
    let alone = log_rank(&[1.0, 2.0], &[true, true], &[0, 0], 2);
    assert_eq!(alone, Err(Undefined::OneGroup));
    let curve = kaplan_meier(&[3.0, 1.0], &[false, false], 0.95);
    assert_eq!((curve.steps.len(), curve.median), (0, None));
    assert_eq!(curve.censored, [1.0, 3.0]);
}
