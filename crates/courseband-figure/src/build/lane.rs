//! The lane: what the data say about a gap, over all time, in four states.

use super::Builder;
use crate::figure::{Lane, LaneState, Segment, Tone};
use crate::numbers::{decimals_for_span, fixed};
use crate::source::{Direction, Gap, Run};
use crate::text::shortened;
use crate::words;

impl Builder<'_> {
    pub(super) fn lane(&self, gap: &Gap, tone: Tone) -> Lane {
        let observed = [&gap.from, &gap.to]
            .map(|name| self.source.curves.get(self.group(name)).map_or([f64::INFINITY; 2], |curve| curve.support));
        let mut segments = segments(gap, self.time.start, self.time.end, observed);
        let margin = words::margin(self.source);
        let labels: Vec<String> =
            (0..segments.len()).map(|k| self.label(gap, &segments, k, &margin, observed)).collect();
        segments.iter_mut().zip(labels).for_each(|(segment, label)| segment.label = label);
        Lane { tone, segments }
    }

    /// What is written at a segment's start.
    fn label(&self, gap: &Gap, segments: &[Segment], k: usize, margin: &str, observed: [[f64; 2]; 2]) -> String {
        let segment = &segments[k];
        let state = match segment.state {
            LaneState::Undecided => return "undecided".into(),
            LaneState::NotCompared => {
                let middle = 0.5 * (segment.start + segment.end);
                let any = observed.iter().any(|range| within(*range, middle));
                return if any { "not compared" } else { "neither followed" }.into();
            }
            LaneState::OnlyOne => {
                let first = within(observed[0], 0.5 * (segment.start + segment.end));
                return format!("only {} followed", self.short(if first { &gap.from } else { &gap.to }));
            }
            LaneState::Beyond => format!("beyond {margin}"),
            LaneState::Apart => "apart".to_string(),
            LaneState::Inside => format!("inside {margin}"),
        };
        let compared = |s: &Segment| !matches!(s.state, LaneState::NotCompared | LaneState::OnlyOne);
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

    /// A group's name, or its letter where curves carry letters.
    fn short(&self, name: &str) -> String {
        let look = self.looks.get(self.group(name)).filter(|_| self.view.is_narrow());
        look.map_or_else(|| shortened(name, 24), |look| look.letter.clone())
    }

    fn edge(&self, t: f64) -> String {
        fixed(t, decimals_for_span(self.time.end - self.time.start))
    }
}

fn within(range: [f64; 2], time: f64) -> bool {
    range[0] <= time && time <= range[1]
}

/// The whole axis as runs of one state, without holes. `observed`: first and last time of either group.
fn segments(gap: &Gap, start: f64, end: f64, observed: [[f64; 2]; 2]) -> Vec<Segment> {
    let support = gap.support.unwrap_or([end, end]);
    let has_margin = gap.margin[1] > gap.margin[0];
    let none: &[Run] = &[];
    let (beyond, inside) = if has_margin { (gap.beyond.as_slice(), gap.inside.as_slice()) } else { (none, none) };
    let runs = || gap.stretches.iter().chain(beyond).chain(inside);
    let mut cuts: Vec<f64> = runs().flat_map(|run| [run.start, run.end]).chain(support).chain([start, end]).collect();
    cuts.extend(observed.iter().flatten().filter(|_| gap.support.is_none() || support != [start, end]));
    cuts.retain(|t| *t >= start && *t <= end);
    cuts.sort_by(f64::total_cmp);
    cuts.dedup();
    let mut segments: Vec<Segment> = Vec::new();
    for pair in cuts.windows(2) {
        let middle = 0.5 * (pair[0] + pair[1]);
        let in_run = |runs: &[Run]| runs.iter().find(|r| r.start <= middle && middle <= r.end).copied();
        let (state, direction) = if middle < support[0] || middle > support[1] || gap.support.is_none() {
            let one = within(observed[0], middle) != within(observed[1], middle);
            (if one { LaneState::OnlyOne } else { LaneState::NotCompared }, None)
        } else if let Some(run) = in_run(beyond) {
            (LaneState::Beyond, run.direction)
        } else if let Some(run) = in_run(&gap.stretches) {
            (LaneState::Apart, run.direction)
        } else if in_run(inside).is_some() {
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
