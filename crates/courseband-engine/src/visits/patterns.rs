//! Subjects of one group seen at the same visits, reduced to their number, mean and products.

use super::VisitsError;
use crate::usual::Panel;
use nalgebra::{DMatrix, DVector};

/// Subjects of one group with values at exactly the visits `seen`, in internal units.
#[derive(Clone, Debug)]
pub(super) struct Pattern {
    pub(super) group: usize,
    /// Visits with a value, ascending; k of them.
    pub(super) seen: Vec<usize>,
    /// Number of subjects.
    pub(super) count: f64,
    /// Their mean, k.
    pub(super) mean: DVector<f64>,
    /// Sums of squares and products about that mean, k x k.
    pub(super) products: DMatrix<f64>,
}

/// Everything the criterion needs of the data.
#[derive(Clone, Debug)]
pub(super) struct Reduced {
    pub(super) patterns: Vec<Pattern>,
    pub(super) groups: usize,
    pub(super) visits: usize,
    /// Values.
    pub(super) rows: usize,
    /// Subjects with a value.
    pub(super) subjects: usize,
    /// Values in each cell, group by group, one entry per visit.
    pub(super) counts: Vec<Vec<usize>>,
    /// Subtracted from every value.
    pub(super) centre: f64,
    /// Every value less the centre is divided by it.
    pub(super) scale: f64,
    /// Pooled variance around the cell means at each visit, internal unit.
    pub(super) variances: Vec<f64>,
}

impl Reduced {
    pub(super) fn new(panel: &Panel) -> Result<Self, VisitsError> {
        let visits = panel.times.len();
        let values: Vec<f64> = panel.values.iter().flatten().filter_map(|v| *v).collect();
        if values.iter().any(|v| !v.is_finite()) {
            return Err(VisitsError::NotFinite);
        }
        let centre = values.iter().sum::<f64>() / values.len().max(1) as f64;
        let spread: f64 = values.iter().map(|v| (v - centre) * (v - centre)).sum();
        if !(spread > 0.0 && spread.is_finite()) {
            return Err(VisitsError::NoVariation { visit: 0 });
        }
        let scale = libm::sqrt(spread / values.len() as f64);
        let mut sets: Vec<(usize, Vec<usize>, Vec<DVector<f64>>)> = Vec::new();
        let mut counts = vec![vec![0; visits]; panel.groups];
        for (row, &group) in panel.values.iter().zip(&panel.group_of_subject) {
            let seen: Vec<usize> = (0..visits).filter(|&v| row[v].is_some()).collect();
            if seen.is_empty() {
                continue;
            }
            seen.iter().for_each(|&v| counts[group][v] += 1);
            let y = DVector::from_iterator(seen.len(), row.iter().flatten().map(|y| (y - centre) / scale));
            match sets.iter_mut().find(|(g, s, _)| *g == group && *s == seen) {
                Some((_, _, members)) => members.push(y),
                None => sets.push((group, seen, vec![y])),
            }
        }
        let subjects = sets.iter().map(|(_, _, members)| members.len()).sum();
        let patterns: Vec<Pattern> = sets.into_iter().map(|(g, seen, members)| pattern(g, seen, &members)).collect();
        let groups = panel.groups;
        let rows = values.len();
        let variances = variances(panel, centre, scale, &counts)?;
        Ok(Reduced { patterns, groups, visits, rows, subjects, counts, centre, scale, variances })
    }

    /// Cells with a value: free means.
    pub(super) fn means(&self) -> usize {
        self.counts.iter().flatten().filter(|&&n| n > 0).count()
    }

    /// Two visits that no subject has both of, if there are any.
    pub(super) fn never_together(&self) -> Option<(usize, usize)> {
        let together = |a: usize, b: usize| self.patterns.iter().any(|p| p.seen.contains(&a) && p.seen.contains(&b));
        (0..self.visits).flat_map(|a| (a + 1..self.visits).map(move |b| (a, b))).find(|&(a, b)| !together(a, b))
    }
}

fn pattern(group: usize, seen: Vec<usize>, members: &[DVector<f64>]) -> Pattern {
    let k = seen.len();
    let count = members.len() as f64;
    let mean = members.iter().fold(DVector::zeros(k), |sum, y| sum + y) / count;
    let mut products = DMatrix::zeros(k, k);
    for y in members {
        let away = y - &mean;
        products.ger(1.0, &away, &away, 1.0);
    }
    Pattern { group, seen, count, mean, products }
}

fn variances(panel: &Panel, centre: f64, scale: f64, counts: &[Vec<usize>]) -> Result<Vec<f64>, VisitsError> {
    let at = |visit: usize| {
        let (mut squares, mut size) = (0.0, 0.0_f64);
        for group in 0..panel.groups {
            let values: Vec<f64> = panel.values_at(group, visit).iter().map(|y| (y - centre) / scale).collect();
            let mean = values.iter().sum::<f64>() / values.len().max(1) as f64;
            squares += values.iter().map(|y| (y - mean) * (y - mean)).sum::<f64>();
            size = values.iter().fold(size, |most, y| most.max(libm::fabs(*y)));
        }
        let have: usize = counts.iter().map(|row| row[visit]).sum();
        let cells = counts.iter().filter(|row| row[visit] > 0).count();
        if have <= cells {
            return Err(VisitsError::TooFewAtVisit { visit, have, need: cells + 1 });
        }
        let rounding = 1e-13 * (size + libm::fabs(centre) / scale);
        if squares <= have as f64 * rounding * rounding {
            return Err(VisitsError::NoVariation { visit });
        }
        Ok(squares / (have - cells) as f64)
    };
    (0..panel.times.len()).map(at).collect()
}
