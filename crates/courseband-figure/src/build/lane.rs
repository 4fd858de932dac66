//! The lane: what the data say about a gap, over all time, in four states.

use super::Builder;
use crate::figure::{Lane, LaneState, Segment, Tone};
use crate::numbers::{decimals_for_span, fixed};
use crate::source::{Direction, Gap, Run};
use crate::words;

impl Builder<'_> {
    pub(super) fn lane(&self, gap: &Gap, tone: Tone) -> Lane {
        let mut segments = segments(gap, self.time.start, self.time.end);
        let margin = words::margin(self.source);
        let labels: Vec<String> = (0..segments.len()).map(|k| self.label(&segments, k, &margin)).collect();
        segments.iter_mut().zip(labels).for_each(|(segment, label)| segment.label = label);
        Lane { tone, segments }
    }

    /// What is written at a segment's start.
    fn label(&self, segments: &[Segment], k: usize, margin: &str) -> String {
        let segment = &segments[k];
        let state = match segment.state {
            LaneState::Undecided => return "undecided".into(),
            LaneState::NotCompared => return "not both followed".into(),
            LaneState::Beyond => format!("beyond {margin}"),
            LaneState::Apart => "apart".to_string(),
            LaneState::Inside => format!("inside {margin}"),
        };
        let compared = |s: &Segment| s.state != LaneState::NotCompared;
        let is_first = !segments[..k].iter().any(compared);
        let is_last = !segments[k + 1..].iter().any(compared);
        let when = |t: f64| format!("{} {}", self.time.word, self.edge(t));
        let continued =
            segments.get(k + 1).is_some_and(|next| next.up == segment.up && next.state == LaneState::Beyond);
        match (is_first, is_last) {
            (true, true) => format!("{state} over the whole course"),
            (true, false) => format!("{state} to {}", when(segment.end)),
            (false, true) => format!("{state} from {} to the last visit", when(segment.start)),
            (false, false) if continued => format!("{state} from {}", when(segment.start)),
            (false, false) => format!("{state} from {} to {}", when(segment.start), self.edge(segment.end)),
        }
    }

    fn edge(&self, t: f64) -> String {
        fixed(t, decimals_for_span(self.time.end - self.time.start))
    }
}

/// The whole axis as runs of one state, without holes.
fn segments(gap: &Gap, start: f64, end: f64) -> Vec<Segment> {
    let support = gap.support.unwrap_or([end, end]);
    let has_margin = gap.margin[1] > gap.margin[0];
    let none: &[Run] = &[];
    let (beyond, inside) = if has_margin { (gap.beyond.as_slice(), gap.inside.as_slice()) } else { (none, none) };
    let runs = || gap.stretches.iter().chain(beyond).chain(inside);
    let mut cuts: Vec<f64> = runs().flat_map(|run| [run.start, run.end]).chain(support).chain([start, end]).collect();
    cuts.retain(|t| *t >= start && *t <= end);
    cuts.sort_by(f64::total_cmp);
    cuts.dedup();
    let mut segments: Vec<Segment> = Vec::new();
    for pair in cuts.windows(2) {
        let middle = 0.5 * (pair[0] + pair[1]);
        let within = |runs: &[Run]| runs.iter().find(|r| r.start <= middle && middle <= r.end).copied();
        let (state, direction) = if middle < support[0] || middle > support[1] || gap.support.is_none() {
            (LaneState::NotCompared, None)
        } else if let Some(run) = within(beyond) {
            (LaneState::Beyond, run.direction)
        } else if let Some(run) = within(&gap.stretches) {
            (LaneState::Apart, run.direction)
        } else if within(inside).is_some() {
            (LaneState::Inside, None)
        } else {
            (LaneState::Undecided, None)
        };
        let up = direction.map(|d| d == Direction::Above);
        match segments.last_mut() {
            Some(last) if last.state == state && last.up == up => last.end = pair[1],
            _ => segments.push(Segment { start: pair[0], end: pair[1], state, label: String::new(), up }),
        }
    }
    segments
}
