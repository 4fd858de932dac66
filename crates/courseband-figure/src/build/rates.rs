//! The rates strip: how fast every course changes, with bands of its own.

use super::Builder;
use super::points::{band, banded, line};
use crate::figure::{Mark, Plot, Rule, RuleKind, Strip, StripKind, Tone};
use crate::scale::{Kind, Scale};
use crate::ticks::value_ticks;
use crate::words;

/// (time, value, low, high), ascending.
type Banded = Vec<(f64, f64, f64, f64)>;

impl Builder<'_> {
    /// `None` where no rates were asked for.
    pub(super) fn rates(&self) -> Option<Strip> {
        let none = (Vec::new(), Vec::new());
        let curves: Vec<(usize, Banded)> = (self.source.rates.iter())
            .map(|rate| {
                let points = banded(
                    [&rate.time, &none.0],
                    [&rate.response_mean, &none.1],
                    [&rate.response_lower, &none.1],
                    [&rate.response_upper, &none.1],
                    rate.support,
                );
                (self.group(&rate.group), points)
            })
            .filter(|(_, points)| points.len() > 1)
            .collect();
        if curves.is_empty() {
            return None;
        }
        let rest = if self.source.scale.ratio { 1.0 } else { 0.0 };
        // Bands flare at the ends: the axis holds all lines and the usual band.
        let lines = || curves.iter().flat_map(|(_, points)| points.iter().map(|p| p.1)).chain([rest]);
        let (low, high) = (lines().fold(f64::INFINITY, f64::min), lines().fold(f64::NEG_INFINITY, f64::max));
        let mut reach: Vec<f64> =
            curves.iter().flat_map(|(_, points)| points.iter().map(|p| 0.5 * (p.3 - p.2))).collect();
        reach.sort_by(f64::total_cmp);
        let room = 1.3 * reach.get(reach.len() / 2).copied().unwrap_or(0.0);
        let scale = Scale::new(Kind::Linear, low - room, high + room).widened(0.03);
        let bands =
            curves.iter().map(|(g, points)| Mark::Band { tone: Tone::Group(*g), points: band(points), faded: false });
        let lines = curves.iter().map(|(g, points)| Mark::Curve {
            tone: Tone::Group(*g),
            dash: self.looks[*g].dash,
            points: line(points),
            faded: false,
        });
        Some(Strip {
            kind: StripKind::Rates,
            pair: None,
            title: "Rates".into(),
            subject: Vec::new(),
            caption: words::rates(self.source),
            plot: Some(Plot {
                height: 130.0,
                scale,
                ticks: value_ticks(scale, 4),
                rules: vec![Rule { value: rest, kind: RuleKind::Zero }],
                marks: bands.chain(lines).collect(),
                ends: Vec::new(),
                least_lines: 0,
            }),
            lane: None,
        })
    }
}
