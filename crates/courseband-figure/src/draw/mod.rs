//! Draws a laid-out figure on any backend of the drawing library. Holds no
//! statistics: everything is in the description already.

mod clip;
mod lane;
mod marks;
mod pen;

use crate::figure::{Figure, Plot, RuleKind, Tone};
use crate::layout::{Anchor, Layout, Rect, StripBox, Text};
use crate::palette::Palette;
use pen::{Outcome, Pen};
use plotters::prelude::DrawingBackend;

/// How backend coordinates relate to CSS pixels.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Surface<'a> {
    /// Backend units per CSS pixel. Backends take whole numbers: more units draw smoother curves.
    pub grid: f64,
    /// Device pixels per CSS pixel: straight lines are laid on whole device pixels.
    pub ratio: f64,
    /// Font family, as in CSS.
    pub family: &'a str,
    /// Factor for text sizes, for backends that change them.
    pub text: f64,
}

/// Draws a figure as it was laid out.
///
/// # Errors
/// What the backend could not draw.
pub fn draw<DB: DrawingBackend>(
    figure: &Figure,
    layout: &Layout,
    backend: &mut DB,
    surface: Surface<'_>,
) -> Outcome<DB> {
    let mut palette = Palette::of(figure.view.surface());
    palette.band *= figure.strength.bands;
    palette.trace *= figure.strength.traces;
    let mut pen = Pen { backend, surface, palette, groups: &figure.groups };
    let whole = Rect { left: 0.0, right: layout.width, top: 0.0, bottom: layout.height };
    pen.fill(whole, palette.paper, 1.0)?;
    for (strip, placed) in figure.strips.iter().zip(&layout.strips) {
        if let (Some(plot), Some(rect)) = (&strip.plot, placed.plot) {
            draw_plot(&mut pen, layout, plot, placed, rect)?;
        }
        if let (Some(lane), Some(rect)) = (&strip.lane, placed.lane) {
            lane::draw_lane(&mut pen, &layout.x, lane, rect)?;
        }
        for arrow in &placed.arrows {
            lane::draw_arrow(&mut pen, arrow)?;
        }
        placed.texts.iter().try_for_each(|text| pen.text(text))?;
    }
    draw_time_axis(&mut pen, layout)
}

fn draw_plot<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    layout: &Layout,
    plot: &Plot,
    placed: &StripBox,
    rect: Rect,
) -> Outcome<DB> {
    let y = |value: f64| StripBox::y(rect, plot.scale, value);
    for tick in plot.ticks.iter().filter(|t| plot.scale.holds(t.value)) {
        pen.hair(rect.left, rect.right, y(tick.value), pen.palette.hair)?;
    }
    for rule in plot.rules.iter().filter(|r| plot.scale.holds(r.value)) {
        match rule.kind {
            RuleKind::Zero => pen.hair(rect.left, rect.right, y(rule.value), pen.palette.ink)?,
            RuleKind::Margin => pen.dotted(rect.left, rect.right, y(rule.value), 1.1, 4.0, pen.palette.soft)?,
        }
    }
    let place = marks::Place { x: layout.x, rect, scale: plot.scale };
    plot.marks.iter().try_for_each(|mark| marks::draw_mark(pen, &place, mark))?;
    for end in &placed.ends {
        if let Some(clear) = end.clear {
            pen.fill(clear, pen.palette.paper, 0.85)?;
        }
        let moved = (end.to.1 - end.from.1).abs() > 2.5 || end.to.0 - end.from.0 > 24.0;
        if moved {
            let turn = (rect.right + 2.0, end.from.1);
            let path = if end.from.0 < rect.right - 1.0 { vec![end.from, turn, end.to] } else { vec![turn, end.to] };
            pen.path(&path, pen.colour(end.tone), 0.55, 0.9)?;
        }
        end.lines.iter().try_for_each(|text| pen.text(text))?;
    }
    Ok(())
}

fn draw_time_axis<DB: DrawingBackend>(pen: &mut Pen<'_, DB>, layout: &Layout) -> Outcome<DB> {
    let Some(last) = layout.strips.last() else { return Ok(()) };
    // Under the lane, where there is one.
    let plot = last.plot.filter(|_| last.lane.is_none());
    let y = plot.map_or(last.outer.bottom, |plot| plot.bottom);
    pen.hair(layout.x.left, layout.x.right, y, pen.palette.soft)?;
    for (x, text) in &layout.ticks {
        pen.upright(*x, y, y + 4.0, pen.palette.soft)?;
        pen.text(text)?;
    }
    if layout.word.text.is_empty() { Ok(()) } else { pen.text(&layout.word) }
}

impl<DB: DrawingBackend> Pen<'_, DB> {
    fn colour(&self, tone: Tone) -> crate::palette::Rgb {
        match tone {
            Tone::Ink => self.palette.ink,
            Tone::Soft => self.palette.soft,
            Tone::Hair => self.palette.hair,
            Tone::Group(g) => self.palette.groups[self.groups.get(g).map_or(0, |look| look.colour) % 6],
        }
    }

    fn text(&mut self, text: &Text) -> Outcome<DB> {
        let colour = self.colour(text.tone);
        self.write(&text.text, (text.x, text.y), text.size, text.bold, colour, text.anchor)
    }
}

impl Anchor {
    fn position(self) -> plotters::style::text_anchor::HPos {
        use plotters::style::text_anchor::HPos;
        match self {
            Anchor::Start => HPos::Left,
            Anchor::Middle => HPos::Center,
            Anchor::End => HPos::Right,
        }
    }
}
