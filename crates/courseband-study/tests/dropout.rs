//! Who leaves, and what if those who left had gone on otherwise.

use courseband_engine::special::Rng;
use courseband_study::{After, Plan, Sensitivity, Study};
use std::fmt::Write;

/// Low animals of group b leave.
fn table() -> String {
    let mut rng = Rng::new(21);
    let mut text = String::from("animal,arm,day,y\n");
    for s in 0..40 {
        let level = rng.normal();
        let b = s % 2 == 1;
        for day in 0..7 {
            let y = 20.0 + level + if b { 0.6 * f64::from(day) } else { 0.0 } + 0.4 * rng.normal();
            let _ = writeln!(text, "a{s},{},{day},{y:.3}", if b { "b" } else { "a" });
            if b && day >= 2 && rng.uniform() < if level < 0.0 { 0.7 } else { 0.01 } {
                break;
            }
        }
    }
    text
}

fn asked(delta: f64) -> Sensitivity {
    Sensitivity { delta, groups: vec!["b".into()], tables: 20, ..Sensitivity::default() }
}

#[test]
fn leaving_is_counted_and_its_dependence_on_values_is_said() {
    let mut study = Study::open(table().as_bytes()).unwrap();
    let found = study.dropout(&Plan::default()).unwrap();
    assert_eq!(found.groups[0].left, 0);
    assert!(found.groups[1].left >= 5 && found.leavers.len() == found.groups[1].left);
    assert!(found.p.unwrap() < 0.01);
    assert!(found.groups[1].share.windows(2).all(|w| w[1] <= w[0]));
    let text = found.sentences.join(" ");
    assert!(
        text.contains("Leaving differs between the groups") && text.contains("below their group's course"),
        "{text}"
    );
    assert!(found.no_sensitivity.is_none());
}

#[test]
fn a_shift_against_the_gap_takes_the_conclusion_away_in_the_end() {
    let mut study = Study::open(table().as_bytes()).unwrap();
    let plan = Plan::default();
    let main = study.run(&plan).unwrap();
    let at_end = main.differences[0].at_visits.estimate[6].unwrap();
    let se = main.differences[0].at_visits.se[6].unwrap();
    let mut of = |delta| study.sensitivity(&plan, &asked(delta)).unwrap().pairs.remove(0);
    let (none, some, much) = (of(0.0), of(-0.5), of(-6.0));
    assert!((none.estimate[6] - at_end).abs() < 0.5 * se, "{} {at_end}", none.estimate[6]);
    assert!(none.still_apart.len() + 1 >= none.main_apart.len() && !none.main_apart.is_empty());
    assert!(some.estimate[6] < none.estimate[6] - 0.1);
    assert!(much.still_apart.is_empty(), "{:?}", much.still_apart);
    assert!(none.missing_share[6] > none.missing_share[1]);
}

#[test]
fn the_same_seed_gives_the_same_digits_and_bad_requests_say_why() {
    let mut study = Study::open(table().as_bytes()).unwrap();
    let plan = Plan::default();
    let once = study.sensitivity(&plan, &asked(-1.0)).unwrap();
    assert_eq!(once, study.sensitivity(&plan, &asked(-1.0)).unwrap());
    let jump = Sensitivity { after: After::Jump, reference: Some("a".into()), tables: 10, ..Sensitivity::default() };
    let jumped = study.sensitivity(&plan, &jump).unwrap();
    assert!(jumped.pairs[0].estimate[6] < once.pairs[0].estimate[6] + 5.0);
    let nowhere = Sensitivity { groups: vec!["z".into()], ..Sensitivity::default() };
    assert!(study.sensitivity(&plan, &nowhere).unwrap_err().message.contains("\"z\""));
    let no_reference = Sensitivity { after: After::Jump, ..Sensitivity::default() };
    assert!(study.sensitivity(&plan, &no_reference).unwrap_err().message.contains("reference"));
}

/// Removal is told by a column or by hand; those who only miss visits were last seen without it.
#[test]
fn planned_removal_is_told_apart_from_missed_visits() {
    let mut text = String::from("animal,arm,day,y,ended\n");
    for s in 0..12 {
        let arm = ["a", "b"][s % 2];
        for day in 0..6 {
            // b: every second one is removed at day 3; one of a is lost at day 2.
            let removed = arm == "b" && s % 4 == 1 && day == 3;
            let note = if removed { "humane end point" } else { "no" };
            let y = 10.0
                + f64::from(day) * if arm == "b" { 2.0 } else { 1.0 }
                + (s as f64 * 7.0 + f64::from(day) * 3.0) % 5.0 * 0.1;
            let _ = writeln!(text, "x{s},{arm},{day},{y},{note}");
            if removed || s == 0 && day == 2 {
                break;
            }
        }
    }
    let mut study = Study::open(text.as_bytes()).unwrap();
    let plan = |more: &str| {
        Plan::from_json(&format!(r#"{{"columns": {{"removal": "ended"}}, "comparisons": {{"target": 14}}{more}}}"#))
            .unwrap()
    };
    let found = study.dropout(&plan("")).unwrap();
    let removal = found.removal.as_ref().unwrap();
    assert_eq!((removal.groups[0].events, removal.groups[1].events), (0, 3));
    // Six at risk at day 3, three removed; nobody of b is lost.
    assert_eq!((removal.groups[1].time.clone(), removal.groups[1].share.clone()), (vec![3.0], vec![0.5]));
    let told = |name: &str| found.leavers.iter().find(|l| l.subject == name).unwrap().removed.clone();
    assert_eq!((told("x1").as_deref(), told("x0")), (Some("humane end point"), None));
    let level = found.level.as_ref().unwrap();
    assert_eq!(level.groups[1].median, Some(2.0));
    assert!(level.p.unwrap() < 0.01 && level.sentence.contains("Have reached 14"), "{}", level.sentence);
    let by_hand = study.dropout(&plan(r#", "removed": ["x0"]"#)).unwrap();
    assert_eq!(by_hand.removal.unwrap().groups[0].events, 1);
    let unknown = study.dropout(&plan(r#", "removed": ["x99"]"#)).unwrap_err();
    assert!(unknown.message.contains("x99"));
}
