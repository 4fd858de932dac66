//! Time to an event: Kaplan-Meier curves and the log-rank test, right-censored.
//!
//! At each distinct event time t with n at risk and d events (a subject censored at t is still at risk at t):
//!
//! ```text
//! S(t)      = product of (1 - d/n)                                       Kaplan & Meier 1958, JASA 53:457
//! Var S(t)  = S(t)^2 sum d / (n (n - d))                                 Greenwood 1926
//! interval  : S^exp(+-z s), s^2 = sum d / (n (n - d)) / (ln S)^2         Kalbfleisch & Prentice 1980, sec. 1.3
//! log-rank  : O_g - E_g with E_g = sum d n_g / n and hypergeometric covariance     Mantel 1966; Peto & Peto 1972
//! ```

use super::Undefined;
use crate::special::{chi2_sf, normal_quantile};
use nalgebra::{DMatrix, DVector};

/// One time at which an event happened.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SurvivalStep {
    /// The time.
    pub time: f64,
    /// Subjects at risk just before it.
    pub at_risk: usize,
    /// Events at it.
    pub events: usize,
    /// Share still without an event just after it.
    pub survival: f64,
    /// Its standard error (Greenwood).
    pub se: f64,
    /// Confidence interval; none once the share is zero.
    pub interval: Option<(f64, f64)>,
}

/// A Kaplan-Meier curve.
#[derive(Clone, Debug, PartialEq)]
pub struct SurvivalCurve {
    /// The steps, in order of time.
    pub steps: Vec<SurvivalStep>,
    /// Subjects.
    pub subjects: usize,
    /// Subjects without an event when last seen, with those times in order.
    pub censored: Vec<f64>,
    /// The first time at which half or fewer are left; none if that is not reached.
    pub median: Option<f64>,
    /// Interval of the median: the times at which the curve's interval holds one half (Brookmeyer & Crowley 1982,
    /// Biometrics 38:29). None for an end that is not reached.
    pub median_interval: (Option<f64>, Option<f64>),
}

/// The curve of one group. `events[i]` is true when subject i had its event at `times[i]`, false when it was last seen
/// without. `level` is that of the pointwise intervals.
///
/// # Panics
/// If `times` and `events` differ in length.
pub fn kaplan_meier(times: &[f64], events: &[bool], level: f64) -> SurvivalCurve {
    assert_eq!(times.len(), events.len(), "one event flag per time");
    let z = normal_quantile(0.5 + 0.5 * level);
    let (mut survival, mut hazard_variance) = (1.0, 0.0);
    let mut steps = Vec::new();
    for time in event_times(times, events) {
        let at_risk = times.iter().filter(|t| **t >= time).count();
        let happened = events_at(time, times, events, |_| true);
        let (n, d) = (at_risk as f64, happened as f64);
        survival *= 1.0 - d / n;
        hazard_variance += d / (n * (n - d));
        let interval = (at_risk > happened).then(|| {
            let s = libm::sqrt(hazard_variance) / libm::fabs(libm::log(survival));
            (libm::pow(survival, libm::exp(z * s)), libm::pow(survival, libm::exp(-z * s)))
        });
        let se = if at_risk > happened { survival * libm::sqrt(hazard_variance) } else { 0.0 };
        steps.push(SurvivalStep { time, at_risk, events: happened, survival, se, interval });
    }
    let mut censored: Vec<f64> = times.iter().zip(events).filter(|(_, event)| !**event).map(|(t, _)| *t).collect();
    censored.sort_by(f64::total_cmp);
    // Products such as (3/4)(2/3) may land a rounding above one half.
    let half = 0.5 + 1e-12;
    let first = |reached: &dyn Fn(&SurvivalStep) -> bool| steps.iter().find(|s| reached(s)).map(|s| s.time);
    let median = first(&|s| s.survival <= half);
    let median_interval = (
        first(&|s| s.interval.is_none_or(|(low, _)| low <= half)),
        first(&|s| s.interval.is_some_and(|(_, high)| high <= half)),
    );
    SurvivalCurve { steps, subjects: times.len(), censored, median, median_interval }
}

/// The log-rank test of equal curves.
#[derive(Clone, Debug, PartialEq)]
pub struct LogRank {
    /// Events seen, by group.
    pub observed: Vec<f64>,
    /// Events expected if all groups shared one curve.
    pub expected: Vec<f64>,
    /// Chi-squared statistic.
    pub chi2: f64,
    /// Its degrees of freedom: groups with subjects, less one.
    pub df: f64,
    /// p-value.
    pub p: f64,
}

/// Compares `groups` groups; `group[i]` is that of subject i. Groups that never have anyone at risk at an event do not count.
///
/// # Errors
/// Only one group has subjects at risk when events happen, or there are no events.
///
/// # Panics
/// If the three slices differ in length.
pub fn log_rank(times: &[f64], events: &[bool], group: &[usize], groups: usize) -> Result<LogRank, Undefined> {
    assert!(times.len() == events.len() && times.len() == group.len(), "one entry per subject");
    let moments = event_times(times, events);
    if moments.is_empty() {
        return Err(Undefined::NoEvents);
    }
    let mut observed = DVector::zeros(groups);
    let mut expected = DVector::zeros(groups);
    let mut covariance = DMatrix::zeros(groups, groups);
    for time in moments {
        let mut at_risk = DVector::<f64>::zeros(groups);
        for (t, g) in times.iter().zip(group) {
            at_risk[*g] += if *t >= time { 1.0 } else { 0.0 };
        }
        for g in 0..groups {
            observed[g] += events_at(time, times, events, |i| group[i] == g) as f64;
        }
        let n = at_risk.sum();
        let d = events_at(time, times, events, |_| true) as f64;
        let share = at_risk / n;
        expected += d * &share;
        if n > 1.0 {
            let scale = d * (n - d) / (n - 1.0);
            covariance += scale * (DMatrix::from_diagonal(&share) - &share * share.transpose());
        }
    }
    let used: Vec<usize> = (0..groups).filter(|g| expected[*g] > 0.0).collect();
    if used.len() < 2 {
        return Err(Undefined::OneGroup);
    }
    // The covariance is singular over all groups; any one of them can be left out.
    let free = &used[1..];
    let gap = DVector::from_fn(free.len(), |i, _| observed[free[i]] - expected[free[i]]);
    let block = DMatrix::from_fn(free.len(), free.len(), |i, j| covariance[(free[i], free[j])]);
    let solved = block.cholesky().ok_or(Undefined::NoVariation)?.solve(&gap);
    let (chi2, df) = (gap.dot(&solved), free.len() as f64);
    Ok(LogRank {
        observed: observed.iter().copied().collect(),
        expected: expected.iter().copied().collect(),
        chi2,
        df,
        p: chi2_sf(chi2, df),
    })
}

/// Distinct event times in order.
fn event_times(times: &[f64], events: &[bool]) -> Vec<f64> {
    let mut distinct: Vec<f64> = times.iter().zip(events).filter(|(_, event)| **event).map(|(t, _)| *t).collect();
    distinct.sort_by(f64::total_cmp);
    distinct.dedup();
    distinct
}

/// Events at `time` among the subjects that `wanted` picks by index.
fn events_at(time: f64, times: &[f64], events: &[bool], wanted: impl Fn(usize) -> bool) -> usize {
    (0..times.len()).filter(|i| events[*i] && times[*i] == time && wanted(*i)).count()
}
