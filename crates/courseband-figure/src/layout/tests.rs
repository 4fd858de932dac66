//! Places: what must not overlap does not, at every width.

use super::*;
use crate::build::describe;
use crate::fixture::{source, traces};
use crate::source::Source;
use crate::text::Estimate;
use crate::view::View;

fn laid(source: &Source, view: &View) -> Layout {
    lay_out(&describe(source, &traces(source, 3), view), &Estimate)
}

/// Left, right, top and bottom of a text.
fn frame(text: &Text) -> Rect {
    let width = Estimate.width(&text.text, text.size, text.bold);
    let left = match text.anchor {
        Anchor::Start => text.x,
        Anchor::Middle => text.x - 0.5 * width,
        Anchor::End => text.x - width,
    };
    Rect { left, right: left + width, top: text.y - 0.5 * text.size, bottom: text.y + 0.5 * text.size }
}

fn all_texts(layout: &Layout) -> Vec<&Text> {
    let strips = layout.strips.iter().flat_map(|s| s.texts.iter().chain(s.ends.iter().flat_map(|e| &e.lines)));
    strips.chain(layout.ticks.iter().map(|t| &t.1)).chain([&layout.word]).collect()
}

fn assert_clear(layout: &Layout, what: &str) {
    let texts = all_texts(layout);
    for (k, a) in texts.iter().enumerate() {
        let p = frame(a);
        assert!(p.left >= -0.5 && p.right <= layout.width + 0.5, "{what}: \"{}\" is cut off: {p:?}", a.text);
        assert!(p.top >= -0.5 && p.bottom <= layout.height + 0.5, "{what}: \"{}\" is cut off: {p:?}", a.text);
        for b in &texts[k + 1..] {
            let q = frame(b);
            let apart = p.right <= q.left + 0.1
                || q.right <= p.left + 0.1
                || p.bottom <= q.top + 0.1
                || q.bottom <= p.top + 0.1;
            assert!(apart, "{what}: \"{}\" {p:?} and \"{}\" {q:?}", a.text, b.text);
        }
    }
}

#[test]
fn no_texts_overlap_or_leave_the_figure_at_any_width() {
    for groups in [1, 2, 3, 4, 6] {
        for width in (360..=1800).step_by(60) {
            for font in [12.0, 18.0] {
                let open_pairs = if groups > 3 { vec![1, 2, 5] } else { Vec::new() };
                let view = View { width: f64::from(width), font, open_pairs, ..View::default() };
                assert_clear(&laid(&source(groups), &view), &format!("{groups} groups, {width} px, text {font}"));
            }
        }
    }
}

#[test]
fn curves_that_end_together_have_labels_apart() {
    let mut source = source(6);
    let first = source.curves[0].clone();
    source.curves.iter_mut().for_each(|c| *c = first.clone());
    for width in [360.0, 700.0, 1800.0] {
        assert_clear(&laid(&source, &View { width, ..View::default() }), "curves that end together");
    }
}

#[test]
fn many_short_stretches_keep_their_labels_apart() {
    let mut source = source(3);
    for gap in &mut source.differences {
        let run = gap.stretches[0];
        gap.stretches = (0..7)
            .map(|k| crate::source::Run { start: 3.0 * f64::from(k), end: 3.0 * f64::from(k) + 1.5, ..run })
            .collect();
        gap.beyond = vec![];
    }
    for width in [360.0, 860.0] {
        assert_clear(&laid(&source, &View { width, ..View::default() }), "many stretches");
    }
}

#[test]
fn visits_close_together_lose_labels_not_room() {
    let mut source = source(2);
    source.visits = vec![0.0, 0.2, 0.4, 0.6, 10.0, 20.8, 21.0];
    let layout = laid(&source, &View { width: 400.0, ..View::default() });
    let labels: Vec<&str> = layout.ticks.iter().map(|t| t.1.text.as_str()).collect();
    assert_eq!(labels, ["0", "10", "21"]);
    assert_clear(&layout, "close visits");
}

#[test]
fn strips_stand_under_each_other() {
    let layout = laid(&source(6), &View { head_room: 24.0, margin: 10.0, ..View::default() });
    assert_eq!(layout.strips[0].outer.top, 34.0);
    assert!(layout.strips.windows(2).all(|w| w[0].outer.bottom < w[1].outer.top));
    assert!(layout.strips.last().is_some_and(|s| s.outer.bottom < layout.height));
    assert_eq!(layout.x.at(layout.x.start), layout.x.left);
    assert_eq!(layout.x.at(layout.x.end), layout.x.right);
    for strip in &layout.strips {
        if let (Some(plot), Some(scale)) = (strip.plot, strip.scale) {
            assert_eq!(StripBox::y(plot, scale, scale.low()), plot.bottom);
            assert!((StripBox::y(plot, scale, scale.high()) - plot.top).abs() < 1e-9);
        }
    }
}
