//! Traces, ranges, bands, curves, dots and steps.

use super::clip::{area_inside, line_inside};
use super::pen::{Outcome, Pen};
use crate::figure::{Dash, Mark, Tone};
use crate::layout::{Rect, StripBox, TimeRange};
use crate::scale::Scale;
use plotters::prelude::DrawingBackend;

/// Width of a group's curve.
const CURVE: f64 = 2.1;
/// Radius of a dot.
const DOT: f64 = 3.1;
/// Distance of hatching lines.
const HATCH: f64 = 6.0;

/// Where a plot's values stand.
pub(super) struct Place {
    pub(super) x: TimeRange,
    pub(super) rect: Rect,
    pub(super) scale: Scale,
}

impl Place {
    fn at(&self, time: f64, value: f64) -> (f64, f64) {
        (self.x.at(time), StripBox::y(self.rect, self.scale, value))
    }

    fn line(&self, points: &[(f64, f64)]) -> Vec<Vec<(f64, f64)>> {
        let placed: Vec<(f64, f64)> = points.iter().map(|p| self.at(p.0, p.1)).collect();
        line_inside(&placed, self.rect)
    }

    fn edges(&self, points: &[(f64, f64, f64)]) -> [Vec<(f64, f64)>; 2] {
        let edge = |f: &dyn Fn(&(f64, f64, f64)) -> f64| points.iter().map(|p| self.at(p.0, f(p))).collect();
        [edge(&|p| p.2), edge(&|p| p.1)]
    }
}

/// Draws one mark.
pub(super) fn draw_mark<DB: DrawingBackend>(pen: &mut Pen<'_, DB>, place: &Place, mark: &Mark) -> Outcome<DB> {
    match mark {
        Mark::Trace { tone, points, strong } => {
            let (alpha, width) = if *strong { (1.0, 1.6) } else { (pen.palette.trace, 0.9) };
            lines(pen, place, *tone, points, alpha, width)
        }
        Mark::Range { tone, points } => {
            area(pen, place, *tone, points, 0.35 * pen.palette.band)?;
            outline(pen, place, *tone, points, 0.45, 0.8)
        }
        Mark::Band { tone, points, faded } => {
            let share = if *faded { 0.4 } else { 1.0 };
            area(pen, place, *tone, points, share * pen.palette.band)?;
            outline(pen, place, *tone, points, share * pen.palette.edge, 0.8)
        }
        Mark::Hatch { tone, points } => hatch(pen, place, *tone, points),
        Mark::Curve { tone, dash, points, faded } => {
            let alpha = if *faded { 0.4 } else { 1.0 };
            let colour = pen.colour(*tone);
            place.line(points).iter().try_for_each(|part| pen.dashed(part, *dash, colour, alpha, CURVE))
        }
        // Two thin lines, apart from every dash of the groups.
        Mark::Over { tone, points } => [-1.5, 1.5].into_iter().try_for_each(|off| {
            let colour = pen.colour(*tone);
            let beside = |part: &Vec<(f64, f64)>| part.iter().map(|&(x, y)| (x, y + off)).collect::<Vec<_>>();
            place.line(points).iter().try_for_each(|part| pen.dashed(&beside(part), Dash::Solid, colour, 1.0, 0.9))
        }),
        Mark::Dots { tone, beside, points } => dots(pen, place, *tone, *beside, points),
        Mark::Steps { tone, dash, points } => steps(pen, place, *tone, *dash, points),
    }
}

fn lines<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    place: &Place,
    tone: Tone,
    points: &[(f64, f64)],
    alpha: f64,
    width: f64,
) -> Outcome<DB> {
    let colour = pen.colour(tone);
    place.line(points).iter().try_for_each(|part| pen.path(part, colour, alpha, width))
}

fn area<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    place: &Place,
    tone: Tone,
    points: &[(f64, f64, f64)],
    alpha: f64,
) -> Outcome<DB> {
    let [mut corners, lower] = place.edges(points);
    corners.extend(lower.into_iter().rev());
    let colour = pen.colour(tone);
    pen.area(&area_inside(corners, place.rect), colour, alpha)
}

fn outline<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    place: &Place,
    tone: Tone,
    points: &[(f64, f64, f64)],
    alpha: f64,
    width: f64,
) -> Outcome<DB> {
    let colour = pen.colour(tone);
    for edge in place.edges(points) {
        line_inside(&edge, place.rect).iter().try_for_each(|part| pen.path(part, colour, alpha, width))?;
    }
    Ok(())
}

/// Lines rising to the right, inside the band only.
fn hatch<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    place: &Place,
    tone: Tone,
    points: &[(f64, f64, f64)],
) -> Outcome<DB> {
    let [upper, lower] = place.edges(points);
    let (Some(first), Some(last)) = (upper.first(), upper.last()) else { return Ok(()) };
    let (left, right) = (first.0, last.0);
    let rect = place.rect;
    let colour = pen.colour(tone);
    let inside = |x: f64, y: f64| y > height_at(&upper, x).max(rect.top) && y < height_at(&lower, x).min(rect.bottom);
    // Each line is x + y = sum; the sums are fixed, so that neighbouring bands share one pattern.
    let mut sum = libm::ceil((left + rect.top) / HATCH) * HATCH;
    while sum < right + rect.bottom {
        let mut run: Option<(f64, f64)> = None;
        let from = left.max(sum - rect.bottom);
        let to = right.min(sum - rect.top);
        let mut x = from;
        while x <= to {
            match (inside(x, sum - x), run) {
                (true, None) => run = Some((x, x)),
                (true, Some((start, _))) => run = Some((start, x)),
                (false, Some((start, end))) => {
                    pen.path(&[(start, sum - start), (end, sum - end)], colour, 0.6, 0.8)?;
                    run = None;
                }
                (false, None) => {}
            }
            x += 1.0;
        }
        if let Some((start, end)) = run {
            pen.path(&[(start, sum - start), (end, sum - end)], colour, 0.6, 0.8)?;
        }
        sum += HATCH;
    }
    Ok(())
}

/// Height of a line, given by points ascending across, at `x`.
fn height_at(line: &[(f64, f64)], x: f64) -> f64 {
    let next = line.partition_point(|p| p.0 < x).clamp(1, line.len().max(2) - 1);
    let (Some(a), Some(b)) = (line.get(next - 1), line.get(next)) else {
        return line.first().map_or(0.0, |p| p.1);
    };
    if b.0 > a.0 { a.1 + (x - a.0) / (b.0 - a.0) * (b.1 - a.1) } else { a.1 }
}

/// Estimates at visits, each with its interval if asked for.
fn dots<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    place: &Place,
    tone: Tone,
    beside: Option<f64>,
    points: &[(f64, f64, f64, f64)],
) -> Outcome<DB> {
    let colour = pen.colour(tone);
    let shift = 2.0 * DOT * beside.unwrap_or(0.0);
    let at = |time: f64, value: f64| {
        let (x, y) = place.at(time, value);
        (x + shift, y)
    };
    let room = shift.abs() + 1.0;
    let rect = Rect { left: place.rect.left - room, right: place.rect.right + room, ..place.rect };
    for &(time, value, low, high) in points {
        if beside.is_some() {
            for part in line_inside(&[at(time, low), at(time, high)], rect) {
                pen.path(&part, colour, 0.9, 1.4)?;
            }
        }
        if place.scale.holds(value) {
            pen.disc(at(time, value), DOT, colour)?;
        }
    }
    Ok(())
}

/// A line that keeps its value until the next point.
fn steps<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    place: &Place,
    tone: Tone,
    dash: Dash,
    points: &[(f64, f64)],
) -> Outcome<DB> {
    let mut path: Vec<(f64, f64)> = Vec::new();
    for &(time, value) in points {
        let at = place.at(time, value);
        if let Some(before) = path.last().copied() {
            path.push((at.0, before.1));
        }
        path.push(at);
    }
    path.dedup();
    let colour = pen.colour(tone);
    pen.dashed(&path, dash, colour, 1.0, 1.5)
}
