//! Values far from their subject's course.
//!
//! Each value is compared with the straight line through its two neighbours in
//! time of the same subject (at the ends: through the next two). The residual
//! is divided by what it would spread by if all values had the same error:
//!
//! ```text
//! r = (y - (1 - w) a - w b) / sqrt(1 + (1 - w)^2 + w^2),   w = (t - t_a) / (t_b - t_a)
//! ```
//!
//! Its scale over the table is 1.4826 times the median of |r|, which is the
//! standard deviation for normal errors (Rousseeuw and Croux 1993, J Am Stat
//! Assoc 88:1273, cited from memory). A value is named only if it is extreme
//! as measured and, where all values are positive, also as a ratio: so neither
//! a spread that grows with the mean nor a steep course is taken for an error.

use crate::observations::Observations;

/// Scales beyond which a value is named, as measured and as a logarithm.
const LIMIT: f64 = 8.0;
const LOG_LIMIT: f64 = 6.0;

/// A value far from its subject's course.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Far {
    /// Index into the observations.
    pub(super) at: usize,
    /// What would lie on the line between the neighbours.
    pub(super) expected: f64,
}

/// At most this many values of one subject are named.
const MOST: usize = 20;

/// Finds them, in the order of the observations. `runs`: start and end of each subject.
pub(super) fn far_values(observations: &Observations, runs: &[(usize, usize)]) -> Vec<Far> {
    let measured = Courses { time: &observations.time, response: &observations.response };
    let Some(scale) = measured.scale(runs) else { return Vec::new() };
    let limit = LIMIT * scale;
    let has_far = |&&(start, end): &&(usize, usize)| {
        let all: Vec<usize> = (start..end).collect();
        (0..all.len()).any(|p| measured.size(&all, p) > limit)
    };
    let suspects: Vec<(usize, usize)> = runs.iter().filter(has_far).copied().collect();
    if suspects.is_empty() {
        return Vec::new();
    }
    let positive = observations.response.iter().all(|&value| value > 0.0);
    let logs: Option<Vec<f64>> = positive.then(|| observations.response.iter().map(|&y| libm::log(y)).collect());
    let logs = logs.as_deref().map(|response| Courses { time: &observations.time, response });
    let log_limit = logs.as_ref().and_then(|logs| logs.scale(runs)).map(|scale| LOG_LIMIT * scale);
    let mut far: Vec<Far> = Vec::new();
    for (start, end) in suspects {
        let mut left: Vec<usize> = (start..end).collect();
        for _ in 0..MOST {
            let Some(p) = measured.culprit(&left, limit) else { break };
            let beyond = match (&logs, log_limit) {
                (Some(logs), Some(limit)) => logs.size(&left, p) > limit,
                _ => true,
            };
            if let (true, Some(expected)) = (beyond, measured.expected(&left, p)) {
                far.push(Far { at: left[p], expected });
            }
            left.remove(p);
        }
    }
    far.sort_by_key(|far| far.at);
    far
}

/// All subjects' values over time.
struct Courses<'a> {
    time: &'a [f64],
    response: &'a [f64],
}

impl Courses<'_> {
    /// The weight of the second neighbour; `None` for replicates and far extrapolations.
    fn weight(&self, left: &[usize], p: usize) -> Option<(usize, usize, f64)> {
        let (a, b) = neighbours(p, left.len())?;
        let (at, a, b) = (left[p], left[a], left[b]);
        let w = (self.time[at] - self.time[a]) / (self.time[b] - self.time[a]);
        let usable = w.is_finite() && w.abs() <= 3.0 && self.time[at] != self.time[a] && self.time[at] != self.time[b];
        usable.then_some((a, b, w))
    }

    /// What would lie on the line between the neighbours. `left`: the subject's observations looked at.
    fn expected(&self, left: &[usize], p: usize) -> Option<f64> {
        let (a, b, w) = self.weight(left, p)?;
        Some((1.0 - w) * self.response[a] + w * self.response[b]).filter(|value| value.is_finite())
    }

    /// |r|, zero where there is nothing to compare with.
    fn size(&self, left: &[usize], p: usize) -> f64 {
        let Some((a, b, w)) = self.weight(left, p) else { return 0.0 };
        let expected = (1.0 - w) * self.response[a] + w * self.response[b];
        let size = (self.response[left[p]] - expected).abs() / (1.0 + (1.0 - w) * (1.0 - w) + w * w).sqrt();
        if size.is_finite() { size } else { 0.0 }
    }

    /// Robust scale; none with fewer than ten residuals or if most are zero.
    fn scale(&self, runs: &[(usize, usize)]) -> Option<f64> {
        let mut sizes = Vec::with_capacity(self.time.len());
        for &(start, end) in runs {
            let all: Vec<usize> = (start..end).collect();
            let of = |p: usize| self.weight(&all, p).map(|_| self.size(&all, p));
            sizes.extend((0..all.len()).filter_map(of));
        }
        if sizes.len() < 10 {
            return None;
        }
        let middle = sizes.len() / 2;
        let (_, median, _) = sizes.select_nth_unstable_by(middle, f64::total_cmp);
        Some(1.4826 * *median).filter(|scale| *scale > 0.0)
    }

    /// The value to blame for the largest residual over the limit.
    ///
    /// A residual says that one of three values is odd, not which: at an end it is the same
    /// for all three. To blame is the one without which the neighbourhood is smoothest, and
    /// of equals the one farthest from the middle of the subject's values.
    fn culprit(&self, left: &[usize], limit: f64) -> Option<usize> {
        let sizes: Vec<f64> = (0..left.len()).map(|p| self.size(left, p)).collect();
        let worst = (0..left.len()).filter(|&p| sizes[p] > limit).max_by(|&p, &q| sizes[p].total_cmp(&sizes[q]))?;
        let (a, b) = neighbours(worst, left.len())?;
        let mut values: Vec<f64> = left.iter().map(|&at| self.response[at]).collect();
        let middle = values.len() / 2;
        let median = *values.select_nth_unstable_by(middle, f64::total_cmp).1;
        let rank = |p: usize| {
            let (from, to) = (worst.saturating_sub(4), (worst + 5).min(left.len()));
            let without: Vec<usize> = (from..to).filter(|&q| q != p).map(|q| left[q]).collect();
            let rough = (0..without.len()).map(|q| self.size(&without, q)).fold(0.0, f64::max);
            // What is under the limit is smooth enough.
            (rough.max(limit), -(self.response[left[p]] - median).abs())
        };
        let suspects = [worst, a, b].into_iter().filter(|&p| sizes[p] > limit);
        suspects.min_by(|&p, &q| {
            let (p, q) = (rank(p), rank(q));
            p.0.total_cmp(&q.0).then(p.1.total_cmp(&q.1))
        })
    }
}

/// The neighbours of one of so many in time, or at an end the next two.
fn neighbours(at: usize, count: usize) -> Option<(usize, usize)> {
    if count < 3 {
        None
    } else if at == 0 {
        Some((1, 2))
    } else if at + 1 == count {
        Some((at - 2, at - 1))
    } else {
        Some((at - 1, at + 1))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Eight subjects that fall steadily, with a little unevenness; one value is changed.
    fn named(subject: usize, visit: usize, value: f64) -> Vec<usize> {
        let (visits, subjects) = (6, 8);
        let index = |s: usize, v: usize| s * visits + v;
        let mut observations = Observations::default();
        for s in 0..subjects {
            for v in 0..visits {
                observations.time.push([0.0, 2.0, 4.0, 7.0, 10.0, 14.0][v]);
                observations.response.push(50.0 - 2.0 * v as f64 + ((s * 7 + v * 3) % 5) as f64 * 0.3);
            }
        }
        observations.response[index(subject, visit)] = value;
        let runs: Vec<(usize, usize)> = (0..subjects).map(|s| (index(s, 0), index(s + 1, 0))).collect();
        far_values(&observations, &runs).iter().map(|far| far.at).collect()
    }

    #[test]
    fn the_odd_value_is_named_and_not_its_neighbour() {
        for visit in 0..6 {
            for value in [0.0, 5.1, 480.0, -40.0] {
                assert_eq!(named(3, visit, value), [18 + visit], "visit {visit}, value {value}");
            }
        }
        assert_eq!(named(3, 2, 46.5), [0usize; 0]);
    }
}
