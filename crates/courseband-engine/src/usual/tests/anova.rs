//! Checks of the usual analyses: anova against values from outside.

use super::super::*;
use super::{check, find, invented};

/// Rows of numbers after the first `labels` columns, with those labels joined.
fn table(text: &str, labels: usize) -> Vec<(String, Vec<f64>)> {
    let row = |line: &str| {
        let cells: Vec<&str> = line.split(',').collect();
        let numbers = cells[labels..].iter().map(|c| c.parse().unwrap()).collect();
        (cells[1..labels].join(""), numbers)
    };
    text.lines().skip(1).map(row).collect()
}

/// A complete panel; groups are the distinct labels in order of appearance.
fn panel(rows: Vec<(String, Vec<f64>)>) -> Panel {
    let mut names: Vec<String> = Vec::new();
    let mut group_of_subject = Vec::new();
    for (label, _) in &rows {
        if !names.contains(label) {
            names.push(label.clone());
        }
        group_of_subject.push(names.iter().position(|n| n == label).unwrap());
    }
    let times = (0..rows[0].1.len()).map(|t| t as f64).collect();
    let values = rows.into_iter().map(|(_, y)| y.into_iter().map(Some).collect()).collect();
    Panel { group_of_subject, groups: names.len(), times, values }
}

/// O'Brien & Kaiser 1985: phases are runs of five columns, hours are columns within them.
fn obrien_kaiser(cells: bool, of_row: impl Fn(&[f64]) -> Vec<f64>) -> Panel {
    let rows = table(include_str!("../../../tests/data/obrienkaiser.csv"), 3);
    panel(
        rows.into_iter()
            .map(|(label, y)| {
                // The last letter of the label is the gender.
                let group = if cells { label.clone() } else { label[..label.len() - 1].to_owned() };
                (group, of_row(&y))
            })
            .collect(),
    )
}

fn mean_over_hours(y: &[f64]) -> Vec<f64> {
    y.chunks(5).map(|phase| phase.iter().sum::<f64>() / 5.0).collect()
}

fn mean_over_phases(y: &[f64]) -> Vec<f64> {
    (0..5).map(|hour| (y[hour] + y[hour + 5] + y[hour + 10]) / 3.0).collect()
}

fn check_within(case: &str, name: &str, test: &WithinTest) {
    let effect = &test.effect;
    for (part, value) in [
        ("ss", effect.ss),
        ("ss_error", effect.ss_error),
        ("df", effect.df),
        ("df_error", effect.df_error),
        ("f", effect.f),
        ("p", effect.p),
        ("p_gg", test.p_greenhouse_geisser),
        ("p_hf", test.p_huynh_feldt),
    ] {
        check(case, &format!("{name}.{part}"), value);
    }
}

fn check_case(case: &str, panel: &Panel) -> RepeatedAnova {
    let result = repeated_anova(panel).expect(case);
    check(case, "complete", result.complete as f64);
    check_within(case, "times", &result.times.unwrap());
    if let Some(weighted) = &result.times_weighted {
        check_within(case, "times_weighted", &weighted.unwrap());
    }
    let sphericity = result.sphericity.unwrap();
    check(case, "gg", sphericity.greenhouse_geisser);
    check(case, "hf", sphericity.huynh_feldt.unwrap_or(f64::INFINITY));
    match sphericity.mauchly {
        Ok(mauchly) => {
            check(case, "mauchly_w", mauchly.w);
            check(case, "mauchly_p", mauchly.p);
        }
        Err(_) => assert_eq!(find(case, "mauchly_w"), None, "{case}"),
    }
    if panel.groups > 1 {
        check_within(case, "interaction", &result.groups_by_times.unwrap());
        let groups = result.groups.unwrap();
        check(case, "groups.f", groups.f);
        check(case, "groups.p", groups.p);
        check(case, "groups.ss_error", groups.ss_error);
    }
    result
}

#[test]
fn obrien_kaiser_on_six_cells() {
    // With the treatment x gender cells as groups, the type III tests of phase and hour and their epsilons are those
    // of the full published analysis (sums of squares differ by the factor of averaging, 5 and 3).
    let by_phase = check_case("cells_by_phase", &obrien_kaiser(true, mean_over_hours));
    let by_hour = check_case("cells_by_hour", &obrien_kaiser(true, mean_over_phases));
    // Epsilons of these data as printed in Fox, Friendly & Weisberg 2013, R Journal 5:39 (from memory, four digits).
    for (result, gg, hf) in [(by_phase, 0.7995, 0.9279), (by_hour, 0.4603, 0.5593)] {
        let sphericity = result.sphericity.unwrap();
        assert!((sphericity.greenhouse_geisser - gg).abs() < 5e-5);
        assert!((sphericity.huynh_feldt.unwrap() - hf).abs() < 5e-5);
    }
}

#[test]
fn obrien_kaiser_on_three_unequal_treatments() {
    check_case("treatment_by_phase", &obrien_kaiser(false, mean_over_hours));
    check_case("treatment_by_hour", &obrien_kaiser(false, mean_over_phases));
    // 14 contrasts on 13 degrees of freedom: epsilons exist, Mauchly's W does not.
    let all = check_case("treatment_by_condition", &obrien_kaiser(false, <[f64]>::to_vec));
    let mauchly = all.sphericity.unwrap().mauchly;
    assert_eq!(mauchly, Err(Undefined::TooFewSubjects { have: 13, need: 14 }));
}

#[test]
fn one_group_of_reaction_times() {
    let rows = table(include_str!("../../../tests/data/reacttime.csv"), 1);
    let result = check_case("reaction_conditions", &panel(rows));
    assert_eq!(result.groups, Err(Undefined::OneGroup));
    assert_eq!(result.groups_by_times, Err(Undefined::OneGroup));
    assert_eq!(result.times_weighted, None);
}

#[test]
fn incomplete_subjects_are_dropped_and_counted() {
    let panel = invented();
    let result = check_case("invented", &panel);
    let incomplete = panel.values.iter().filter(|row| row.contains(&None)).count();
    assert!(incomplete > 0);
    assert_eq!((result.complete + result.dropped, result.dropped), (27, incomplete));
    assert_eq!(result.complete_by_group.iter().sum::<usize>(), result.complete);
}

#[test]
fn two_times_give_the_paired_comparison() {
    // Student 1908, Biometrika 6:1, hours of sleep gained (Cushny & Peebles 1905): paired t = 4.0621 on 9 degrees of
    // freedom, p = 0.002833 (from memory, reproduced).
    let first = [0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0];
    let second = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4];
    let rows = first.iter().zip(second).map(|(a, b)| (String::new(), vec![*a, b])).collect();
    let result = repeated_anova(&panel(rows)).unwrap();
    let times = result.times.unwrap();
    assert!((times.effect.f.sqrt() - 4.0621).abs() < 5e-5);
    assert!((times.effect.p - 0.002833).abs() < 5e-7);
    let sphericity = result.sphericity.unwrap();
    assert_eq!(sphericity.mauchly, Err(Undefined::TwoTimes));
    assert!((sphericity.greenhouse_geisser - 1.0).abs() < 1e-12);
    assert!((times.p_huynh_feldt - times.effect.p).abs() < 1e-12);
}

#[test]
fn what_cannot_be_computed_says_why() {
    let whole = invented();
    let mut none_complete = whole.clone();
    none_complete.values.iter_mut().for_each(|row| row[2] = None);
    assert_eq!(repeated_anova(&none_complete), Err(Undefined::NoCompleteSubject));
    let mut short = whole.clone();
    short.times.truncate(1);
    assert_eq!(repeated_anova(&short), Err(Undefined::OneTime));
    let mut flat = whole.clone();
    flat.values.iter_mut().for_each(|row| row.iter_mut().for_each(|y| *y = Some(0.1)));
    let result = repeated_anova(&flat).unwrap();
    assert_eq!(result.groups, Err(Undefined::NoVariation));
    assert_eq!(result.groups_by_times, Err(Undefined::NoVariation));
    assert_eq!(result.sphericity, Err(Undefined::NoVariation));
    let alone = Panel { group_of_subject: vec![0, 1], values: flat.values[..2].to_vec(), ..flat };
    assert_eq!(repeated_anova(&alone), Err(Undefined::TooFewSubjects { have: 0, need: 1 }));
}
