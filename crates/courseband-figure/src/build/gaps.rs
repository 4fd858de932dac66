//! Gap strips and rows of pairs.

use super::Builder;
use super::points::{band, band_from, banded, few_after, line};
use crate::figure::{Mark, Plot, Rule, RuleKind, Strip, StripKind, Words};
use crate::scale::{Kind, Scale};
use crate::source::Gap;
use crate::ticks::{Tick, ratio_ticks, value_ticks};
use crate::view::View;
use crate::words;

/// Ratios above this are written as multiples, not as percent.
const MOST_PERCENT: f64 = 20.0;

type Points = Vec<(f64, f64, f64, f64)>;

impl Builder<'_> {
    /// A strip for each pair or, for many pairs, a row each and strips for those opened.
    pub(super) fn gaps(&self) -> Vec<Strip> {
        let gaps = &self.source.differences;
        let few = gaps.len() <= View::FEW_PAIRS;
        let mut open: Vec<usize> = if few { (0..gaps.len()).collect() } else { self.view.open_pairs.clone() };
        open.retain(|&pair| pair < gaps.len());
        open.dedup();
        open.truncate(View::FEW_PAIRS);
        let shown: Vec<(usize, Points)> = open.iter().map(|&pair| (pair, gap_points(&gaps[pair]))).collect();
        let scale = self.gap_scale(&shown);
        let strip = |pair: usize| {
            let points = shown.iter().find(|(of, _)| *of == pair).map(|(_, points)| points);
            let plot = points.map(|points| self.gap_plot(pair, points, scale, shown.len()));
            self.gap_strip(pair, plot, scale)
        };
        let mut strips: Vec<Strip> = (0..gaps.len()).map(strip).collect();
        if let Some(first) = strips.first_mut() {
            first.title = "Gaps".into();
            first.caption = words::gaps(self.source, gaps.len());
        }
        strips
    }

    fn gap_strip(&self, pair: usize, plot: Option<Plot>, scale: Scale) -> Strip {
        let gap = &self.source.differences[pair];
        let (tone, _) = self.look_of(gap);
        let name = words::pair(gap, &self.source.scale, plot.is_some() && self.as_percent(scale));
        Strip {
            kind: if plot.is_some() { StripKind::Gap } else { StripKind::Row },
            pair: Some(pair),
            title: String::new(),
            subject: vec![Words { text: name, tone, bold: true }],
            caption: String::new(),
            plot,
            lane: Some(self.lane(gap, tone)),
        }
    }

    fn gap_plot(&self, pair: usize, points: &Points, scale: Scale, shown: usize) -> Plot {
        let gap = &self.source.differences[pair];
        let (tone, dash) = self.look_of(gap);
        let mut marks = Vec::new();
        if !self.is_by_time() {
            marks.push(Mark::Band { tone, points: band(points), faded: false });
            if let Some(start) = self.few_in_pair(gap) {
                marks.push(Mark::Hatch { tone, points: band_from(&band(points), start) });
            }
        }
        marks.push(Mark::Curve { tone, dash, points: line(points), faded: false });
        if self.marks_visits() {
            let beside = self.is_by_time().then_some(0.0);
            marks.push(Mark::Dots { tone, beside, points: visit_points(gap) });
        }
        let height = match shown {
            1 => 150.0,
            2 => 110.0,
            _ => 92.0,
        };
        let ratio = self.source.scale.ratio;
        let about = if height > 120.0 { 5 } else { 3 };
        let ticks: Vec<Tick> =
            if ratio { ratio_ticks(scale, about, self.as_percent(scale)) } else { value_ticks(scale, about) };
        Plot { height, scale, ticks, rules: rules(gap, ratio), marks, ends: Vec::new(), least_lines: 0 }
    }

    /// Ratios of courses read as percent, unless they are large; ratios of odds never do.
    fn as_percent(&self, scale: Scale) -> bool {
        scale.high() <= MOST_PERCENT && self.source.scale.link != "logit"
    }

    fn few_in_pair(&self, gap: &Gap) -> Option<f64> {
        let support = gap.support?;
        let one = |group: &crate::source::Group| few_after(&group.last_times, group.subjects, support);
        let pair = matches!(gap.kind.as_str(), "" | "pair");
        let own = self.source.groups.iter().filter(|g| !pair || g.name == gap.from || g.name == gap.to);
        own.filter_map(one).reduce(f64::min).map(|start| start.max(support[0]))
    }

    /// One axis for all: holds zero, the margin, the estimates, and the bands unless they dwarf all else.
    fn gap_scale(&self, shown: &[(usize, Points)]) -> Scale {
        let ratio = self.source.scale.ratio;
        let on = |v: f64| if ratio { libm::log(v) } else { v };
        let mut low: f64 = 0.0;
        let mut high: f64 = 0.0;
        let mut reach = Vec::new();
        for (pair, points) in shown {
            let margin = self.source.differences[*pair].margin;
            (low, high) = (low.min(margin[0]), high.max(margin[1]));
            for p in points {
                (low, high) = (low.min(on(p.1)), high.max(on(p.1)));
                reach.push((on(p.3) - on(p.2)).abs());
            }
        }
        reach.sort_by(f64::total_cmp);
        let usual = reach.get(reach.len() / 2).copied().unwrap_or(1.0);
        let room = (high - low).max(1.5 * usual);
        let (least, most) = (low - room, high + room);
        for p in shown.iter().flat_map(|(_, points)| points) {
            (low, high) = (low.min(on(p.2).max(least)), high.max(on(p.3).min(most)));
        }
        let back = |v: f64| if ratio { libm::exp(v) } else { v };
        Scale::new(if ratio { Kind::Log } else { Kind::Linear }, back(low), back(high)).widened(0.06)
    }
}

fn rules(gap: &Gap, ratio: bool) -> Vec<Rule> {
    let back = |v: f64| if ratio { libm::exp(v) } else { v };
    let mut rules = vec![Rule { value: back(0.0), kind: RuleKind::Zero }];
    if gap.margin[1] > gap.margin[0] {
        rules.extend(gap.margin.map(|m| Rule { value: back(m), kind: RuleKind::Margin }));
    }
    rules
}

fn gap_points(gap: &Gap) -> Points {
    let at = &gap.at_visits;
    let Some(support) = gap.support else { return Vec::new() };
    banded(
        [&gap.time, &at.time],
        [&gap.response_estimate, &at.response_estimate],
        [&gap.response_lower, &at.response_lower],
        [&gap.response_upper, &at.response_upper],
        support,
    )
}

fn visit_points(gap: &Gap) -> Points {
    let at = &gap.at_visits;
    let none = (Vec::new(), Vec::new());
    banded(
        [&at.time, &none.0],
        [&at.response_estimate, &none.1],
        [&at.response_lower, &none.1],
        [&at.response_upper, &none.1],
        gap.support.unwrap_or([f64::INFINITY, f64::NEG_INFINITY]),
    )
}
