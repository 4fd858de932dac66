//! Clipping: the drawing library moves points outside to the edge instead,
//! which would draw values that nobody observed.

use crate::layout::Rect;

/// The parts of a line inside a rectangle.
pub(super) fn line_inside(points: &[(f64, f64)], rect: Rect) -> Vec<Vec<(f64, f64)>> {
    let mut parts: Vec<Vec<(f64, f64)>> = Vec::new();
    for pair in points.windows(2) {
        let Some((a, b)) = segment_inside(pair[0], pair[1], rect) else { continue };
        match parts.last_mut() {
            Some(part) if part.last() == Some(&a) => part.push(b),
            _ => parts.push(vec![a, b]),
        }
    }
    parts
}

/// The part of a segment inside a rectangle (Liang and Barsky 1984).
fn segment_inside(a: (f64, f64), b: (f64, f64), rect: Rect) -> Option<((f64, f64), (f64, f64))> {
    let (dx, dy) = (b.0 - a.0, b.1 - a.1);
    let (mut enter, mut leave): (f64, f64) = (0.0, 1.0);
    let edges = [(-dx, a.0 - rect.left), (dx, rect.right - a.0), (-dy, a.1 - rect.top), (dy, rect.bottom - a.1)];
    for (step, room) in edges {
        if step == 0.0 {
            if room < 0.0 {
                return None;
            }
        } else if step < 0.0 {
            enter = enter.max(room / step);
        } else {
            leave = leave.min(room / step);
        }
    }
    let at = |share: f64| (a.0 + share * dx, a.1 + share * dy);
    let start = if enter == 0.0 { a } else { at(enter) };
    let end = if leave == 1.0 { b } else { at(leave) };
    (enter <= leave).then_some((start, end))
}

/// The part of an area between two heights (Sutherland and Hodgman 1974). Areas do not reach beyond
/// the time axis.
pub(super) fn area_inside(corners: Vec<(f64, f64)>, rect: Rect) -> Vec<(f64, f64)> {
    let below = half(corners, |p| p.1 - rect.top);
    half(below, |p| rect.bottom - p.1)
}

fn half(corners: Vec<(f64, f64)>, depth: impl Fn(&(f64, f64)) -> f64) -> Vec<(f64, f64)> {
    let mut kept = Vec::new();
    for (k, b) in corners.iter().enumerate() {
        let a = &corners[(k + corners.len() - 1) % corners.len()];
        let (da, db) = (depth(a), depth(b));
        if (da < 0.0) != (db < 0.0) {
            let share = da / (da - db);
            kept.push((a.0 + share * (b.0 - a.0), a.1 + share * (b.1 - a.1)));
        }
        if db >= 0.0 {
            kept.push(*b);
        }
    }
    kept
}

#[cfg(test)]
mod tests {
    use super::*;

    const RECT: Rect = Rect { left: 0.0, right: 10.0, top: 0.0, bottom: 10.0 };

    #[test]
    fn a_line_leaves_and_comes_back() {
        let parts = line_inside(&[(0.0, 5.0), (4.0, -3.0), (8.0, 5.0), (9.0, 5.0)], RECT);
        assert_eq!(parts, [vec![(0.0, 5.0), (2.5, 0.0)], vec![(5.5, 0.0), (8.0, 5.0), (9.0, 5.0)]]);
        assert_eq!(line_inside(&[(0.0, -5.0), (4.0, -3.0)], RECT), Vec::<Vec<(f64, f64)>>::new());
    }

    #[test]
    fn an_area_is_cut_not_squeezed() {
        let cut = area_inside(vec![(0.0, 5.0), (4.0, -3.0), (8.0, 5.0)], RECT);
        assert_eq!(cut, [(0.0, 5.0), (2.5, 0.0), (5.5, 0.0), (8.0, 5.0)]);
        assert!(area_inside(vec![(0.0, -5.0), (4.0, -3.0), (8.0, -5.0)], RECT).is_empty());
    }
}
