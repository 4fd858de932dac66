//! Descriptions are compared as text with `tests/cases`; `UPDATE_EXPECT=1` rewrites those.

use super::*;
use crate::figure::{LaneState, StripKind};
use crate::fixture::{gap_rows, source, traces};
use crate::source::Run;
use crate::testing::check;

fn described(change: impl FnOnce(&mut Source, &mut View)) -> Figure {
    let (mut source, mut view) = (source(3), View::default());
    change(&mut source, &mut view);
    describe(&source, &traces(&source, 4), &view)
}

#[test]
fn three_groups_on_a_ratio_scale() {
    check("ratio", &dump(&described(|_, _| {})));
}

#[test]
fn a_plain_scale_without_margin() {
    let figure = described(|source, _| {
        source.scale.ratio = false;
        source.plan.comparisons.margin = 0.0;
        source.differences.iter_mut().for_each(|d| d.margin = [0.0, 0.0]);
    });
    check("plain", &dump(&figure));
}

/// Everything but the points of curves, rounded.
fn dump(figure: &Figure) -> String {
    let mut text = format!("time {} to {} {}: ", figure.time.start, figure.time.end, figure.time.word);
    text += &figure.time.ticks.iter().map(|t| t.label.clone()).collect::<Vec<_>>().join(" ");
    for strip in &figure.strips {
        let subject: Vec<&str> = strip.subject.iter().map(|w| w.text.as_str()).collect();
        text += &format!(
            "\n\n{} {:?}: {} | {} | {}",
            strip.kind.word(),
            strip.pair,
            strip.title,
            subject.join(", "),
            strip.caption
        );
        if let Some(plot) = &strip.plot {
            let labels: Vec<&str> = plot.ticks.iter().map(|t| t.label.as_str()).collect();
            text += &format!(
                "\n  {:?} {:.3} to {:.3}: {}",
                plot.scale.kind(),
                plot.scale.low(),
                plot.scale.high(),
                labels.join(" ")
            );
            plot.rules.iter().for_each(|r| text += &format!("\n  rule {:?} at {:.3}", r.kind, r.value));
            plot.marks.iter().for_each(|m| text += &format!("\n  {}", mark(m)));
            plot.ends.iter().for_each(|e| text += &format!("\n  end {:?} at {:.2}, {:.3}", e.lines, e.time, e.value));
        }
        if let Some(lane) = &strip.lane {
            for s in &lane.segments {
                text += &format!("\n  lane {:.2} to {:.2} {:?} {:?} \"{}\"", s.start, s.end, s.state, s.up, s.label);
            }
        }
    }
    text + "\n"
}

fn mark(mark: &Mark) -> String {
    match mark {
        Mark::Trace { tone, points, .. } => format!("trace {tone:?} of {}", points.len()),
        Mark::Over { tone, points } => format!("over {tone:?} of {}", points.len()),
        Mark::Range { tone, points } => format!("range {tone:?} of {}", points.len()),
        Mark::Band { tone, points, .. } => format!("band {tone:?} of {}", points.len()),
        Mark::Hatch { tone, points } => format!("hatch {tone:?} from {:.2}", points[0].0),
        Mark::Curve { tone, dash, points, .. } => format!("curve {tone:?} {dash:?} of {}", points.len()),
        Mark::Dots { tone, points, .. } => format!("dots {tone:?} of {}", points.len()),
        Mark::Steps { tone, dash, points } => format!("steps {tone:?} {dash:?} {points:?}"),
    }
}

fn states(figure: &Figure, pair: usize) -> Vec<(f64, f64, LaneState, String)> {
    let strip = figure.strips.iter().find(|s| s.pair == Some(pair)).expect("a strip of the pair");
    let lane = strip.lane.as_ref().expect("a lane");
    lane.segments.iter().map(|s| (s.start, s.end, s.state, s.label.clone())).collect()
}

#[test]
fn the_lane_covers_all_time_without_holes() {
    let run = |start, end| Run { start, end, direction: Some(crate::source::Direction::Below) };
    let figure = described(|source, _| {
        let gap = &mut source.differences[0];
        gap.support = Some([2.0, 18.0]);
        gap.stretches = vec![run(4.0, 12.0), run(16.0, 18.0)];
        gap.beyond = vec![run(5.0, 8.0)];
        gap.inside = vec![Run { start: 13.0, end: 15.0, direction: None }];
    });
    let lane = states(&figure, 0);
    let kinds: Vec<LaneState> = lane.iter().map(|s| s.2).collect();
    use LaneState::*;
    assert_eq!(kinds, [NotCompared, Undecided, Apart, Beyond, Apart, Undecided, Inside, Undecided, Apart, NotCompared]);
    assert_eq!((lane[0].0, lane[lane.len() - 1].1), (figure.time.start, figure.time.end));
    assert!(lane.windows(2).all(|w| w[0].1 == w[1].0), "{lane:?}");
    assert_eq!(lane[2].3, "apart from day 4.0");
    assert_eq!(lane[3].3, "beyond 10\u{a0}% from day 5.0 to 8.0");
    assert_eq!(lane[8].3, "apart from day 16.0 to the last visit");
}

#[test]
fn where_one_group_has_ended_the_lane_names_the_other_and_its_count_stands_there() {
    let figure = described(|source, _| {
        source.differences[0].support = Some([0.0, 11.0]);
        source.differences[0].stretches.clear();
        source.differences[0].beyond.clear();
        source.differences[0].inside.clear();
        source.curves[1].support = [0.0, 11.0];
        source.groups[1].last_times = vec![9.0, 9.0, 11.0, 11.0, 11.0, 11.0, 11.0, 11.0];
    });
    let lane = states(&figure, 0);
    let last = lane.last().expect("a segment");
    assert_eq!((last.0, last.1, last.2), (11.0, 21.0, LaneState::OnlyOne));
    assert_eq!(last.3, "only Saline followed");
    let followed = figure.strips.iter().find(|s| s.kind == StripKind::Followed).expect("followed");
    let layout = crate::layout::lay_out(&figure, &crate::text::Estimate);
    let placed = &layout.strips[layout.strips.len() - 1];
    assert_eq!(followed.plot.as_ref().map(|plot| plot.ends[1].lines[0].clone()), Some("6".to_string()));
    let count = placed.ends.iter().flat_map(|end| &end.lines).find(|text| text.text == "6").expect("a count");
    assert!((count.x - layout.x.at(11.0)).abs() < 12.0, "{} {}", count.x, layout.x.at(11.0));
}

#[test]
fn groups_that_never_meet_have_a_lane_that_says_so() {
    let figure = described(|source, _| source.differences[0].support = None);
    assert_eq!(states(&figure, 0).iter().map(|s| s.2).collect::<Vec<_>>(), [LaneState::NotCompared]);
}

#[test]
fn many_pairs_are_rows_until_they_are_opened() {
    let mut view = View { open_pairs: vec![5, 0, 9, 12, 99], ..View::default() };
    let source = source(6);
    assert_eq!(source.differences.len(), 15);
    let kinds = |view: &View| -> Vec<StripKind> {
        describe(&source, &Traces::default(), view).strips.iter().map(|s| s.kind).collect()
    };
    let open: Vec<usize> =
        kinds(&view)[1..16].iter().enumerate().filter(|(_, k)| **k == StripKind::Gap).map(|(p, _)| p).collect();
    assert_eq!(open, [0, 5, 9], "at most three, whatever is asked");
    view.open_pairs.clear();
    assert!(kinds(&view)[1..16].iter().all(|k| *k == StripKind::Row));
}

#[test]
fn all_gap_strips_have_one_scale() {
    let figure = described(|source, _| gap_rows(&mut source.differences[1], 0.5));
    let scales: Vec<_> = figure
        .strips
        .iter()
        .filter(|s| s.kind == StripKind::Gap)
        .filter_map(|s| s.plot.as_ref())
        .map(|p| p.scale)
        .collect();
    assert_eq!(scales.len(), 3);
    assert!(scales.windows(2).all(|w| w[0] == w[1]));
}

#[test]
fn a_band_that_runs_away_does_not_flatten_the_rest() {
    let figure = described(|source, _| {
        let gap = &mut source.differences[0];
        let last = gap.time.len() - 1;
        gap.response_lower[last] = Some(1e-9);
        gap.response_upper[last] = Some(1e9);
    });
    let plot = figure.strips[1].plot.as_ref().expect("a gap strip");
    assert!(plot.scale.high() < 20.0 && plot.scale.low() > 0.05, "{:?}", plot.scale);
}

#[test]
fn over_sixty_traces_become_ranges() {
    let source = source(2);
    let marks = |subjects: usize, view: &View| {
        describe(&source, &traces(&source, subjects), view).strips[0].plot.clone().map(|p| p.marks).unwrap_or_default()
    };
    let count = |marks: &[Mark]| {
        (
            marks.iter().filter(|m| matches!(m, Mark::Trace { .. })).count(),
            marks.iter().filter(|m| matches!(m, Mark::Range { .. })).count(),
        )
    };
    assert_eq!(count(&marks(30, &View::default())), (60, 0));
    assert_eq!(count(&marks(31, &View::default())), (0, 2));
    assert_eq!(count(&marks(31, &View { focus: Some(1), ..View::default() })), (31, 2));
    assert_eq!(count(&marks(31, &View { pointed: Some(3), ..View::default() })), (1, 2));
}

#[test]
fn few_left_is_hatched_from_the_visit_on() {
    let figure = described(|source, _| source.groups[1].last_times = vec![7.0, 7.0, 7.0, 14.0, 14.0, 21.0, 21.0, 21.0]);
    let starts = |strip: usize| -> Vec<f64> {
        let plot = figure.strips[strip].plot.as_ref().expect("a plot");
        plot.marks
            .iter()
            .filter_map(|m| if let Mark::Hatch { points, .. } = m { Some(points[0].0) } else { None })
            .collect()
    };
    // Eight, five after day 7, three after day 14.
    assert_eq!(starts(0), [14.0]);
    assert_eq!(starts(1), [14.0], "the pair with that group");
    assert_eq!(starts(2), [] as [f64; 0], "the pair without it");
}

#[test]
fn followed_counts_subjects_with_a_visit_on_or_after_each_day() {
    let figure = described(|source, _| source.groups[0].last_times = vec![7.0, 7.0, 14.0, 21.0, 21.0]);
    let plot = figure.strips.last().and_then(|s| s.plot.as_ref()).expect("followed");
    let Mark::Steps { points, .. } = &plot.marks[0] else { panic!("steps") };
    assert_eq!(points, &[(0.0, 5.0), (7.0, 3.0), (14.0, 2.0), (21.0, 2.0)]);
}

#[test]
fn dense_traces_are_thinned_to_the_pixels() {
    let dense: Vec<(f64, f64)> =
        (0..100_000).map(|k| (f64::from(k) / 1e3, if k == 51_234 { 9.0 } else { 0.0 })).collect();
    let kept = points::thinned(dense.clone(), 0.1);
    assert!(kept.len() <= 4 * 1001, "{}", kept.len());
    assert!(kept.contains(&(51.234, 9.0)), "a peak stays");
    assert_eq!(points::thinned(dense.clone(), 0.0).len(), dense.len());
}

#[test]
fn nothing_to_show_is_no_fault() {
    let figure = describe(&Source::default(), &Traces::default(), &View::default());
    assert_eq!(figure.strips.len(), 1);
    assert!(figure.time.end > figure.time.start);
}

#[test]
fn findings_that_do_not_fit_together_are_no_fault() {
    let mut source = source(3);
    source.groups.truncate(1);
    let figure = describe(&source, &traces(&source, 2), &View::default());
    assert_eq!(figure.strips.iter().map(|s| s.kind).collect::<Vec<_>>(), [StripKind::Followed]);
}

#[test]
fn many_bands_and_traces_weaken() {
    let of = |groups: usize, subjects: usize| {
        let source = source(groups);
        describe(&source, &traces(&source, subjects), &View { focus: Some(0), ..View::default() }).strength
    };
    assert_eq!(of(3, 10), Strength { bands: 1.0, traces: 1.0 });
    assert_eq!(of(6, 5).bands, 0.5);
    assert!(of(2, 160).traces < 0.51);
}

#[test]
fn letters_go_on_after_z() {
    assert_eq!([0, 25, 26, 51, 52].map(letter), ["A", "Z", "AA", "AZ", "BA"]);
}
