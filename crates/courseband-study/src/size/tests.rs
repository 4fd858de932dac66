//! Power against closed forms, reproducibility, refusals.

use super::*;
use courseband_engine::special::{normal_sf, t_quantile};

fn request(days: usize, gap: f64, alike: f64) -> SizeRequest {
    let last = (days - 1) as f64;
    SizeRequest {
        days: (0..days).map(|d| d as f64).collect(),
        control: CourseMeans { name: "control".into(), means: vec![[0.0, 5.0], [last, 5.0]] },
        treated: CourseMeans { name: "treated".into(), means: vec![[0.0, 5.0 + gap], [last, 5.0 + gap]] },
        spread: SizeSpread { on_a_day: 1.0, alike, ..SizeSpread::default() },
        ..SizeRequest::default()
    }
}

/// Source: power of a two-sample comparison of one visit out of three under compound symmetry. The model
/// has a mean for each day, so the gap on a day has variance 2 sd^2 / n (Diggle, Heagerty, Liang & Zeger 2002,
/// sec. 2.4, with one visit); normal approximation to the noncentral t, good to a percent at n = 20.
#[test]
fn landmark_power_agrees_with_the_closed_form() {
    let mut asked = request(3, 0.9, 0.5);
    asked.goal = Goal { find: GoalKind::Landmark, day: Some(1.0), ..Goal::default() };
    let n = 20.0;
    let counts = asked.simulate([20, 20], 0, 600);
    let expected = normal_sf(t_quantile(0.975, 2.0 * n - 2.0) - 0.9 / (2.0_f64 / n).sqrt());
    let got = counts.met as f64 / counts.studies as f64;
    assert!((got - expected).abs() < 3.5 * (expected * (1.0 - expected) / 600.0).sqrt() + 0.01, "{got} {expected}");
    assert_eq!(counts.failed, 0);
}

#[test]
fn no_gap_is_found_as_often_as_the_level_says() {
    let asked = request(5, 0.0, 0.5);
    let counts = asked.simulate([8, 8], 0, 400);
    // In the assumed direction only: half of 5 %.
    assert!(counts.met <= 24, "{counts:?}");
}

#[test]
fn work_can_be_split() {
    let asked = request(5, 1.0, 0.3);
    let whole = asked.simulate([6, 6], 0, 30);
    let mut parts = asked.simulate([6, 6], 12, 18);
    parts.add(asked.simulate([6, 6], 0, 12));
    assert_eq!(whole, parts);
}

#[test]
fn the_answer_is_the_smallest_design_that_reaches_the_target() {
    let mut asked = request(5, 1.0, 0.3);
    asked.designs = vec![[12, 12], [8, 8], [5, 5]];
    asked.losses = 0.1;
    let counts = |met| Counts { studies: 100, met, failed: 0 };
    let found = asked.answer(&[counts(95), counts(83), counts(60)]);
    assert_eq!(found.smallest, Some(1));
    assert_eq!(found.sentence, "8 per group, 16 in all, 2 more for expected losses: power 83 % (74 to 89).");
    assert!(found.paragraph.contains("8 per group") && found.paragraph.contains("seed 20260"));
    assert!(asked.answer(&[counts(5); 3]).sentence.starts_with("None of these designs reaches 80 %."));
}

#[test]
fn impossible_requests_are_refused_with_what_to_do() {
    let bad = |change: &dyn Fn(&mut SizeRequest)| {
        let mut asked = request(5, 1.0, 0.3);
        change(&mut asked);
        asked.check().unwrap_err().message
    };
    assert!(bad(&|r| r.days = vec![3.0, 1.0]).contains("ascending"));
    assert!(bad(&|r| r.spread.on_a_day = 0.0).contains("above zero"));
    assert!(bad(&|r| r.treated.means.clear()).contains("treated"));
    assert!(bad(&|r| r.goal.find = GoalKind::Landmark).contains("landmark"));
    assert!(SizeRequest::from_json("{\"dayz\": []}").unwrap_err().message.contains("dayz"));
}

/// An onset is placed more sharply by more subjects, and not at all without a gap.
#[test]
fn an_onset_is_placed_more_sharply_by_more_subjects() {
    let mut asked = request(8, 0.0, 0.3);
    asked.treated.means = vec![[0.0, 5.0], [2.0, 5.0], [7.0, 9.0]];
    asked.goal = Goal { find: GoalKind::Onset, margin: 0.5, width: 3.0, ..Goal::default() };
    asked.check().unwrap();
    let met = |n: usize| asked.simulate([n, n], 0, 60).met;
    let (few, many) = (met(6), met(40));
    assert!(many > few + 15, "{few} {many}");
    asked.effect = 0.0;
    assert!(asked.simulate([10, 10], 0, 40).met <= 2);
    asked.goal.width = 0.0;
    assert!(asked.check().unwrap_err().message.contains("above zero"));
}

/// Cages of four with one treatment each: power falls about as the design effect 1 + 3 rho of a mean says.
#[test]
fn clusters_cost_power() {
    let mut asked = request(3, 1.0, 0.6);
    asked.goal = Goal { find: GoalKind::Average, ..Goal::default() };
    let alone = asked.simulate([16, 16], 0, 150).met;
    asked.cluster_size = 4;
    asked.spread.cluster_alike = 0.3;
    asked.designs = vec![[16, 16]];
    asked.check().unwrap();
    let housed = asked.simulate([16, 16], 0, 150).met;
    assert!(housed + 25 < alone, "{alone} {housed}");
    asked.designs = vec![[6, 6]];
    assert!(asked.check().unwrap_err().message.contains("two clusters"));
}
