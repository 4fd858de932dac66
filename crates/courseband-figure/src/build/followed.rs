//! The followed strip: how many subjects have a visit on or after each time.

use super::Builder;
use crate::figure::{EndLabel, Mark, Plot, Strip, StripKind, Tone};
use crate::scale::{Kind, Scale};
use crate::ticks::Tick;
use crate::words;

impl Builder<'_> {
    pub(super) fn followed(&self) -> Strip {
        let most = self.source.groups.iter().map(|g| g.subjects).max().unwrap_or(0).max(1);
        let scale = Scale::new(Kind::Linear, 0.0, most as f64);
        let mut marks = Vec::new();
        let mut ends = Vec::new();
        for (g, group) in self.source.groups.iter().enumerate() {
            let points = steps(&group.last_times, self.time.start);
            let last = points.last().copied().unwrap_or((self.time.start, 0.0));
            let label = vec![format!("{}", last.1)];
            ends.push(EndLabel { time: last.0, value: last.1, lines: label, tone: Tone::Group(g), inside: true });
            marks.push(Mark::Steps { tone: Tone::Group(g), dash: self.looks[g].dash, points });
        }
        let ticks = [0, most].map(|v| Tick { value: v as f64, label: v.to_string() });
        Strip {
            kind: StripKind::Followed,
            pair: None,
            title: "Followed".into(),
            subject: Vec::new(),
            caption: words::followed(self.source, self.noun()),
            plot: Some(Plot {
                height: 54.0,
                scale,
                ticks: ticks.to_vec(),
                rules: Vec::new(),
                marks,
                least_lines: self.source.groups.len(),
                ends,
            }),
            lane: None,
        }
    }
}

/// Subjects with a visit at a time or later: (time from which, count), to the group's last visit.
fn steps(last_times: &[f64], start: f64) -> Vec<(f64, f64)> {
    let mut left = last_times.len();
    let mut points = vec![(start, left as f64)];
    for run in last_times.chunk_by(|a, b| a == b) {
        if run.len() < left {
            left -= run.len();
            points.push((run[0], left as f64));
        } else {
            points.push((run[0], left as f64));
            break;
        }
    }
    points
}
