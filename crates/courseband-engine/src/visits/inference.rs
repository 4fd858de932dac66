//! Means, differences and overall tests of a fit, with their degrees of freedom.

use super::VisitFit;
use super::criterion::add_block;
use crate::special::{f_sf, t_quantile, t_sf};
use crate::usual::{holm, satterthwaite_df};
use nalgebra::{DMatrix, DVector};

/// An estimate with its t test against zero.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct VisitEstimate {
    /// The estimate.
    pub estimate: f64,
    /// Its standard error.
    pub se: f64,
    /// Satterthwaite's degrees of freedom.
    pub df: f64,
    /// Estimate over standard error.
    pub t: f64,
    /// Two-sided p-value.
    pub p: f64,
    /// Lower and upper end of the confidence interval.
    pub interval: (f64, f64),
}

/// One pair of groups at one visit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct VisitDifference {
    /// The two groups; the difference is second less first.
    pub pair: (usize, usize),
    /// Index into the panel's times.
    pub visit: usize,
    /// The difference; none where a group has no value at this visit.
    pub estimate: Option<VisitEstimate>,
    /// p-value adjusted by Holm's method over all pairs and visits with a difference.
    pub p_holm: Option<f64>,
}

/// A Wald F test of several contrasts together.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct VisitTest {
    /// F statistic.
    pub f: f64,
    /// Number of contrasts.
    pub df: f64,
    /// Degrees of freedom for error (Fai & Cornelius).
    pub df_error: f64,
    /// p-value.
    pub p: f64,
}

/// Why an overall test cannot be computed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum VisitTestUndefined {
    /// There is one group.
    OneGroup,
    /// A group has no value at a visit, so its mean there is unknown.
    EmptyCell {
        /// The group.
        group: usize,
        /// The visit.
        visit: usize,
    },
    /// A part of the test has two degrees of freedom or fewer: no F distribution has its mean.
    TooFewDegrees {
        /// The smallest of them.
        least: f64,
    },
}

/// Weights on the group means, one vector of V per group.
type Weights = Vec<DVector<f64>>;

impl VisitFit {
    /// A weighted sum of means, each weight with its group and visit. None where a weighted cell has no value.
    ///
    /// # Panics
    /// If a group or visit does not exist.
    #[must_use]
    pub fn weighted(&self, terms: &[(usize, usize, f64)], level: f64) -> Option<VisitEstimate> {
        let mut weights = self.no_weights();
        for &(group, visit, weight) in terms {
            if weight != 0.0 && self.data.counts[group][visit] == 0 {
                return None;
            }
            weights[group][visit] += weight;
        }
        let estimate = self.value(&weights);
        let total: f64 = terms.iter().map(|(_, _, weight)| weight).sum();
        let variance = self.covariance_of(&weights, &weights);
        let df = self.df(&weights, variance)?;
        let estimate = estimate * self.data.scale + total * self.data.centre;
        let se = libm::sqrt(variance) * self.data.scale;
        let t = estimate / se;
        let half = t_quantile(0.5 + 0.5 * level, df) * se;
        let p = (2.0 * t_sf(libm::fabs(t), df)).min(1.0);
        Some(VisitEstimate { estimate, se, df, t, p, interval: (estimate - half, estimate + half) })
    }

    /// Mean of a group at a visit; `level` is that of the interval.
    #[must_use]
    pub fn mean(&self, group: usize, visit: usize, level: f64) -> Option<VisitEstimate> {
        self.weighted(&[(group, visit, 1.0)], level)
    }

    /// Each pair at each visit, pair by pair. `level` is that of the unadjusted intervals.
    #[must_use]
    pub fn differences(&self, pairs: &[(usize, usize)], level: f64) -> Vec<VisitDifference> {
        let mut all = Vec::with_capacity(pairs.len() * self.data.visits);
        for &pair in pairs {
            for visit in 0..self.data.visits {
                let estimate = self.weighted(&[(pair.1, visit, 1.0), (pair.0, visit, -1.0)], level);
                all.push(VisitDifference { pair, visit, estimate, p_holm: None });
            }
        }
        let family: Vec<f64> = all.iter().filter_map(|d| d.estimate.map(|e| e.p)).collect();
        let mut adjusted = holm(&family).into_iter();
        all.iter_mut().filter(|d| d.estimate.is_some()).for_each(|d| d.p_holm = adjusted.next());
        all
    }

    /// Do the groups share one mean, averaged over visits with equal weights?
    ///
    /// # Errors
    /// Says why there is no test.
    pub fn groups_test(&self) -> Result<VisitTest, VisitTestUndefined> {
        let even = DVector::from_element(self.data.visits, 1.0 / self.data.visits as f64);
        self.test(self.between_groups()?.iter().map(|h| spread(h, &even)).collect())
    }

    /// Do the visits share one mean, averaged over groups with equal weights?
    ///
    /// # Errors
    /// Says why there is no test.
    pub fn visits_test(&self) -> Result<VisitTest, VisitTestUndefined> {
        self.refuse_empty()?;
        let even = DVector::from_element(self.data.groups, 1.0 / self.data.groups as f64);
        self.test(orthonormal(self.data.visits).iter().map(|w| spread(&even, w)).collect())
    }

    /// Are the differences between groups the same at all visits?
    ///
    /// # Errors
    /// Says why there is no test.
    pub fn groups_by_visits_test(&self) -> Result<VisitTest, VisitTestUndefined> {
        let within = orthonormal(self.data.visits);
        let between = self.between_groups()?;
        self.test(between.iter().flat_map(|h| within.iter().map(move |w| spread(h, w))).collect())
    }

    fn between_groups(&self) -> Result<Vec<DVector<f64>>, VisitTestUndefined> {
        if self.data.groups < 2 {
            return Err(VisitTestUndefined::OneGroup);
        }
        self.refuse_empty()?;
        Ok(orthonormal(self.data.groups))
    }

    fn refuse_empty(&self) -> Result<(), VisitTestUndefined> {
        for (group, row) in self.data.counts.iter().enumerate() {
            if let Some(visit) = row.iter().position(|&n| n == 0) {
                return Err(VisitTestUndefined::EmptyCell { group, visit });
            }
        }
        Ok(())
    }

    /// F = b'C'(C V C')^-1 C b / q; its parts along the eigenvectors of C V C' are independent t statistics.
    fn test(&self, contrasts: Vec<Weights>) -> Result<VisitTest, VisitTestUndefined> {
        let q = contrasts.len();
        let values = DVector::from_iterator(q, contrasts.iter().map(|c| self.value(c)));
        let covariance = DMatrix::from_fn(q, q, |i, j| self.covariance_of(&contrasts[i], &contrasts[j]));
        let eigen = covariance.symmetric_eigen();
        let (mut f, mut expected, mut least) = (0.0, 0.0, f64::INFINITY);
        for k in 0..q {
            let direction = eigen.eigenvectors.column(k);
            let along: f64 = direction.dot(&values);
            f += along * along / eigen.eigenvalues[k] / q as f64;
            let mut weights = self.no_weights();
            for (contrast, &share) in contrasts.iter().zip(direction.iter()) {
                weights.iter_mut().zip(contrast).for_each(|(sum, part)| sum.axpy(share, part, 1.0));
            }
            let df = self.df(&weights, eigen.eigenvalues[k]).unwrap_or(0.0);
            least = if df < least { df } else { least };
            expected += df / (df - 2.0);
        }
        if least <= 2.0 + 1e-9 {
            return Err(VisitTestUndefined::TooFewDegrees { least });
        }
        let q = q as f64;
        let df_error = 2.0 * expected / (expected - q);
        Ok(VisitTest { f, df: q, df_error, p: f_sf(f, q, df_error) })
    }

    fn no_weights(&self) -> Weights {
        vec![DVector::zeros(self.data.visits); self.data.groups]
    }

    fn value(&self, weights: &Weights) -> f64 {
        weights.iter().zip(&self.means).map(|(w, m)| w.dot(m)).sum()
    }

    fn covariance_of(&self, a: &Weights, b: &Weights) -> f64 {
        (0..self.data.groups).map(|g| a[g].dot(&(&self.mean_covariance[g] * &b[g]))).sum()
    }

    /// Satterthwaite's degrees of freedom. The variance v = w'A^-1 w moves with Sigma by
    /// dv = sum n_P u_P' dSigma u_P, u_P = S_P (A_g^-1 w_g) at the visits of P.
    fn df(&self, weights: &Weights, variance: f64) -> Option<f64> {
        let v = self.data.visits;
        let mut slope = DMatrix::zeros(v, v);
        for (p, inverse) in self.data.patterns.iter().zip(&self.inverses) {
            let spread = &self.mean_covariance[p.group] * &weights[p.group];
            let u = inverse * DVector::from_fn(p.seen.len(), |k, _| spread[p.seen[k]]);
            add_block(&mut slope, &p.seen, &(&u * u.transpose() * (2.0 * p.count)));
        }
        let all = self.covariance.map.chain(&self.covariance.theta, &slope);
        let gradient: Vec<f64> = self.free.iter().map(|&k| all[k]).collect();
        satterthwaite_df(variance, &gradient, self.parameters.as_slice())
    }
}

/// Orthonormal contrasts of the levels: the test then does not depend on the order of the levels, since another such set
/// is a rotation of this one and has the same eigenvectors.
fn orthonormal(levels: usize) -> Vec<DVector<f64>> {
    let contrast = |k: usize| {
        let before = k as f64;
        let length = libm::sqrt(before * (before + 1.0));
        DVector::from_fn(levels, |level, _| match level {
            l if l < k => -1.0 / length,
            l if l == k => before / length,
            _ => 0.0,
        })
    };
    (1..levels).map(contrast).collect()
}

/// Weights that are products of a weight per group and a weight per visit.
fn spread(groups: &DVector<f64>, visits: &DVector<f64>) -> Weights {
    groups.iter().map(|weight| visits * *weight).collect()
}
