//! One comparison of means per time: what many papers show.

use super::adjust::holm;
use super::two_sample::{MeanComparison, Variances, compare_means};
use super::{Panel, Undefined};

/// The comparison of one pair at one time.
#[derive(Clone, Debug, PartialEq)]
pub struct TimeTest {
    /// The two groups; the difference is second less first.
    pub pair: (usize, usize),
    /// Index into the panel's times.
    pub time: usize,
    /// The comparison, or why there is none.
    pub comparison: Result<MeanComparison, Undefined>,
    /// p-value adjusted by Holm's method over all pairs and times that could be tested.
    pub p_holm: Option<f64>,
}

/// Compares each pair of groups at each time, pair by pair. `level` is that of the unadjusted intervals.
pub fn tests_by_time(panel: &Panel, pairs: &[(usize, usize)], variances: Variances, level: f64) -> Vec<TimeTest> {
    let mut tests = Vec::with_capacity(pairs.len() * panel.times.len());
    for pair in pairs {
        for time in 0..panel.times.len() {
            let (first, second) = (panel.values_at(pair.0, time), panel.values_at(pair.1, time));
            let comparison =
                compare_means(&first, &second, variances, level).map_err(|reason| name_group(reason, *pair));
            tests.push(TimeTest { pair: *pair, time, comparison, p_holm: None });
        }
    }
    let family: Vec<f64> = tests.iter().filter_map(|t| t.comparison.ok().map(|c| c.p)).collect();
    let mut adjusted = holm(&family).into_iter();
    for test in tests.iter_mut().filter(|t| t.comparison.is_ok()) {
        test.p_holm = adjusted.next();
    }
    tests
}

/// Turns sample 0 or 1 of a comparison into the group it came from.
pub(super) fn name_group(reason: Undefined, pair: (usize, usize)) -> Undefined {
    match reason {
        Undefined::TooFewValues { group, have, need } => {
            Undefined::TooFewValues { group: if group == 0 { pair.0 } else { pair.1 }, have, need }
        }
        other => other,
    }
}
