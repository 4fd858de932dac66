//! What the values look like: a distribution or scale to try, with its reason.

use crate::cohort::Cohort;
use crate::plan::{Distribution, Plan, Transform};
use serde::Serialize;

/// A distribution or scale that the values suggest.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Proposal {
    /// The distribution.
    pub distribution: Distribution,
    /// The scale.
    pub transform: Transform,
    /// Why, in one sentence.
    pub reason: String,
}

/// Fewer values than this suggest nothing.
const FEWEST: usize = 20;

/// `None` where the plan has chosen already, or where the values suggest nothing else. Rules of thumb (common practice,
/// no source): kind of numbers first, then how the spread of the groups' values at a visit grows with their mean.
pub(crate) fn proposal(cohort: &Cohort, plan: &Plan) -> Option<Proposal> {
    let response = &plan.response;
    if response.distribution != Distribution::Normal || response.transform == Transform::Log || cohort.has_limits() {
        return None;
    }
    let values: Vec<f64> = cohort.data.subjects.iter().flat_map(|s| s.responses.iter().copied()).collect();
    let (low, high) =
        (values.iter().copied().fold(f64::INFINITY, f64::min), values.iter().copied().fold(0.0, f64::max));
    if values.len() < FEWEST || low < 0.0 || high <= low {
        return None;
    }
    let say = |distribution: Distribution, transform: Transform, reason: String| {
        Some(Proposal { distribution, transform, reason })
    };
    let whole = values.iter().all(|y| *y == libm::floor(*y));
    let zeros = values.iter().filter(|y| **y == 0.0).count();
    let power = power_of_spread(cohort);
    if whole && high == 1.0 {
        return say(Distribution::Binomial, Transform::Identity, "All values are 0 or 1.".into());
    }
    if whole && high <= 200.0 {
        let wide = surplus(cohort) > 1.5;
        let (kind, why) = if wide {
            (Distribution::NegativeBinomial, "and scatter more than chance alone makes counts scatter")
        } else {
            (Distribution::Poisson, "and scatter about as counts do by chance")
        };
        return say(kind, Transform::Identity, format!("All values are whole numbers from {low} to {high}, {why}."));
    }
    if zeros > 0 && 20 * zeros >= values.len() {
        let reason = format!("{zeros} of {} values are exactly zero, the rest lie above.", values.len());
        return say(Distribution::Tweedie, Transform::Identity, reason);
    }
    if zeros == 0 && high < 1.0 && low < 0.1 && high > 0.3 {
        return say(Distribution::Beta, Transform::Identity, "All values are shares between 0 and 1.".into());
    }
    let power = power.filter(|p| *p > 0.6 && zeros == 0)?;
    let reason = format!("The spread of the values grows with their mean, about as its power {power:.1}.");
    say(Distribution::Normal, Transform::Log, reason)
}

/// Slope of the log of the SD on the log of the mean over the groups' values at shared visits; `None` where there are too few
/// or the means hardly differ.
fn power_of_spread(cohort: &Cohort) -> Option<f64> {
    let cells = cells(cohort);
    let points: Vec<(f64, f64)> = cells
        .iter()
        .filter(|(mean, square)| *mean > 0.0 && *square > 0.0)
        .map(|(mean, square)| (libm::log(*mean), 0.5 * libm::log(*square)))
        .collect();
    let n = points.len() as f64;
    let (mx, my) = (points.iter().map(|p| p.0).sum::<f64>() / n, points.iter().map(|p| p.1).sum::<f64>() / n);
    let sxx: f64 = points.iter().map(|p| (p.0 - mx) * (p.0 - mx)).sum();
    // Means that differ by half of themselves at least.
    (points.len() >= 4 && sxx / n > 0.06).then(|| points.iter().map(|p| (p.0 - mx) * (p.1 - my)).sum::<f64>() / sxx)
}

/// Mean and variance of the values of every group at every visit with four or more.
fn cells(cohort: &Cohort) -> Vec<(f64, f64)> {
    let mut cells: std::collections::BTreeMap<(usize, u64), Vec<f64>> = std::collections::BTreeMap::new();
    for subject in &cohort.data.subjects {
        for (t, y) in subject.times.iter().zip(&subject.responses) {
            cells.entry((subject.group, t.to_bits())).or_default().push(*y);
        }
    }
    let moments = |own: &Vec<f64>| {
        let n = own.len() as f64;
        let mean = own.iter().sum::<f64>() / n;
        (mean, own.iter().map(|y| (y - mean) * (y - mean)).sum::<f64>() / (n - 1.0))
    };
    cells.values().filter(|own| own.len() >= 4).map(moments).collect()
}

/// Variance over mean of counts, on average: 1 for Poisson counts.
fn surplus(cohort: &Cohort) -> f64 {
    let ratios: Vec<f64> =
        cells(cohort).into_iter().filter(|(mean, _)| *mean > 0.0).map(|(mean, square)| square / mean).collect();
    ratios.iter().sum::<f64>() / ratios.len().max(1) as f64
}
