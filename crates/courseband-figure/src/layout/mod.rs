//! From a description to pixels: where every strip, mark of an axis and label
//! stands. Lengths are in CSS pixels from the upper left corner.

mod flow;
mod lanes;
mod spread;

use crate::figure::{EndLabel, Figure, Plot, Strip, StripKind, Tone};
use crate::scale::Scale;
use crate::text::Measure;
use flow::Flow;
use lanes::place_lane;
use spread::spread;

/// Where everything stands.
#[derive(Debug, Clone)]
pub struct Layout {
    /// Of the whole figure.
    pub width: f64,
    /// Of the whole figure.
    pub height: f64,
    /// The shared time axis.
    pub x: TimeRange,
    /// From the top, as in the figure.
    pub strips: Vec<StripBox>,
    /// Marks of the time axis that have a label.
    pub ticks: Vec<(f64, Text)>,
    /// Word for the time unit.
    pub word: Text,
}

/// The shared time axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TimeRange {
    /// Pixel of `start`.
    pub left: f64,
    /// Pixel of `end`.
    pub right: f64,
    /// First time.
    pub start: f64,
    /// Last time.
    pub end: f64,
}

impl TimeRange {
    /// Pixel of a time.
    #[must_use]
    pub fn at(&self, time: f64) -> f64 {
        self.left + (time - self.start) / (self.end - self.start) * (self.right - self.left)
    }
}

/// A rectangle.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Rect {
    /// Left edge.
    pub left: f64,
    /// Right edge.
    pub right: f64,
    /// Upper edge.
    pub top: f64,
    /// Lower edge.
    pub bottom: f64,
}

/// Where one strip stands.
#[derive(Debug, Clone)]
pub struct StripBox {
    /// What it shows.
    pub kind: StripKind,
    /// The pair, as an index into the findings' differences.
    pub pair: Option<usize>,
    /// The whole strip, captions included.
    pub outer: Rect,
    /// Where curves are drawn.
    pub plot: Option<Rect>,
    /// Its value axis, from the lower to the upper edge of `plot`.
    pub scale: Option<Scale>,
    /// The lane.
    pub lane: Option<Rect>,
    /// Captions, names, labels of marks and of the lane.
    pub texts: Vec<Text>,
    /// Labels at the curves' ends.
    pub ends: Vec<End>,
    /// Triangles before labels of the lane.
    pub arrows: Vec<Arrow>,
}

impl StripBox {
    /// Pixel of a value in a plot.
    pub(crate) fn y(plot: Rect, scale: Scale, value: f64) -> f64 {
        plot.bottom - scale.fraction(value) * (plot.bottom - plot.top)
    }
}

/// A line of text.
#[derive(Debug, Clone, PartialEq)]
pub struct Text {
    /// Where it is anchored.
    pub x: f64,
    /// Its middle.
    pub y: f64,
    /// What it says.
    pub text: String,
    /// Size.
    pub size: f64,
    /// Bold.
    pub bold: bool,
    /// Colour.
    pub tone: Tone,
    /// Which part of it stands at `x`.
    pub anchor: Anchor,
}

/// Which part of a text stands at its place.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Anchor {
    /// Its start.
    Start,
    /// Its middle.
    Middle,
    /// Its end.
    End,
}

/// A label at a curve's end, with a line that leads to it.
#[derive(Debug, Clone, PartialEq)]
pub struct End {
    /// Where the curve ends.
    pub from: (f64, f64),
    /// Where the leader ends.
    pub to: (f64, f64),
    /// Colour.
    pub tone: Tone,
    /// Its lines.
    pub lines: Vec<Text>,
    /// Kept clear of curves behind a label inside the plot.
    pub clear: Option<Rect>,
}

/// A triangle that points up or down.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Arrow {
    /// Left edge.
    pub x: f64,
    /// Middle.
    pub y: f64,
    /// Width.
    pub size: f64,
    /// Points up.
    pub up: bool,
    /// Colour.
    pub tone: Tone,
}

/// Lays a figure out.
#[must_use]
pub fn lay_out(figure: &Figure, measure: &dyn Measure) -> Layout {
    let setter = Setter::new(figure, measure);
    let mut strips = Vec::new();
    let mut y = setter.edge + figure.view.head_room.clamp(0.0, 200.0);
    for (k, strip) in figure.strips.iter().enumerate() {
        if k > 0 {
            y += setter.distance(&figure.strips[k - 1], strip);
        }
        let placed = setter.strip(strip, y);
        y = placed.outer.bottom;
        strips.push(placed);
    }
    let (ticks, word, bottom) = setter.time_axis(y);
    Layout {
        width: setter.right + setter.edge,
        height: libm::ceil(bottom + setter.edge),
        x: setter.x,
        strips,
        ticks,
        word,
    }
}

/// What every strip is laid out with.
struct Setter<'a> {
    figure: &'a Figure,
    measure: &'a dyn Measure,
    /// Free room on all sides.
    edge: f64,
    /// Where that room begins on the right.
    right: f64,
    em: f64,
    small: f64,
    x: TimeRange,
}

impl<'a> Setter<'a> {
    fn new(figure: &'a Figure, measure: &'a dyn Measure) -> Self {
        let em = figure.view.safe_font();
        let edge = figure.view.margin.clamp(0.0, 60.0);
        let width = figure.view.safe_width() - 2.0 * edge;
        let small = 0.92 * em;
        let plots = || figure.strips.iter().filter_map(|s| s.plot.as_ref());
        let widest = |texts: &mut dyn Iterator<Item = &String>, size: f64, bold: bool| {
            texts.map(|t| measure.width(t, size, bold)).fold(0.0, f64::max)
        };
        let marks = widest(&mut plots().flat_map(|p| p.ticks.iter().map(|t| &t.label)), small, false);
        let labels = widest(&mut plots().flat_map(|p| p.ends.iter().flat_map(|e| &e.lines)), em, true);
        let last = figure.time.ticks.last().map_or(0.0, |t| 0.5 * measure.width(&t.label, small, false));
        let first = figure.time.ticks.first().map_or(0.0, |t| 0.5 * measure.width(&t.label, small, false));
        let left = edge + libm::ceil((marks + 0.8 * em).max(first + 2.0).min(0.3 * width));
        let right_room = (labels + 1.25 * em).max(last + 2.0).min(0.34 * width);
        let right = libm::floor(edge + width - right_room);
        let x = TimeRange { left, right, start: figure.time.start, end: figure.time.end };
        Setter { figure, measure, edge, right: edge + width, em, small, x }
    }

    /// Room between two strips: rows stand closer.
    fn distance(&self, above: &Strip, below: &Strip) -> f64 {
        let both_rows = above.kind == StripKind::Row && below.kind == StripKind::Row && below.title.is_empty();
        let within_gaps = above.pair.is_some() && below.pair.is_some() && below.title.is_empty();
        self.em
            * if both_rows {
                0.55
            } else if within_gaps {
                1.1
            } else {
                1.9
            }
    }

    fn strip(&self, strip: &Strip, top: f64) -> StripBox {
        let mut texts = Vec::new();
        let (mut y, name_end) = self.captions(strip, top, &mut texts);
        let mut arrows = Vec::new();
        let mut placed = StripBox {
            kind: strip.kind,
            pair: strip.pair,
            outer: Rect { left: self.edge, right: self.right, top, bottom: y },
            plot: None,
            scale: None,
            lane: None,
            texts: Vec::new(),
            ends: Vec::new(),
            arrows: Vec::new(),
        };
        if let Some(plot) = &strip.plot {
            let rect = self.plot_rect(plot, y + 0.75 * self.em);
            self.value_labels(plot, rect, &mut texts);
            placed.ends = self.ends(plot, rect);
            placed.plot = Some(rect);
            placed.scale = Some(plot.scale);
            y = rect.bottom;
        }
        if let Some(lane) = &strip.lane {
            let set = place_lane(self, lane, y, strip.plot.is_none().then_some(name_end));
            texts.extend(set.texts);
            arrows = set.arrows;
            placed.lane = Some(set.lane);
            y = set.bottom;
        }
        placed.outer.bottom = y;
        placed.texts = texts;
        placed.arrows = arrows;
        placed
    }

    /// Title and caption, then the name; returns where they end, down and across.
    fn captions(&self, strip: &Strip, top: f64, texts: &mut Vec<Text>) -> (f64, f64) {
        let (mut y, mut x) = (top, self.x.left);
        if !strip.title.is_empty() || !strip.caption.is_empty() {
            let mut flow = Flow::new(self.measure, self.edge, y, self.right, 1.4 * self.em);
            flow.words(&strip.title, self.em, true, Tone::Ink);
            flow.skip(0.8 * self.em);
            flow.words(&strip.caption, self.em, false, Tone::Soft);
            (y, _) = flow.finish(texts);
        }
        if !strip.subject.is_empty() {
            let mut flow = Flow::new(self.measure, self.x.left, y + 0.25 * self.em, self.right, 1.4 * self.em);
            for words in &strip.subject {
                flow.words(&words.text, self.em, words.bold, words.tone);
                flow.skip(self.em);
            }
            (y, x) = flow.finish(texts);
            x -= self.em;
        }
        (y, x)
    }

    fn plot_rect(&self, plot: &Plot, top: f64) -> Rect {
        let least = plot.least_lines as f64 * 1.25 * self.em;
        let height = (plot.height * self.figure.view.tall.clamp(0.3, 4.0) * self.em / 12.0).max(least);
        let top = libm::round(top);
        Rect { left: self.x.left, right: self.x.right, top, bottom: top + libm::round(height) }
    }

    /// Labels of the value axis, those that would collide left out.
    fn value_labels(&self, plot: &Plot, rect: Rect, texts: &mut Vec<Text>) {
        let mut last = f64::INFINITY;
        for tick in &plot.ticks {
            let y = StripBox::y(rect, plot.scale, tick.value);
            if last - y >= 1.1 * self.small {
                texts.push(Text {
                    x: self.x.left - 0.6 * self.em,
                    y,
                    text: tick.label.clone(),
                    size: self.small,
                    bold: false,
                    tone: Tone::Soft,
                    anchor: Anchor::End,
                });
                last = y;
            }
        }
    }

    /// Labels beside the plot, spread apart, with leaders; and those inside it, where their curves end.
    fn ends(&self, plot: &Plot, rect: Rect) -> Vec<End> {
        let is_inside = |end: &EndLabel| end.inside && self.x.at(end.time) + 1.5 * self.em < rect.right;
        let (inside, beside): (Vec<&EndLabel>, Vec<&EndLabel>) = plot.ends.iter().partition(|end| is_inside(end));
        let mut placed = self.placed_ends(&beside, plot, rect, rect.right + 0.95 * self.em);
        let mut left = inside;
        left.sort_by(|a, b| a.time.total_cmp(&b.time));
        // Those that end close together are spread as one.
        for near in left.chunk_by(|a, b| self.x.at(b.time) - self.x.at(a.time) < 2.0 * self.em) {
            let x = self.x.at(near[near.len() - 1].time) + 0.6 * self.em;
            for mut end in self.placed_ends(near, plot, rect, x) {
                end.to = end.from;
                let wide = end.lines.iter().map(|t| self.measure.width(&t.text, t.size, t.bold)).fold(0.0, f64::max);
                let (top, bottom) = (end.lines[0].y, end.lines[end.lines.len() - 1].y);
                let (left, half) = (x - 0.2 * self.em, 0.6 * self.em);
                let right = x + wide + 0.2 * self.em;
                end.clear = Some(Rect { left, right, top: top - half, bottom: bottom + half });
                placed.push(end);
            }
        }
        placed
    }

    fn placed_ends(&self, ends: &[&EndLabel], plot: &Plot, rect: Rect, x: f64) -> Vec<End> {
        let line = 1.2 * self.em;
        let at = |value: f64| StripBox::y(rect, plot.scale, value).clamp(rect.top, rect.bottom);
        let wishes: Vec<(f64, f64)> = ends.iter().map(|e| (at(e.value), e.lines.len() as f64 * line)).collect();
        let places = spread(&wishes, rect.top - 0.5 * line, rect.bottom + 0.5 * line);
        let place = |(end, middle): (&&EndLabel, f64)| {
            let first = middle - 0.5 * line * (end.lines.len() as f64 - 1.0);
            let text = |(k, text): (usize, &String)| Text {
                x,
                y: first + k as f64 * line,
                text: text.clone(),
                size: self.em,
                bold: true,
                tone: end.tone,
                anchor: Anchor::Start,
            };
            End {
                from: (self.x.at(end.time) + 2.0, at(end.value)),
                to: (x - 0.25 * self.em, middle),
                tone: end.tone,
                lines: end.lines.iter().enumerate().map(text).collect(),
                clear: None,
            }
        };
        ends.iter().zip(places).map(place).collect()
    }

    /// Labels below the last strip; those that would collide are left out, the first and last kept.
    fn time_axis(&self, axis: f64) -> (Vec<(f64, Text)>, Text, f64) {
        let y = axis + 1.35 * self.em;
        let size = self.small;
        let width = |label: &str| self.measure.width(label, size, false);
        let mut kept: Vec<(f64, Text)> = Vec::new();
        let ends = |(x, text): &(f64, Text)| x + 0.5 * width(&text.text);
        let all = &self.figure.time.ticks;
        let last_start = all.last().map_or(f64::INFINITY, |t| self.x.at(t.value) - 0.5 * width(&t.label));
        for (k, tick) in all.iter().enumerate() {
            let x = self.x.at(tick.value);
            let half = 0.5 * width(&tick.label);
            let is_last = k + 1 == all.len();
            let after = kept.last().map_or(f64::NEG_INFINITY, ends) + 0.7 * self.em;
            if x - half < after || (!is_last && x + half + 0.7 * self.em > last_start) {
                continue;
            }
            let text =
                Text { x, y, text: tick.label.clone(), size, bold: false, tone: Tone::Soft, anchor: Anchor::Middle };
            kept.push((x, text));
        }
        let word = &self.figure.time.word;
        let first = kept.first().map_or(self.x.left, |(x, t)| x - 0.5 * width(&t.text)) - 0.6 * self.em;
        let beside = first - width(word) >= self.edge;
        let (x, word_y, anchor) =
            if beside { (first, y, Anchor::End) } else { (self.x.right, y + 1.3 * self.em, Anchor::End) };
        let text = Text { x, y: word_y, text: word.clone(), size, bold: false, tone: Tone::Soft, anchor };
        (kept, text, word_y + 0.8 * self.em)
    }
}

#[cfg(test)]
mod tests;
