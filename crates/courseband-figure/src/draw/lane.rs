//! The lane: four states told apart by height, pattern and tint, and a thin line or
//! slashes where there is nothing to compare. Nothing upright at their ends, nothing on the axis.

use super::pen::{Outcome, Pen};
use crate::figure::{Lane, LaneState};
use crate::layout::{Arrow, Rect, TimeRange};
use plotters::prelude::DrawingBackend;

/// Draws a lane.
pub(super) fn draw_lane<DB: DrawingBackend>(
    pen: &mut Pen<'_, DB>,
    x: &TimeRange,
    lane: &Lane,
    rect: Rect,
) -> Outcome<DB> {
    let colour = pen.colour(lane.tone);
    let middle = 0.5 * (rect.top + rect.bottom);
    let tall = rect.bottom - rect.top;
    for segment in &lane.segments {
        let (left, right) = (x.at(segment.start), x.at(segment.end));
        let bar = |height: f64| Rect { left, right, top: middle - 0.5 * height, bottom: middle + 0.5 * height };
        match segment.state {
            LaneState::Beyond => pen.block(bar(tall), colour, 1.0)?,
            LaneState::Apart => pen.block(bar(0.5 * tall), colour, pen.palette.edge)?,
            LaneState::Inside => {
                let outer = bar(0.8 * tall);
                let [top, bottom] = [outer.top + 0.6, outer.bottom - 0.6];
                pen.path(&[(left, top), (right, top)], colour, 1.0, 1.2)?;
                pen.path(&[(left, bottom), (right, bottom)], colour, 1.0, 1.2)?;
            }
            LaneState::Undecided => pen.dotted(left + 2.0, right - 2.0, middle, 1.6, 5.0, colour)?,
            LaneState::OnlyOne => pen.hair(left, right, middle, pen.palette.soft)?,
            LaneState::NotCompared => slashes(pen, bar(0.5 * tall))?,
        }
    }
    Ok(())
}

/// Sparse slanted strokes: nothing is said here.
fn slashes<DB: DrawingBackend>(pen: &mut Pen<'_, DB>, rect: Rect) -> Outcome<DB> {
    let rise = rect.bottom - rect.top;
    let mut x = rect.left + 3.0;
    while x + rise < rect.right {
        pen.path(&[(x, rect.bottom), (x + rise, rect.top)], pen.palette.soft, 0.7, 0.8)?;
        x += 12.0;
    }
    Ok(())
}

/// Draws a triangle.
pub(super) fn draw_arrow<DB: DrawingBackend>(pen: &mut Pen<'_, DB>, arrow: &Arrow) -> Outcome<DB> {
    let half = 0.45 * arrow.size;
    let (base, tip) = if arrow.up { (arrow.y + half, arrow.y - half) } else { (arrow.y - half, arrow.y + half) };
    let corners = [(arrow.x, base), (arrow.x + arrow.size, base), (arrow.x + 0.5 * arrow.size, tip)];
    let colour = pen.colour(arrow.tone);
    pen.area(&corners, colour, 1.0)
}
