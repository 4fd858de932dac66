//! Checks against the values of tests/reference/usual.py, which names data, publications and library versions.

mod anova;
mod means;
mod pooling;
mod survival;

use super::Panel;

const REFERENCE: &str = include_str!("../../../tests/data/usual.csv");

/// The reference value of one quantity of one case, if it has one.
fn find(case: &str, quantity: &str) -> Option<f64> {
    REFERENCE.lines().skip(2).find_map(|line| {
        let mut cells = line.split(',');
        let found = cells.next() == Some(case) && cells.next() == Some(quantity);
        found.then(|| cells.next().and_then(|v| v.parse().ok()).expect("a number"))
    })
}

/// Asserts a value to a relative error of 1e-9.
#[track_caller]
fn check(case: &str, quantity: &str, value: f64) {
    let expected = find(case, quantity).unwrap_or_else(|| panic!("no reference for {case} {quantity}"));
    let close = (value - expected).abs() <= 1e-9 * expected.abs().max(1e-12);
    assert!(close, "{case} {quantity}: {value} instead of {expected}");
}

/// The invented panel: 3 groups of 9, 6 and 12 subjects, six uneven days, some values missing.
fn invented() -> Panel {
    let mut panel = Panel { group_of_subject: vec![], groups: 3, times: vec![], values: vec![] };
    for line in include_str!("../../../tests/data/invented_panel.csv").lines().skip(1) {
        let cells: Vec<&str> = line.split(',').collect();
        let (subject, time): (usize, f64) = (cells[0].parse().unwrap(), cells[2].parse().unwrap());
        if subject == panel.values.len() {
            panel.values.push(Vec::new());
            panel.group_of_subject.push(cells[1].parse().unwrap());
        }
        if subject == 0 {
            panel.times.push(time);
        }
        panel.values[subject].push(cells[3].parse().ok());
    }
    panel
}
