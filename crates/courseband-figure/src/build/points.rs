//! Points of curves: inside the support, no more than the pixels can show.

use crate::source::Series;

/// A curve and its band at the grid and the visits within `support`: (time, value, low, high), ascending.
pub(super) fn banded(
    times: [&[f64]; 2],
    values: [&Series; 2],
    lower: [&Series; 2],
    upper: [&Series; 2],
    support: [f64; 2],
) -> Vec<(f64, f64, f64, f64)> {
    let mut points = Vec::new();
    for k in 0..2 {
        for (i, &t) in times[k].iter().enumerate() {
            let at = |series: &Series| series.get(i).copied().flatten().filter(|v| v.is_finite());
            if let (Some(v), Some(l), Some(u)) = (at(values[k]), at(lower[k]), at(upper[k]))
                && t >= support[0]
                && t <= support[1]
            {
                points.push((t, v, l, u));
            }
        }
    }
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    points.dedup_by(|a, b| a.0 == b.0);
    points
}

/// (time, value) of banded points.
pub(super) fn line(points: &[(f64, f64, f64, f64)]) -> Vec<(f64, f64)> {
    points.iter().map(|p| (p.0, p.1)).collect()
}

/// (time, low, high) of banded points.
pub(super) fn band(points: &[(f64, f64, f64, f64)]) -> Vec<(f64, f64, f64)> {
    points.iter().map(|p| (p.0, p.2, p.3)).collect()
}

/// The part of a band from `start` on, beginning exactly there.
pub(super) fn band_from(points: &[(f64, f64, f64)], start: f64) -> Vec<(f64, f64, f64)> {
    let next = points.partition_point(|p| p.0 < start);
    let mut part = Vec::new();
    if next > 0 && points.get(next).is_some_and(|p| p.0 > start) {
        let (a, b) = (points[next - 1], points[next]);
        let share = (start - a.0) / (b.0 - a.0);
        let between = |x: f64, y: f64| x + share * (y - x);
        part.push((start, between(a.1, b.1), between(a.2, b.2)));
    }
    part.extend_from_slice(&points[next..]);
    part
}

/// The first, last, lowest and highest point of each pixel's worth of time, where there are more.
pub(super) fn thinned(points: Vec<(f64, f64)>, pixel: f64) -> Vec<(f64, f64)> {
    if points.len() < 8 || pixel.is_nan() || pixel <= 0.0 {
        return points;
    }
    let start = points[0].0;
    let column = |t: f64| libm::floor((t - start) / pixel);
    let mut kept = Vec::new();
    for run in points.chunk_by(|a, b| column(a.0) == column(b.0)) {
        if run.len() <= 4 {
            kept.extend_from_slice(run);
            continue;
        }
        let mut ends: Vec<usize> = vec![0, run.len() - 1];
        ends.extend((0..run.len()).min_by(|&a, &b| run[a].1.total_cmp(&run[b].1)));
        ends.extend((0..run.len()).max_by(|&a, &b| run[a].1.total_cmp(&run[b].1)));
        ends.sort_unstable();
        ends.dedup();
        kept.extend(ends.into_iter().map(|k| run[k]));
    }
    kept
}

/// After which time a group is under half its size or under five; `None` where it never is before its end.
pub(super) fn few_after(last_times: &[f64], subjects: usize, support: [f64; 2]) -> Option<f64> {
    let few = |left: usize| 2 * left < subjects || left < 5;
    if few(last_times.len()) {
        return Some(support[0]);
    }
    let left_after = |t: f64| last_times.len() - last_times.partition_point(|&last| last <= t);
    last_times.iter().copied().find(|&t| few(left_after(t))).filter(|&t| t < support[1])
}
