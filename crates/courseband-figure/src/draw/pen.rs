//! Lines, areas and text in CSS pixels on a backend with whole coordinates.

use super::Surface;
use crate::figure::{Dash, GroupLook};
use crate::layout::{Anchor, Rect};
use crate::palette::{Palette, Rgb};
use plotters::style::text_anchor::{Pos, VPos};
use plotters_backend::{
    BackendColor, BackendCoord, BackendStyle, BackendTextStyle, DrawingBackend, DrawingErrorKind, FontFamily, FontStyle,
};
use std::convert::Infallible;

/// What drawing on a backend gives.
pub(super) type Outcome<DB> = Result<(), DrawingErrorKind<<DB as DrawingBackend>::ErrorType>>;

/// Draws in CSS pixels.
pub(super) struct Pen<'a, DB: DrawingBackend> {
    pub(super) backend: &'a mut DB,
    pub(super) surface: Surface<'a>,
    pub(super) palette: Palette,
    pub(super) groups: &'a [GroupLook],
}

struct Stroke {
    colour: BackendColor,
    width: u32,
}

impl BackendStyle for Stroke {
    fn color(&self) -> BackendColor {
        self.colour
    }

    fn stroke_width(&self) -> u32 {
        self.width
    }
}

fn mixed(colour: Rgb, alpha: f64) -> BackendColor {
    BackendColor { alpha, rgb: (colour.0[0], colour.0[1], colour.0[2]) }
}

impl<DB: DrawingBackend> Pen<'_, DB> {
    fn units(&self, length: f64) -> i32 {
        libm::round(length * self.surface.grid) as i32
    }

    fn at(&self, (x, y): (f64, f64)) -> BackendCoord {
        (self.units(x), self.units(y))
    }

    /// The nearest edge between device pixels.
    fn snapped(&self, length: f64) -> f64 {
        libm::round(length * self.surface.ratio) / self.surface.ratio
    }

    /// Width of the thinnest line: whole device pixels, about three quarters of a CSS pixel.
    fn hair_width(&self) -> f64 {
        libm::round(0.75 * self.surface.ratio).max(1.0) / self.surface.ratio
    }

    /// A filled rectangle.
    pub(super) fn fill(&mut self, rect: Rect, colour: Rgb, alpha: f64) -> Outcome<DB> {
        let (a, b) = (self.at((rect.left, rect.top)), self.at((rect.right, rect.bottom)));
        self.backend.draw_rect(a, b, &mixed(colour, alpha), true)
    }

    /// A filled rectangle on whole device pixels.
    pub(super) fn block(&mut self, rect: Rect, colour: Rgb, alpha: f64) -> Outcome<DB> {
        let [left, right, top, bottom] = [rect.left, rect.right, rect.top, rect.bottom].map(|v| self.snapped(v));
        let right = right.max(left + 1.0 / self.surface.ratio);
        self.fill(Rect { left, right, top, bottom }, colour, alpha)
    }

    /// A crisp thin line across.
    pub(super) fn hair(&mut self, left: f64, right: f64, y: f64, colour: Rgb) -> Outcome<DB> {
        let width = self.hair_width();
        let top = self.snapped(y - 0.5 * width);
        self.fill(Rect { left: self.snapped(left), right: self.snapped(right), top, bottom: top + width }, colour, 1.0)
    }

    /// A crisp thin upright line.
    pub(super) fn upright(&mut self, x: f64, top: f64, bottom: f64, colour: Rgb) -> Outcome<DB> {
        let width = self.hair_width();
        let left = self.snapped(x - 0.5 * width);
        self.fill(Rect { left, right: left + width, top: self.snapped(top), bottom: self.snapped(bottom) }, colour, 1.0)
    }

    /// Square dots along a line across.
    pub(super) fn dotted(&mut self, left: f64, right: f64, y: f64, size: f64, step: f64, colour: Rgb) -> Outcome<DB> {
        let size = self.snapped(size).max(self.hair_width());
        let top = self.snapped(y - 0.5 * size);
        let mut x = left;
        while x + size <= right + 0.01 {
            let start = self.snapped(x);
            self.fill(Rect { left: start, right: start + size, top, bottom: top + size }, colour, 1.0)?;
            x += step;
        }
        Ok(())
    }

    /// A filled area.
    pub(super) fn area(&mut self, corners: &[(f64, f64)], colour: Rgb, alpha: f64) -> Outcome<DB> {
        if corners.len() < 3 {
            return Ok(());
        }
        let path: Vec<BackendCoord> = corners.iter().map(|&p| self.at(p)).collect();
        self.backend.fill_polygon(path, &mixed(colour, alpha))
    }

    /// A line through points.
    pub(super) fn path(&mut self, points: &[(f64, f64)], colour: Rgb, alpha: f64, width: f64) -> Outcome<DB> {
        let mut path: Vec<BackendCoord> = points.iter().map(|&p| self.at(p)).collect();
        path.dedup();
        if path.len() < 2 {
            return Ok(());
        }
        let width = self.units(width).max(1) as u32;
        self.backend.draw_path(path, &Stroke { colour: mixed(colour, alpha), width })
    }

    /// A line in one of the line styles.
    pub(super) fn dashed(
        &mut self,
        points: &[(f64, f64)],
        dash: Dash,
        colour: Rgb,
        alpha: f64,
        width: f64,
    ) -> Outcome<DB> {
        let lengths: Vec<f64> = dash.lengths().iter().map(|l| l * width).collect();
        if lengths.is_empty() {
            return self.path(points, colour, alpha, width);
        }
        for piece in pieces(points, &lengths) {
            self.path(&piece, colour, alpha, width)?;
        }
        Ok(())
    }

    /// A filled disc.
    pub(super) fn disc(&mut self, centre: (f64, f64), radius: f64, colour: Rgb) -> Outcome<DB> {
        let radius = self.units(radius).max(1) as u32;
        let at = self.at(centre);
        self.backend.draw_circle(at, radius, &mixed(colour, 1.0), true)
    }

    /// A line of text; `at` is its anchor, across, and its middle, down.
    pub(super) fn write(
        &mut self,
        text: &str,
        at: (f64, f64),
        size: f64,
        bold: bool,
        colour: Rgb,
        anchor: Anchor,
    ) -> Outcome<DB> {
        let style = Type {
            colour,
            size: size * self.surface.grid * self.surface.text,
            bold,
            anchor,
            family: self.surface.family,
        };
        let at = self.at(at);
        self.backend.draw_text(text, &style, at)
    }
}

/// The inked pieces of a dashed line.
fn pieces(points: &[(f64, f64)], lengths: &[f64]) -> Vec<Vec<(f64, f64)>> {
    let mut pieces: Vec<Vec<(f64, f64)>> = Vec::new();
    let (mut k, mut left) = (0, lengths[0]);
    let mut open = points.first().map(|&p| vec![p]);
    for pair in points.windows(2) {
        let (mut from, to) = (pair[0], pair[1]);
        loop {
            let length = libm::hypot(to.0 - from.0, to.1 - from.1);
            if length <= left {
                left -= length;
                if let Some(piece) = &mut open {
                    piece.push(to);
                }
                break;
            }
            let share = left / length;
            let turn = (from.0 + share * (to.0 - from.0), from.1 + share * (to.1 - from.1));
            match open.take() {
                Some(mut piece) => {
                    piece.push(turn);
                    pieces.push(piece);
                }
                None => open = Some(vec![turn]),
            }
            k = (k + 1) % lengths.len();
            left = lengths[k];
            from = turn;
        }
    }
    pieces.extend(open.filter(|piece| piece.len() > 1));
    pieces
}

struct Type<'a> {
    colour: Rgb,
    size: f64,
    bold: bool,
    anchor: Anchor,
    family: &'a str,
}

impl BackendTextStyle for Type<'_> {
    type FontError = Infallible;

    fn color(&self) -> BackendColor {
        mixed(self.colour, 1.0)
    }

    fn size(&self) -> f64 {
        self.size
    }

    fn style(&self) -> FontStyle {
        if self.bold { FontStyle::Bold } else { FontStyle::Normal }
    }

    fn anchor(&self) -> Pos {
        Pos::new(self.anchor.position(), VPos::Center)
    }

    fn family(&self) -> FontFamily<'_> {
        FontFamily::Name(self.family)
    }

    /// Backends that place text by themselves never ask.
    fn layout_box(&self, _: &str) -> Result<((i32, i32), (i32, i32)), Infallible> {
        Ok(((0, 0), (0, 0)))
    }

    /// Backends that write text by themselves never ask.
    fn draw<E, D: FnMut(i32, i32, BackendColor) -> Result<(), E>>(
        &self,
        _: &str,
        _: BackendCoord,
        _: D,
    ) -> Result<Result<(), E>, Infallible> {
        Ok(Ok(()))
    }
}

#[cfg(test)]
mod tests {
    use super::pieces;

    #[test]
    fn dashes_keep_their_length_around_corners() {
        let corner = [(0.0, 0.0), (3.0, 0.0), (3.0, 10.0)];
        let all = pieces(&corner, &[4.0, 2.0]);
        assert_eq!(
            all,
            [vec![(0.0, 0.0), (3.0, 0.0), (3.0, 1.0)], vec![(3.0, 3.0), (3.0, 7.0)], vec![(3.0, 9.0), (3.0, 10.0)]]
        );
    }
}
