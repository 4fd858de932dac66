//! One number per subject, compared by group.

use super::adjust::holm;
use super::by_time::name_group;
use super::one_way::{OneWay, one_way_welch};
use super::two_sample::{MeanComparison, Variances, compare_means};
use super::{Panel, Undefined};

/// How a subject's course becomes one number. Each needs values at two times at least.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SummaryMeasure {
    /// Area under the course (trapezoids) from the subject's first to its last value, in response times time.
    Area,
    /// That area divided by the time from first to last value: a level, fair to subjects seen for less long.
    MeanLevel,
    /// Slope of the least-squares line, in response per time.
    Slope,
}

/// A measure by subject and its comparison between groups.
#[derive(Clone, Debug, PartialEq)]
pub struct SummaryComparison {
    /// One number per subject; none for subjects seen at fewer than two times.
    pub by_subject: Vec<Option<f64>>,
    /// Subjects without a number.
    pub left_out: usize,
    /// Do all groups share one mean? (Welch's F.)
    pub overall: Result<OneWay, Undefined>,
    /// Each pair compared by Welch's method, with the p-value adjusted by Holm's over the pairs.
    pub pairs: Vec<PairComparison>,
}

/// The comparison of one pair of groups.
#[derive(Clone, Debug, PartialEq)]
pub struct PairComparison {
    /// The two groups; the difference is second less first.
    pub pair: (usize, usize),
    /// The comparison, or why there is none.
    pub comparison: Result<MeanComparison, Undefined>,
    /// p-value adjusted by Holm's method over the pairs that could be compared.
    pub p_holm: Option<f64>,
}

/// The measure of one subject from its observed (time, value) points, times increasing.
pub fn summarise(points: &[(f64, f64)], measure: SummaryMeasure) -> Option<f64> {
    let (first, last) = (points.first()?, points.last()?);
    let span = last.0 - first.0;
    if points.len() < 2 || span <= 0.0 {
        return None;
    }
    let area = || points.windows(2).map(|w| (w[1].0 - w[0].0) * 0.5 * (w[0].1 + w[1].1)).sum::<f64>();
    Some(match measure {
        SummaryMeasure::Area => area(),
        SummaryMeasure::MeanLevel => area() / span,
        SummaryMeasure::Slope => slope(points),
    })
}

fn slope(points: &[(f64, f64)]) -> f64 {
    let n = points.len() as f64;
    let centre = points.iter().map(|p| p.0).sum::<f64>() / n;
    let level = points.iter().map(|p| p.1).sum::<f64>() / n;
    let along: f64 = points.iter().map(|p| (p.0 - centre) * (p.1 - level)).sum();
    let squares: f64 = points.iter().map(|p| (p.0 - centre) * (p.0 - centre)).sum();
    along / squares
}

/// Reduces each subject to one number and compares the groups. `level` is that of the unadjusted intervals.
pub fn compare_summaries(
    panel: &Panel,
    measure: SummaryMeasure,
    pairs: &[(usize, usize)],
    level: f64,
) -> SummaryComparison {
    let by_subject: Vec<Option<f64>> = panel
        .values
        .iter()
        .map(|row| {
            let seen = panel.times.iter().zip(row);
            let points: Vec<(f64, f64)> = seen.filter_map(|(t, y)| y.map(|y| (*t, y))).collect();
            summarise(&points, measure)
        })
        .collect();
    let mut groups = vec![Vec::new(); panel.groups];
    for (value, group) in by_subject.iter().zip(&panel.group_of_subject) {
        groups[*group].extend(*value);
    }
    let mut comparisons: Vec<PairComparison> = pairs
        .iter()
        .map(|pair| PairComparison {
            pair: *pair,
            comparison: compare_means(&groups[pair.0], &groups[pair.1], Variances::Unequal, level)
                .map_err(|reason| name_group(reason, *pair)),
            p_holm: None,
        })
        .collect();
    let family: Vec<f64> = comparisons.iter().filter_map(|c| c.comparison.ok().map(|m| m.p)).collect();
    let mut adjusted = holm(&family).into_iter();
    for comparison in comparisons.iter_mut().filter(|c| c.comparison.is_ok()) {
        comparison.p_holm = adjusted.next();
    }
    SummaryComparison {
        left_out: by_subject.iter().filter(|v| v.is_none()).count(),
        by_subject,
        overall: one_way_welch(&groups),
        pairs: comparisons,
    }
}
