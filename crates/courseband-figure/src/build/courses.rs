//! The courses strip: subjects' traces, group curves with their bands.

use super::Builder;
use super::points::{band, band_from, banded, few_after, line, thinned};
use super::range::ten_to_ninety;
use crate::figure::{EndLabel, Mark, Plot, Strip, StripKind, Tone};
use crate::scale::{Kind, Scale};
use crate::source::Course;
use crate::text::two_lines;
use crate::ticks::value_ticks;
use crate::words;

/// More traces than this are shown as ranges.
const MOST_TRACES: usize = 60;
/// Up to so many visits the estimates at visits are marked.
const FEW_VISITS: usize = 5;

impl Builder<'_> {
    pub(super) fn courses(&self) -> Strip {
        let curves: Vec<Vec<(f64, f64, f64, f64)>> = self.source.curves.iter().map(course_points).collect();
        let mut marks = self.subjects();
        marks.extend(self.bands(&curves));
        marks.extend(self.lines(&curves));
        marks.extend(self.laid_over());
        let scale = self.course_scale(&curves, &marks);
        let narrow = self.view.is_narrow();
        let height = if narrow { 240.0 } else { (0.36 * self.view.safe_width()).clamp(260.0, 380.0) };
        let is_ranged = marks.iter().any(|m| matches!(m, Mark::Range { .. }));
        let is_hatched = marks.iter().any(|m| matches!(m, Mark::Hatch { .. }));
        let ends = self.ends(&curves, narrow);
        Strip {
            kind: StripKind::Courses,
            pair: None,
            title: self.title(scale.kind()),
            subject: self.key(),
            caption: words::courses(self.source, self.view, self.noun(), scale.kind(), is_ranged, is_hatched)
                + if self.view.over.is_empty() { "" } else { words::LAID_OVER },
            plot: Some(Plot {
                height,
                scale,
                ticks: value_ticks(scale, 5),
                rules: Vec::new(),
                marks,
                least_lines: ends.iter().map(|e| e.lines.len()).sum(),
                ends,
            }),
            lane: None,
        }
    }

    /// Without explanations the value axis is named here.
    fn title(&self, kind: Kind) -> String {
        let response = self.view.value_title.as_ref().unwrap_or(&self.source.scale.response);
        match (self.view.captions || response.is_empty(), kind) {
            (true, _) => "Courses".into(),
            (false, Kind::Log) => format!("{response}, log scale"),
            (false, Kind::Linear) => response.clone(),
        }
    }

    /// Traces or, for many subjects, ranges.
    fn subjects(&self) -> Vec<Mark> {
        let mut marks = Vec::new();
        if !self.view.points {
            return marks;
        }
        let many = self.traces.len() > MOST_TRACES;
        if many {
            let ranges = (0..self.source.groups.len())
                .map(|g| Mark::Range { tone: Tone::Group(g), points: ten_to_ninety(self.traces, g) });
            marks.extend(ranges.filter(|m| matches!(m, Mark::Range { points, .. } if points.len() > 1)));
        }
        let pixel = if self.view.decimate { self.pixel() } else { 0.0 };
        for k in 0..self.traces.len() {
            let strong = self.view.pointed == Some(k);
            if let Some((group, rows)) = self.traces.subject(k)
                && (!many || strong || self.view.focus == Some(group))
            {
                marks.push(Mark::Trace { tone: Tone::Group(group), points: thinned(rows.collect(), pixel), strong });
            }
        }
        marks.sort_by_key(|m| matches!(m, Mark::Trace { strong: true, .. }));
        marks
    }

    fn bands(&self, curves: &[Vec<(f64, f64, f64, f64)>]) -> Vec<Mark> {
        let mut marks = Vec::new();
        if self.is_by_time() || !self.view.bands {
            return marks;
        }
        for (g, points) in curves.iter().enumerate() {
            marks.push(Mark::Band { tone: Tone::Group(g), points: band(points), faded: self.is_faded(g) });
            let group = &self.source.groups[g];
            if let Some(start) = few_after(&group.last_times, group.subjects, self.source.curves[g].support) {
                marks.push(Mark::Hatch { tone: Tone::Group(g), points: band_from(&band(points), start) });
            }
        }
        marks
    }

    fn lines(&self, curves: &[Vec<(f64, f64, f64, f64)>]) -> Vec<Mark> {
        let mut marks = Vec::new();
        for (g, points) in curves.iter().enumerate() {
            let dash = self.looks[g].dash;
            marks.push(Mark::Curve { tone: Tone::Group(g), dash, points: line(points), faded: self.is_faded(g) });
            if self.marks_visits() {
                let curve = &self.source.curves[g];
                let at = &curve.at_visits;
                let none = (Vec::new(), Vec::new());
                let points = banded(
                    [&at.time, &none.0],
                    [&at.response_mean, &none.1],
                    [&at.response_lower, &none.1],
                    [&at.response_upper, &none.1],
                    curve.support,
                );
                let middle = 0.5 * (curves.len() as f64 - 1.0);
                let beside = self.is_by_time().then_some(g as f64 - middle);
                marks.push(Mark::Dots { tone: Tone::Group(g), beside, points });
            }
        }
        marks
    }

    /// Lines of another model.
    fn laid_over(&self) -> Vec<Mark> {
        let mark = |over: &crate::view::OverLine| {
            let group = self.source.groups.iter().position(|group| group.name == over.group)?;
            let pairs = over.time.iter().zip(&over.response_mean);
            let points: Vec<(f64, f64)> = pairs.filter_map(|(&t, y)| Some((t, (*y)?))).collect();
            (points.len() > 1).then_some(Mark::Over { tone: Tone::Group(group), points })
        };
        self.view.over.iter().filter_map(mark).collect()
    }

    /// With few visits, or a mean per visit, the points carry the evidence.
    pub(super) fn marks_visits(&self) -> bool {
        self.source.visits.len() <= FEW_VISITS || self.is_by_time()
    }

    /// A mean per visit: nothing is known between visits, so there is no band.
    pub(super) fn is_by_time(&self) -> bool {
        self.source.plan.curves.shape == "by-time"
    }

    fn is_faded(&self, group: usize) -> bool {
        self.view.focus.is_some_and(|focus| focus != group)
    }

    /// Holds the bands, and the traces as far as they do not dwarf them.
    fn course_scale(&self, curves: &[Vec<(f64, f64, f64, f64)>], marks: &[Mark]) -> Scale {
        let shown = self.view.bands || self.is_by_time();
        let bands = curves.iter().flatten().flat_map(|p| if shown { [p.2, p.3] } else { [p.1, p.1] });
        let subjects = marks.iter().flat_map(|mark| match mark {
            Mark::Trace { points, .. } => points.iter().map(|p| p.1).collect(),
            Mark::Range { points, .. } => points.iter().flat_map(|p| [p.1, p.2]).collect(),
            Mark::Over { points, .. } => points.iter().map(|p| p.1).collect(),
            _ => Vec::new(),
        });
        let mut all: Vec<f64> = bands.chain(subjects).filter(|v| v.is_finite()).collect();
        all.sort_by(f64::total_cmp);
        let (Some(&low), Some(&high)) = (all.first(), all.last()) else {
            return Scale::new(Kind::Linear, 0.0, 1.0);
        };
        let is_log = self.view.log.unwrap_or(self.source.scale.ratio && self.source.scale.link != "logit");
        if is_log && low > 0.0 {
            return Scale::new(Kind::Log, low, high).widened(0.02);
        }
        // An axis from zero, where the values reach near it.
        let low = if low > 0.0 && low < 0.25 * high { 0.0 } else { low };
        let scale = Scale::new(Kind::Linear, low, high);
        if low == 0.0 { Scale::new(Kind::Linear, 0.0, high * 1.02) } else { scale.widened(0.03) }
    }

    fn ends(&self, curves: &[Vec<(f64, f64, f64, f64)>], narrow: bool) -> Vec<EndLabel> {
        let label = |(g, points): (usize, &Vec<(f64, f64, f64, f64)>)| {
            let last = points.last()?;
            let look = &self.looks[g];
            let lines = if narrow { vec![look.letter.clone()] } else { two_lines(&look.name) };
            Some(EndLabel { time: last.0, value: last.1, lines, tone: Tone::Group(g), inside: false })
        };
        curves.iter().enumerate().filter_map(label).collect()
    }
}

fn course_points(curve: &Course) -> Vec<(f64, f64, f64, f64)> {
    let at = &curve.at_visits;
    banded(
        [&curve.time, &at.time],
        [&curve.response_mean, &at.response_mean],
        [&curve.response_lower, &at.response_lower],
        [&curve.response_upper, &at.response_upper],
        curve.support,
    )
}
