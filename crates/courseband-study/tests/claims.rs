//! Sentences claim only what the table can bear.

use courseband_study::{Findings, Plan, run};
use std::fmt::Write;

/// Two groups, `per_group` subjects each; `gap` is what group `b` has more, `last` the last day of group `b`.
fn found(per_group: usize, last: u32, first: u32, gap: impl Fn(f64) -> f64) -> Findings {
    let mut text = String::from("subject,time,group,response\n");
    for s in 0..2 * per_group {
        let b = s % 2 == 1;
        for day in 0..10 {
            if b && !(first..=last).contains(&day) || !b && first > 0 && day >= first {
                continue;
            }
            let t = f64::from(day);
            let wave = f64::from((s as u32 * 7 + day * 5) % 11) * 0.05 + (s / 2) as f64 * 0.1;
            let y = 5.0 + wave + if b { gap(t) } else { 0.0 };
            let _ = writeln!(text, "s{s},{day},{},{y:.4}", if b { "b" } else { "a" });
        }
    }
    run(text.as_bytes(), &Plan::default()).unwrap()
}

#[test]
fn one_subject_a_group_shows_no_gap() {
    let findings = found(1, 9, 0, |_| 3.0);
    let d = &findings.differences[0];
    assert!(d.stretches.is_empty() && d.p_adjusted.is_none());
    assert!(d.grid.lower.iter().chain(&d.grid.se).all(Option::is_none));
    assert!(d.grid.estimate.iter().all(Option::is_some));
    assert!(findings.sentences[0].headline.contains("cannot be compared"));
}

#[test]
fn a_group_that_ends_early_is_said_to() {
    let findings = found(6, 5, 0, |_| 3.0);
    let all: Vec<&str> = findings.sentences.iter().map(|s| s.text.as_str()).collect();
    assert!(all[0].contains("the time that both were followed, time 0.0 to 5.0"), "{all:?}");
    assert!(all[1].contains("b is not measured after time 5"), "{all:?}");
}

#[test]
fn groups_never_followed_together_have_no_gap() {
    let findings = found(4, 9, 6, |_| 3.0);
    let d = &findings.differences[0];
    assert!(d.support.is_none() && d.grid.estimate.iter().all(Option::is_none));
}

#[test]
fn crossing_courses_are_read_on_both_sides() {
    let findings = found(6, 9, 0, |t| 0.6 * (t - 4.5));
    let sentence = &findings.sentences[0];
    assert_eq!(sentence.headline, "b crosses a.");
    assert!(sentence.text.contains(" below a ") && sentence.text.contains(" above a "), "{}", sentence.text);
}
