//! A lane with its labels. Labels stand at their stretch's start; those that
//! would collide go to further lines.

use super::{Anchor, Arrow, Rect, Setter, Text};
use crate::figure::{Lane, LaneState, Segment, Tone};

/// A lane that has its place.
pub(super) struct PlacedLane {
    pub(super) lane: Rect,
    pub(super) texts: Vec<Text>,
    pub(super) arrows: Vec<Arrow>,
    pub(super) bottom: f64,
}

/// More lines of labels than this are not set.
const MOST_LINES: usize = 4;

/// Places a lane below `top`. Under a plot its labels stand below it; in a row they stand above it,
/// on the line of the name, which ends at `name_end`.
pub(super) fn place_lane(setter: &Setter<'_>, lane: &Lane, top: f64, name_end: Option<f64>) -> PlacedLane {
    let em = setter.em;
    let line = 1.3 * em;
    // A sliver without a comparison needs no words.
    let is_sliver = |s: &Segment| {
        matches!(s.state, LaneState::OnlyOne | LaneState::NotCompared)
            && setter.x.at(s.end) - setter.x.at(s.start) < 2.0 * em
    };
    let chosen: Vec<&Segment> = match name_end {
        None => lane.segments.iter().filter(|s| !is_sliver(s)).collect(),
        Some(_) => loudest(&lane.segments),
    };
    let widths: Vec<f64> = chosen.iter().map(|s| label_width(setter, s)).collect();
    let wishes: Vec<(f64, f64)> = chosen.iter().zip(widths).map(|(s, w)| (setter.x.at(s.start), w)).collect();
    let undecided: Vec<bool> = chosen.iter().map(|s| is_quiet(s)).collect();
    let places = lines(&wishes, &undecided, name_end, [setter.x.left, setter.right], em);
    let used = places.iter().flatten().map(|p| p.0 + 1).max().unwrap_or(0);
    let (lane_top, first_line) = match name_end {
        None => (top + 0.75 * em, top + 1.75 * em + 0.3 * em),
        Some(_) => (top + used.saturating_sub(1) as f64 * line + 0.15 * em, top - line),
    };
    let rect = Rect { left: setter.x.left, right: setter.x.right, top: lane_top, bottom: lane_top + em };
    let mut placed = PlacedLane { lane: rect, texts: Vec::new(), arrows: Vec::new(), bottom: rect.bottom };
    for (segment, place) in chosen.iter().zip(places) {
        if let Some((row, x)) = place {
            placed.label(setter, lane.tone, segment, x, first_line + (row as f64 + 0.5) * line);
        }
    }
    if name_end.is_none() {
        placed.bottom = rect.bottom + 0.3 * em + used as f64 * line;
    }
    placed
}

impl PlacedLane {
    fn label(&mut self, setter: &Setter<'_>, tone: Tone, segment: &Segment, x: f64, y: f64) {
        let quiet = is_quiet(segment);
        let tone = if quiet { Tone::Soft } else { tone };
        let mut text_x = x;
        if let Some(up) = segment.up {
            self.arrows.push(Arrow { x, y, size: 0.6 * setter.em, up, tone });
            text_x += 0.9 * setter.em;
        }
        let text = segment.label.clone();
        self.texts.push(Text { x: text_x, y, text, size: setter.small, bold: !quiet, tone, anchor: Anchor::Start });
    }
}

fn is_quiet(segment: &Segment) -> bool {
    matches!(segment.state, LaneState::Undecided | LaneState::OnlyOne | LaneState::NotCompared)
}

/// The stretches worth a label in a row: all that say something, else the longest undecided one.
fn loudest(segments: &[Segment]) -> Vec<&Segment> {
    let loud: Vec<&Segment> = segments.iter().filter(|s| !is_quiet(s)).collect();
    if !loud.is_empty() {
        return loud;
    }
    segments.iter().max_by(|a, b| (a.end - a.start).total_cmp(&(b.end - b.start))).into_iter().collect()
}

fn label_width(setter: &Setter<'_>, segment: &Segment) -> f64 {
    let arrow = if segment.up.is_some() { 0.9 * setter.em } else { 0.0 };
    arrow + setter.measure.width(&segment.label, setter.small, !is_quiet(segment))
}

/// Line and left edge of each label, given its wished left edge and width; `None` for a quiet label
/// that says nothing new and has no room on the first line.
fn lines(
    wishes: &[(f64, f64)],
    quiet: &[bool],
    name_end: Option<f64>,
    [left, right]: [f64; 2],
    em: f64,
) -> Vec<Option<(usize, f64)>> {
    let pad = 1.1 * em;
    let mut ends: Vec<f64> = vec![name_end.unwrap_or(f64::NEG_INFINITY)];
    let mut said_quiet = false;
    let mut places = Vec::new();
    for (&(wish, width), &is_quiet) in wishes.iter().zip(quiet) {
        let wish = wish.min(right - width).max(left.min(right - width)).max(0.0);
        let slack = if name_end.is_some() { f64::INFINITY } else { 1.5 * em };
        let fits = |end: f64| {
            let x = wish.max(end + pad);
            (x - wish <= slack && x + width <= right).then_some(x)
        };
        let found = ends.iter().position(|&end| fits(end).is_some());
        let row = found.unwrap_or(ends.len());
        if row >= MOST_LINES || (is_quiet && said_quiet && row > 0) {
            places.push(None);
            continue;
        }
        if row == ends.len() {
            ends.push(f64::NEG_INFINITY);
        }
        let x = fits(ends[row]).unwrap_or(wish);
        ends[row] = x + width;
        said_quiet |= is_quiet;
        places.push(Some((row, x)));
    }
    places
}

#[cfg(test)]
mod tests {
    use super::lines;

    #[test]
    fn labels_stand_at_their_start_or_on_a_further_line() {
        let places = lines(&[(40.0, 60.0), (80.0, 50.0), (200.0, 50.0)], &[false; 3], None, [40.0, 300.0], 10.0);
        assert_eq!(places, [Some((0, 40.0)), Some((1, 80.0)), Some((0, 200.0))]);
    }

    #[test]
    fn a_label_near_the_right_edge_is_pulled_in() {
        let places = lines(&[(40.0, 60.0), (280.0, 120.0)], &[false; 2], None, [40.0, 300.0], 10.0);
        assert_eq!(places, [Some((0, 40.0)), Some((0, 180.0))]);
    }

    #[test]
    fn in_a_row_labels_follow_the_name() {
        let places = lines(&[(40.0, 60.0)], &[false], Some(150.0), [40.0, 300.0], 10.0);
        assert_eq!(places, [Some((0, 161.0))]);
        let narrow = lines(&[(40.0, 200.0)], &[false], Some(150.0), [40.0, 300.0], 10.0);
        assert_eq!(narrow, [Some((1, 40.0))]);
    }

    #[test]
    fn a_second_undecided_label_gives_way() {
        let places =
            lines(&[(40.0, 60.0), (60.0, 60.0), (80.0, 60.0)], &[true, false, true], None, [40.0, 300.0], 10.0);
        assert_eq!(places[2], None);
    }
}
