//! Where most subjects lie, where there are too many to draw each.

use crate::source::Traces;

/// Fewer values than this have no range.
const LEAST: usize = 5;
/// Up to so many different times each has its own range.
const OWN_TIMES: usize = 40;
/// Windows of time otherwise.
const WINDOWS: usize = 24;

/// The 10 to 90 % range of a group's values over time: (time, low, high).
///
/// Quantiles interpolate linearly between order statistics (common practice, no source).
pub(super) fn ten_to_ninety(traces: &Traces, group: usize) -> Vec<(f64, f64, f64)> {
    let mut points: Vec<(f64, f64)> = Vec::new();
    for k in 0..traces.len() {
        if let Some((of, rows)) = traces.subject(k)
            && of == group
        {
            points.extend(rows.filter(|p| p.0.is_finite() && p.1.is_finite()));
        }
    }
    points.sort_by(|a, b| a.0.total_cmp(&b.0));
    let (Some(first), Some(last)) = (points.first().map(|p| p.0), points.last().map(|p| p.0)) else {
        return Vec::new();
    };
    let times = points.chunk_by(|a, b| a.0 == b.0).count();
    let width = (last - first) / WINDOWS as f64;
    let window = |t: f64| {
        if times <= OWN_TIMES || width <= 0.0 { t } else { libm::floor((t - first) / width).min(WINDOWS as f64 - 1.0) }
    };
    points.chunk_by(|a, b| window(a.0) == window(b.0)).filter(|run| run.len() >= LEAST).map(range).collect()
}

fn range(run: &[(f64, f64)]) -> (f64, f64, f64) {
    let mut values: Vec<f64> = run.iter().map(|p| p.1).collect();
    values.sort_by(f64::total_cmp);
    let middle = 0.5 * (run[0].0 + run[run.len() - 1].0);
    (middle, quantile(&values, 0.1), quantile(&values, 0.9))
}

fn quantile(ascending: &[f64], share: f64) -> f64 {
    let place = share * (ascending.len() - 1) as f64;
    let below = libm::floor(place) as usize;
    let above = (below + 1).min(ascending.len() - 1);
    ascending[below] + (place - below as f64) * (ascending[above] - ascending[below])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_need_five_values() {
        let mut traces = Traces { offsets: vec![0], ..Traces::default() };
        for k in 0..11_u32 {
            traces.group.push(0);
            traces.time.extend([0.0, 1.0]);
            traces.response.extend([f64::from(k), 10.0 * f64::from(k)]);
            traces.offsets.push(2 * (k + 1));
        }
        assert_eq!(ten_to_ninety(&traces, 0), [(0.0, 1.0, 9.0), (1.0, 10.0, 90.0)]);
        assert_eq!(ten_to_ninety(&traces, 1), []);
    }
}
