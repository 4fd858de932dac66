//! Where the knots of a spline are.

use crate::model::Dimension;

/// Largest number of knots: beyond it a dense basis costs more than it shows.
pub(crate) const MOST_KNOTS: usize = 400;

/// Distinct finite values, ascending.
pub(crate) fn distinct_sorted(values: impl Iterator<Item = f64>) -> Vec<f64> {
    let mut sorted: Vec<f64> = values.collect();
    sorted.sort_by(f64::total_cmp);
    sorted.dedup();
    sorted
}

/// Knots at equally spaced quantiles of the distinct times, ends included
/// (quantile by linear interpolation between order statistics).
///
/// `distinct` ascending, at least two values. Returns at least two knots,
/// strictly ascending, at most one per distinct time and at most 400.
pub(crate) fn place_knots(distinct: &[f64], dimension: Dimension) -> Vec<f64> {
    let available = distinct.len();
    let wanted = match dimension {
        Dimension::Auto => 20,
        Dimension::Full => available,
        Dimension::Knots(count) => count.max(2),
    };
    let count = wanted.min(available).min(MOST_KNOTS);
    if count == available {
        return distinct.to_vec();
    }
    let last = (available - 1) as f64;
    let mut knots: Vec<f64> = (0..count)
        .map(|k| {
            let position = last * k as f64 / (count - 1) as f64;
            let below = (position as usize).min(available - 2);
            let share = position - below as f64;
            distinct[below] + share * (distinct[below + 1] - distinct[below])
        })
        .collect();
    knots[count - 1] = distinct[available - 1];
    knots.dedup();
    knots
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn few_times_are_all_knots() {
        let times = [0.0, 1.0, 4.0, 9.0];
        assert_eq!(place_knots(&times, Dimension::Auto), times);
        assert_eq!(place_knots(&times, Dimension::Full), times);
    }

    #[test]
    fn many_times_give_quantiles_with_both_ends() {
        let times: Vec<f64> = (0..=100).map(f64::from).collect();
        let knots = place_knots(&times, Dimension::Knots(5));
        assert_eq!(knots, [0.0, 25.0, 50.0, 75.0, 100.0]);
        assert_eq!(place_knots(&times, Dimension::Auto).len(), 20);
    }
}
