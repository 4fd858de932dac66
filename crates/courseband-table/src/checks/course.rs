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
use std::collections::HashSet;

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

/// Finds them, in the order of the observations. `runs`: start and end of each subject.
pub(super) fn far_values(observations: &Observations, runs: &[(usize, usize)]) -> Vec<Far> {
    let measured = Residuals::new(&observations.time, &observations.response, runs);
    let Some(scale) = measured.scale() else { return Vec::new() };
    let candidates: Vec<usize> =
        (0..measured.value.len()).filter(|&at| measured.value[at].abs() > LIMIT * scale).collect();
    if candidates.is_empty() {
        return Vec::new();
    }
    let positive = observations.response.iter().all(|&value| value > 0.0);
    let logs: Option<(Residuals, f64)> = positive
        .then(|| observations.response.iter().map(|&value| libm::log(value)).collect::<Vec<f64>>())
        .map(|logs| Residuals::new(&observations.time, &logs, runs))
        .and_then(|residuals| residuals.scale().map(|scale| (residuals, scale)));
    let mut far: Vec<Far> = measured
        .without_followers(candidates)
        .into_iter()
        .filter(|&at| logs.as_ref().is_none_or(|(logs, scale)| logs.value[at].abs() > LOG_LIMIT * scale))
        .map(|at| Far { at, expected: measured.expected[at] })
        .collect();
    far.sort_by_key(|far| far.at);
    far
}

/// Scaled residuals, zero where there is nothing to compare with.
struct Residuals {
    value: Vec<f64>,
    expected: Vec<f64>,
    /// The two values that each is compared with.
    from: Vec<(u32, u32)>,
}

impl Residuals {
    fn new(time: &[f64], response: &[f64], runs: &[(usize, usize)]) -> Residuals {
        let mut residuals = Residuals {
            value: vec![0.0; time.len()],
            expected: vec![f64::NAN; time.len()],
            from: vec![(0, 0); time.len()],
        };
        for &(start, end) in runs {
            for at in start..end {
                if let Some((a, b)) = neighbours(at, start, end) {
                    residuals.set(at, a, b, time, response);
                }
            }
        }
        residuals
    }

    fn set(&mut self, at: usize, a: usize, b: usize, time: &[f64], response: &[f64]) {
        let w = (time[at] - time[a]) / (time[b] - time[a]);
        // Replicates have no line between them; a far extrapolation says little.
        if !w.is_finite() || w.abs() > 3.0 || time[at] == time[a] || time[at] == time[b] {
            return;
        }
        let expected = (1.0 - w) * response[a] + w * response[b];
        let value = (response[at] - expected) / (1.0 + (1.0 - w) * (1.0 - w) + w * w).sqrt();
        if value.is_finite() {
            self.value[at] = value;
            self.expected[at] = expected;
            self.from[at] = (a as u32, b as u32);
        }
    }

    /// Robust scale; none with fewer than ten residuals or if most are zero.
    fn scale(&self) -> Option<f64> {
        let mut sizes: Vec<f64> = self
            .value
            .iter()
            .zip(&self.expected)
            .filter(|(_, expected)| expected.is_finite())
            .map(|(value, _)| value.abs())
            .collect();
        if sizes.len() < 10 {
            return None;
        }
        let middle = sizes.len() / 2;
        let (_, median, _) = sizes.select_nth_unstable_by(middle, f64::total_cmp);
        Some(1.4826 * *median).filter(|scale| *scale > 0.0)
    }

    /// An odd value makes the residuals large that are computed from it: the largest first, those drop out.
    fn without_followers(&self, mut candidates: Vec<usize>) -> Vec<usize> {
        candidates.sort_by(|&a, &b| self.value[b].abs().total_cmp(&self.value[a].abs()).then(a.cmp(&b)));
        let mut named = HashSet::new();
        candidates.retain(|&at| {
            let (a, b) = self.from[at];
            !named.contains(&(a as usize)) && !named.contains(&(b as usize)) && named.insert(at)
        });
        candidates
    }
}

/// The neighbours in time, or at an end the next two.
fn neighbours(at: usize, start: usize, end: usize) -> Option<(usize, usize)> {
    if end - start < 3 {
        None
    } else if at == start {
        Some((at + 1, at + 2))
    } else if at + 1 == end {
        Some((at - 2, at - 1))
    } else {
        Some((at - 1, at + 1))
    }
}
