//! Against dense matrices (tests/reference/visits.py), against closed forms on complete data, and what is refused.

use super::*;
use crate::special::Rng;
use crate::usual::{Variances, compare_means, repeated_anova};

const REFERENCE: &str = include_str!("../../tests/data/visits.csv");
const TABLES: &str = include_str!("../../tests/data/visits_tables.csv");

fn table(case: &str) -> Panel {
    let rows: Vec<Vec<&str>> =
        TABLES.lines().map(|line| line.split(',').collect::<Vec<_>>()).filter(|cells| cells[0] == case).collect();
    let mut times: Vec<f64> = rows.iter().map(|cells| cells[3].parse().unwrap()).collect();
    times.sort_by(f64::total_cmp);
    times.dedup();
    let mut groups: Vec<&str> = Vec::new();
    let mut subjects: Vec<&str> = Vec::new();
    let mut panel = Panel { group_of_subject: vec![], groups: 0, times: times.clone(), values: vec![] };
    for cells in &rows {
        if !groups.contains(&cells[2]) {
            groups.push(cells[2]);
        }
        if !subjects.contains(&cells[1]) {
            subjects.push(cells[1]);
            panel.group_of_subject.push(groups.iter().position(|g| *g == cells[2]).unwrap());
            panel.values.push(vec![None; times.len()]);
        }
        let subject = subjects.iter().position(|s| *s == cells[1]).unwrap();
        let time: f64 = cells[3].parse().unwrap();
        let visit = times.iter().position(|t| *t == time).unwrap();
        panel.values[subject][visit] = Some(cells[4].parse().unwrap());
    }
    panel.groups = groups.len();
    panel
}

/// Compares every reference value of a case; `tolerance` is relative.
fn check_case(case: &str, tolerance: f64) {
    let fit = fit_visits(&table(case)).unwrap();
    assert_eq!(fit.verdict(), Verdict::Converged, "{case}");
    let mut compared = 0;
    for line in REFERENCE.lines().skip(2) {
        let cells: Vec<&str> = line.split(',').collect();
        if cells[0] != case {
            continue;
        }
        let expected: f64 = cells[2].parse().unwrap();
        let value = quantity(&fit, cells[1]);
        // Far in the tail a p-value moves much more than its t and its degrees of freedom.
        let room = if cells[1].ends_with(".p") { 100.0 * tolerance } else { tolerance };
        let close = (value - expected).abs() <= room * expected.abs();
        assert!(close, "{case} {}: {value} instead of {expected}", cells[1]);
        compared += 1;
    }
    assert!(compared > 40, "{case}: {compared} values");
}

fn quantity(fit: &VisitFit, name: &str) -> f64 {
    let parts: Vec<&str> = name.split('.').collect();
    let index = |k: usize| parts[k].parse::<usize>().unwrap();
    match parts[0] {
        "log_reml" => fit.log_reml(),
        "sigma" => fit.covariance()[index(1)][index(2)],
        "mean" => part_of(fit.mean(index(1), index(2), 0.95).unwrap(), parts[3]),
        "gap" => {
            let gaps = fit.differences(&[(0, index(1))], 0.95);
            part_of(gaps[index(2)].estimate.unwrap(), parts[3])
        }
        test => {
            let test = match test {
                "visits" => fit.visits_test(),
                "groups" => fit.groups_test(),
                _ => fit.groups_by_visits_test(),
            };
            let test = test.unwrap();
            match parts[1] {
                "f" => test.f,
                "df" => test.df,
                "df_error" => test.df_error,
                _ => test.p,
            }
        }
    }
}

fn part_of(estimate: VisitEstimate, part: &str) -> f64 {
    match part {
        "estimate" => estimate.estimate,
        "se" => estimate.se,
        "df" => estimate.df,
        "p" => estimate.p,
        _ => estimate.interval.0,
    }
}

#[test]
fn tables_with_gaps_equal_dense_matrices() {
    check_case("sleep", 1e-7);
    check_case("sitka", 1e-7);
    check_case("diet", 1e-7);
}

/// Invented complete panel: `sizes` subjects per group, rising spread, correlation 0.7 or so.
fn complete(sizes: &[usize], visits: usize, seed: u64) -> Panel {
    let mut rng = Rng::new(seed);
    let mut panel = Panel {
        group_of_subject: vec![],
        groups: sizes.len(),
        times: (0..visits).map(|v| (v * v + v) as f64).collect(),
        values: vec![],
    };
    for (group, &size) in sizes.iter().enumerate() {
        for _ in 0..size {
            let level = 2.0 * rng.normal();
            let value =
                |v: usize, rng: &mut Rng| 50.0 + level + (group * v) as f64 + (1.0 + 0.3 * v as f64) * rng.normal();
            panel.group_of_subject.push(group);
            panel.values.push((0..visits).map(|v| Some(value(v, &mut rng))).collect());
        }
    }
    panel
}

#[track_caller]
fn close(a: f64, b: f64) {
    assert!((a - b).abs() <= 1e-7 * b.abs().max(1e-3), "{a} instead of {b}");
}

#[test]
fn complete_data_give_the_pooled_covariance() {
    let panel = complete(&[9, 6, 12], 5, 3);
    let fit = fit_visits(&panel).unwrap();
    let mean = |g: usize, v: usize| {
        let values = panel.values_at(g, v);
        values.iter().sum::<f64>() / values.len() as f64
    };
    for i in 0..5 {
        for j in 0..5 {
            let mut products = 0.0;
            for (row, &g) in panel.values.iter().zip(&panel.group_of_subject) {
                products += (row[i].unwrap() - mean(g, i)) * (row[j].unwrap() - mean(g, j));
            }
            close(fit.covariance()[i][j], products / 24.0);
        }
        close(fit.mean(1, i, 0.95).unwrap().estimate, mean(1, i));
    }
}

#[test]
fn complete_data_give_two_sample_comparisons_at_each_visit() {
    // One variance over two groups: Student's comparison, N - G degrees of freedom.
    let panel = complete(&[8, 11], 4, 11);
    let fit = fit_visits(&panel).unwrap();
    for gap in fit.differences(&[(0, 1)], 0.9) {
        let (a, b) = (panel.values_at(0, gap.visit), panel.values_at(1, gap.visit));
        let student = compare_means(&a, &b, Variances::Equal, 0.9).unwrap();
        let estimate = gap.estimate.unwrap();
        close(estimate.estimate, student.difference);
        close(estimate.se, student.se);
        close(estimate.df, 17.0);
        close(estimate.p, student.p);
        close(estimate.interval.0, student.interval.0);
        assert!(gap.p_holm.unwrap() >= estimate.p);
    }
}

#[test]
fn complete_data_give_the_repeated_measures_groups_test() {
    let panel = complete(&[9, 6, 12], 5, 3);
    let fit = fit_visits(&panel).unwrap();
    let classical = repeated_anova(&panel).unwrap().groups.unwrap();
    let test = fit.groups_test().unwrap();
    close(test.f, classical.f);
    close(test.df, 2.0);
    close(test.df_error, 24.0);
    close(test.p, classical.p);
}

#[test]
fn complete_data_give_hotelling_on_the_visits() {
    // One group: q F is Hotelling's T squared of the differences, and Fai & Cornelius give N - 1 for error.
    let panel = complete(&[14], 4, 29);
    let fit = fit_visits(&panel).unwrap();
    let steps = DMatrix::from_fn(14, 3, |i, j| panel.values[i][j + 1].unwrap() - panel.values[i][0].unwrap());
    let mean = steps.row_mean().transpose();
    let away = DMatrix::from_fn(14, 3, |i, j| steps[(i, j)] - mean[j]);
    let covariance = away.transpose() * &away / 13.0;
    let t_squared = 14.0 * mean.dot(&covariance.cholesky().unwrap().solve(&mean));
    let test = fit.visits_test().unwrap();
    close(test.f, t_squared / 3.0);
    close(test.df_error, 13.0);
    assert_eq!(fit.groups_test(), Err(VisitTestUndefined::OneGroup));
    assert_eq!(fit.groups_by_visits_test(), Err(VisitTestUndefined::OneGroup));
}

#[test]
fn units_do_not_matter() {
    let panel = table("diet");
    let mut moved = panel.clone();
    moved.values.iter_mut().flatten().for_each(|y| *y = y.map(|y| 1e4 + 0.01 * y));
    let (a, b) = (fit_visits(&panel).unwrap(), fit_visits(&moved).unwrap());
    for (x, y) in a.differences(&[(0, 2)], 0.95).into_iter().zip(b.differences(&[(0, 2)], 0.95)) {
        let (x, y) = (x.estimate.unwrap(), y.estimate.unwrap());
        close(100.0 * y.se, x.se);
        assert!((y.df - x.df).abs() < 1e-4 * x.df);
    }
    let rows = a.rows() - 18;
    assert!((b.log_reml() - a.log_reml() + rows as f64 * libm::log(0.01)).abs() < 1e-5);
}

#[test]
fn an_empty_cell_leaves_the_rest() {
    let mut panel = complete(&[9, 8], 4, 5);
    for (row, &group) in panel.values.iter_mut().zip(&panel.group_of_subject) {
        if group == 1 {
            row[3] = None;
        }
    }
    let fit = fit_visits(&panel).unwrap();
    assert_eq!(fit.mean(1, 3, 0.95), None);
    let gaps = fit.differences(&[(0, 1)], 0.95);
    assert!(gaps[2].estimate.is_some() && gaps[2].p_holm.is_some());
    assert!(gaps[3].estimate.is_none() && gaps[3].p_holm.is_none());
    let empty = VisitTestUndefined::EmptyCell { group: 1, visit: 3 };
    assert_eq!((fit.visits_test(), fit.groups_by_visits_test()), (Err(empty), Err(empty)));
}

#[test]
fn correlations_that_cannot_hold_together_end_at_the_boundary() {
    // Visits are seen two by two: the correlations 1-2 and 2-3 near 1 forbid the observed 1-3 near -1.
    let mut rng = Rng::new(8);
    let mut panel = Panel { group_of_subject: vec![], groups: 1, times: vec![0.0, 1.0, 2.0], values: vec![] };
    for (first, second, sign) in [(0, 1, 1.0), (1, 2, 1.0), (0, 2, -1.0)] {
        for _ in 0..12 {
            let level = rng.normal();
            let mut row = vec![None; 3];
            row[first] = Some(level + 0.3 * rng.normal());
            row[second] = Some(sign * level + 0.3 * rng.normal());
            panel.values.push(row);
            panel.group_of_subject.push(0);
        }
    }
    let fit = fit_visits(&panel).unwrap();
    assert_eq!(fit.verdict(), Verdict::Boundary);
    let sigma = DMatrix::from_fn(3, 3, |i, j| fit.covariance()[i][j]);
    assert!(sigma.symmetric_eigenvalues().min() < 1e-8);
    let mean = fit.mean(0, 0, 0.95).unwrap();
    assert!(mean.se > 0.0 && mean.df > 1.0);
}

#[test]
fn what_cannot_be_estimated_says_why() {
    let panel = complete(&[9, 8], 4, 5);
    let with = |change: &dyn Fn(usize, &mut Vec<Option<f64>>)| {
        let mut changed = panel.clone();
        changed.values.iter_mut().enumerate().for_each(|(k, row)| change(k, row));
        fit_visits(&changed).map(|fit| fit.verdict())
    };
    assert_eq!(with(&|_, row| row[0] = Some(100.0)), Err(VisitsError::NoVariation { visit: 0 }));
    assert_eq!(with(&|_, row| row[1] = Some(f64::NAN)), Err(VisitsError::NotFinite));
    assert_eq!(
        with(&|k, row| row[if k % 2 == 0 { 0 } else { 2 }] = None),
        Err(VisitsError::NeverTogether { first: 0, second: 2 })
    );
    let few = VisitsError::TooFewAtVisit { visit: 2, have: 1, need: 2 };
    assert_eq!(
        with(&|k, row| if k > 0 {
            row[2] = None
        }),
        Err(few)
    );
    // The last visit repeats the first: the likelihood has no limit.
    assert_eq!(with(&|_, row| row[3] = row[0]), Err(VisitsError::Singular));
    let few = VisitsError::TooFewSubjects { have: 3, need: 4 };
    assert_eq!(fit_visits(&complete(&[3, 2], 4, 1)).map(|f| f.verdict()), Err(few));
    let many = VisitsError::TooManyVisits { visits: 13 };
    assert_eq!(fit_visits(&complete(&[20, 20], 13, 1)).map(|f| f.verdict()), Err(many));
    assert_eq!(fit_visits(&complete(&[20, 20], 1, 1)).map(|f| f.verdict()), Err(VisitsError::OneVisit));
}
