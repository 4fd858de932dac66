//! The restricted likelihood of an unstructured covariance, its gradient, and a start by expectation-maximisation.
//!
//! For patterns P of visits seen, n_P subjects each, S_P the inverse of Sigma's block, R_P the products of residuals:
//!
//! ```text
//! A_g = sum over the group's P of n_P E'S_P E           m_g = A_g^-1 sum n_P E'S_P ybar_P
//! f   = 1/2 [ (N - p) log 2 pi + sum n_P log|Sigma_P| + sum log|A_g| + sum tr(S_P R_P) ]  = minus the log-REML
//! K   = sum E' (n_P S_P - n_P S_P C_P S_P - S_P R_P S_P) E,   C_P the block of A_g^-1;    df = 1/2 tr(K dSigma)
//! ```
//!
//! (Harville 1974, Biometrika 61:383; the derivative as in Lindstrom & Bates 1988, JASA 83:1014, from memory.)
//! Expectation-maximisation with this K is `Sigma - Sigma K Sigma / S` (Dempster, Laird & Rubin 1977 applied to normal
//! rows with gaps): it stays positive definite and needs no step length.
//!
//! The search runs over T in Sigma = (L0 T)(L0 T)', L0 the Cholesky factor of the start: T begins at the identity, so all
//! directions are alike in size. T is lower triangular, its diagonal on the log scale.

use super::patterns::Reduced;
use crate::optimise::Objective;
use nalgebra::{DMatrix, DVector};

/// What one covariance gives.
pub(super) struct State {
    /// Minus the log restricted likelihood, internal unit.
    pub(super) value: f64,
    /// K, V x V.
    pub(super) slope: DMatrix<f64>,
    /// Means by group, V each; zero in cells without a value.
    pub(super) means: Vec<DVector<f64>>,
    /// Covariance of the means by group, V x V; cells without a value are not to be read.
    pub(super) mean_covariance: Vec<DMatrix<f64>>,
    /// S_P by pattern.
    pub(super) inverses: Vec<DMatrix<f64>>,
}

/// Everything at one covariance; none where it is not positive definite.
pub(super) fn evaluate(data: &Reduced, sigma: &DMatrix<f64>) -> Option<State> {
    let v = data.visits;
    let mut information = vec![DMatrix::<f64>::zeros(v, v); data.groups];
    let mut pulls = vec![DVector::<f64>::zeros(v); data.groups];
    let mut inverses = Vec::with_capacity(data.patterns.len());
    let mut twice = (data.rows - data.means()) as f64 * libm::log(2.0 * core::f64::consts::PI);
    for p in &data.patterns {
        let factor = block(sigma, &p.seen).cholesky()?;
        twice += p.count * log_determinant(&factor.l_dirty().diagonal());
        let inverse = factor.inverse();
        add_block(&mut information[p.group], &p.seen, &(&inverse * p.count));
        let pull = &inverse * &p.mean * p.count;
        p.seen.iter().enumerate().for_each(|(k, &visit)| pulls[p.group][visit] += pull[k]);
        inverses.push(inverse);
    }
    let (mut means, mut mean_covariance) = (Vec::new(), Vec::new());
    for (g, mut a) in information.into_iter().enumerate() {
        // A cell without a value has no mean: a one on its diagonal leaves everything else as it is.
        (0..v).filter(|&visit| data.counts[g][visit] == 0).for_each(|visit| a[(visit, visit)] = 1.0);
        let factor = a.cholesky()?;
        twice += log_determinant(&factor.l_dirty().diagonal());
        means.push(factor.solve(&pulls[g]));
        mean_covariance.push(factor.inverse());
    }
    let mut slope = DMatrix::zeros(v, v);
    for (p, inverse) in data.patterns.iter().zip(&inverses) {
        let away = &p.mean - DVector::from_fn(p.seen.len(), |k, _| means[p.group][p.seen[k]]);
        let residuals = &p.products + &away * away.transpose() * p.count;
        let weighted = inverse * &residuals;
        twice += weighted.trace();
        let known = block(&mean_covariance[p.group], &p.seen) * p.count + residuals;
        add_block(&mut slope, &p.seen, &(inverse * p.count - inverse * known * inverse));
    }
    twice.is_finite().then_some(State { value: 0.5 * twice, slope, means, mean_covariance, inverses })
}

/// Steps of expectation-maximisation from pooled variances with correlations of one half.
pub(super) fn start(data: &Reduced, steps: usize) -> Option<DMatrix<f64>> {
    let sd: Vec<f64> = data.variances.iter().map(|x| libm::sqrt(*x)).collect();
    let mut sigma = DMatrix::from_fn(data.visits, data.visits, |i, j| sd[i] * sd[j] * if i == j { 1.0 } else { 0.5 });
    for _ in 0..steps {
        let slope = evaluate(data, &sigma)?.slope;
        let moved = &sigma - &sigma * slope * &sigma / data.subjects as f64;
        sigma = (&moved + moved.transpose()) * 0.5;
    }
    Some(sigma)
}

/// The covariance as a function of the entries of T, row by row.
#[derive(Clone, Debug)]
pub(super) struct Covariance {
    /// L0, V x V.
    pub(super) base: DMatrix<f64>,
}

impl Covariance {
    pub(super) fn count(&self) -> usize {
        self.base.nrows() * (self.base.nrows() + 1) / 2
    }

    /// Entries of T on the diagonal.
    pub(super) fn diagonal(&self) -> impl Iterator<Item = usize> {
        (0..self.base.nrows()).map(|i| i * (i + 3) / 2)
    }

    fn entries(&self) -> impl Iterator<Item = (usize, usize)> {
        (0..self.base.nrows()).flat_map(|i| (0..=i).map(move |j| (i, j)))
    }

    fn inner(&self, theta: &[f64]) -> DMatrix<f64> {
        let mut t = DMatrix::zeros(self.base.nrows(), self.base.nrows());
        for ((i, j), value) in self.entries().zip(theta) {
            t[(i, j)] = if i == j { libm::exp(*value) } else { *value };
        }
        t
    }

    /// L0 T.
    pub(super) fn factor(&self, theta: &[f64]) -> DMatrix<f64> {
        &self.base * self.inner(theta)
    }

    /// Entries of T in one column, the diagonal first.
    pub(super) fn column(&self, column: usize) -> impl Iterator<Item = usize> {
        (column..self.base.nrows()).map(move |i| i * (i + 1) / 2 + column)
    }

    /// The same T T' with one column of T at nothing but `lowest` on its diagonal: a singular covariance leaves one of
    /// the columns without a part of its own. None where what is left is not positive definite.
    pub(super) fn without(&self, theta: &[f64], column: usize, lowest: f64) -> Option<Vec<f64>> {
        let t = self.inner(theta);
        let mut left = &t * t.transpose();
        let mut result = vec![0.0; theta.len()];
        for j in 0..self.base.nrows() {
            let mut entries = self.column(j).zip(j..);
            if j == column {
                entries.next().into_iter().for_each(|(k, _)| result[k] = lowest);
                continue;
            }
            let pivot = Some(libm::sqrt(left[(j, j)])).filter(|pivot| *pivot > 0.0)?;
            let part = left.column(j) / pivot;
            for (k, i) in entries {
                result[k] = if i == j { libm::log(pivot) } else { part[i] };
            }
            left -= &part * part.transpose();
        }
        Some(result)
    }

    /// Derivatives in theta of a function whose derivative is 1/2 tr(K dSigma).
    pub(super) fn chain(&self, theta: &[f64], k: &DMatrix<f64>) -> Vec<f64> {
        let t = self.inner(theta);
        let by_entry = self.base.transpose() * k * &self.base * &t;
        self.entries().map(|(i, j)| by_entry[(i, j)] * if i == j { t[(i, i)] } else { 1.0 }).collect()
    }
}

/// The criterion over theta.
pub(super) struct Criterion<'a> {
    pub(super) data: &'a Reduced,
    pub(super) covariance: &'a Covariance,
}

impl Objective for Criterion<'_> {
    fn at(&mut self, theta: &[f64]) -> Option<(f64, Vec<f64>)> {
        let factor = self.covariance.factor(theta);
        let state = evaluate(self.data, &(&factor * factor.transpose()))?;
        Some((state.value, self.covariance.chain(theta, &state.slope)))
    }
}

pub(super) fn block(matrix: &DMatrix<f64>, seen: &[usize]) -> DMatrix<f64> {
    DMatrix::from_fn(seen.len(), seen.len(), |i, j| matrix[(seen[i], seen[j])])
}

pub(super) fn add_block(matrix: &mut DMatrix<f64>, seen: &[usize], part: &DMatrix<f64>) {
    for (i, &row) in seen.iter().enumerate() {
        for (j, &column) in seen.iter().enumerate() {
            matrix[(row, column)] += part[(i, j)];
        }
    }
}

fn log_determinant(diagonal: &DVector<f64>) -> f64 {
    2.0 * diagonal.iter().map(|d| libm::log(*d)).sum::<f64>()
}
