//! The calibrated critical value: the band's promise, checked on the table's own design.
//!
//! Degrees of freedom do not mend the bias of smoothing, and with few subjects
//! a smoothing variance is often estimated at zero. So the whole procedure is
//! repeated on simulated tables with the same subjects, visits and gaps:
//!
//! 1. variance parameters are drawn from a regularised posterior: the
//!    restricted likelihood times priors that are flat for standard deviations,
//!    for the correlation between neighbouring visits and for the share of
//!    measurement error, by a seeded random-walk Metropolis chain
//!    (Metropolis et al. 1953; Gelman, Roberts & Gilks 1996 for the step);
//! 2. a truth is drawn from the posterior of the curves given these;
//! 3. new cluster effects, subject effects and errors are drawn, the model is refitted;
//! 4. the largest |estimate - truth| / SE over the family is kept.
//!
//! The critical value is the quantile of the kept values. A refit that fails counts
//! as infinite. Refit `k` depends on the seed and `k` alone, so that work can be
//! split over workers and continued, with the same digits.

use crate::criterion::Criterion;
use crate::fit::Fit;
use crate::model::Family;
use crate::params::Parameter;
use crate::posterior::{Contrast, contrast_value, draw_coefficients};
use crate::refit::Refitter;
use crate::simulate::simulate_responses;
use crate::special::Rng;
use crate::spectral::symmetric_eigen;
use nalgebra::{DMatrix, DVector};

/// Steps of the chain before the first draw is kept, and between draws.
const BURN_IN: usize = 400;
const THIN: usize = 5;
/// Kept draws of the variance parameters; refit `k` uses draw `k` modulo this.
const DRAWS: usize = 400;

/// A fit prepared for calibration of several families of contrasts.
#[derive(Debug)]
pub struct Calibration {
    fit: Fit,
    families: Vec<Vec<Contrast>>,
    draws: Vec<Vec<f64>>,
    refitter: Refitter,
    seed: u64,
}

impl Calibration {
    /// Prepares: runs the chain. `None` where the criterion cannot be computed, or the response is not normal.
    #[must_use]
    pub fn new(fit: Fit, families: Vec<Vec<Contrast>>, seed: u64) -> Option<Self> {
        if fit.model.family != Family::Normal {
            return None;
        }
        let draws = chain(&fit, seed)?;
        let refitter = Refitter::new(&fit);
        Some(Calibration { fit, families, draws, refitter, seed })
    }

    /// The largest |error| / SE of each family in refit `index`; infinite where the refit failed.
    #[must_use]
    pub fn refit(&self, index: u64) -> Vec<f64> {
        self.try_refit(index).unwrap_or_else(|| vec![f64::INFINITY; self.families.len()])
    }

    fn try_refit(&self, index: u64) -> Option<Vec<f64>> {
        let mut rng = Rng::stream(self.seed, index + 1);
        let theta = &self.draws[index as usize % self.draws.len()];
        let solved = Criterion::new(&self.fit.design, &self.fit.layout).evaluate(theta, false)?.solved;
        let truth = draw_coefficients(&solved, &mut rng);
        let design = simulate_responses(&self.fit.design, &self.fit.layout, theta, &truth, &mut rng);
        let refitted = self.refitter.refit(design, theta)?;
        let posterior = refitted.corrected();
        let largest = |family: &Vec<Contrast>| {
            family
                .iter()
                .filter_map(|contrast| {
                    let (mean, se) = posterior.inner_estimate(contrast);
                    (se > 0.0).then(|| (mean - contrast_value(&self.fit.design.placement, contrast, &truth)).abs() / se)
                })
                .fold(0.0, f64::max)
        };
        Some(self.families.iter().map(largest).collect())
    }
}

/// Quantile of the kept values with a 95 % Monte-Carlo interval from order statistics
/// (binomial, normal approximation; David & Nagaraja 2003, Order Statistics, sec. 7.1).
///
/// Infinite where too many refits failed. `values` need not be sorted; at least one.
#[must_use]
pub fn calibrated_quantile(values: &[f64], level: f64) -> (f64, [f64; 2]) {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    let n = sorted.len() as f64;
    // The order statistic that a further value exceeds with probability at most 1 - level.
    let at = |position: f64| {
        let rank = libm::ceil(position).max(1.0) as usize;
        if rank > sorted.len() { f64::INFINITY } else { sorted[rank - 1] }
    };
    let middle = level * (n + 1.0);
    let reach = 1.96 * libm::sqrt(n * level * (1.0 - level));
    (at(middle), [at((middle - reach).max(1.0)), at(middle + reach)])
}

/// Draws of the variance parameters.
pub(crate) fn chain(fit: &Fit, seed: u64) -> Option<Vec<Vec<f64>>> {
    let mut rng = Rng::stream(seed, 0);
    let mut criterion = Criterion::new(&fit.design, &fit.layout);
    let n = fit.theta.len();
    let mut steps = step_factor(fit);
    let mut theta = inner_start(fit);
    let mut density = log_density(&mut criterion, fit, &theta)?;
    let mut draws = Vec::with_capacity(DRAWS);
    let mut accepted = 0;
    for round in 0..BURN_IN + THIN * DRAWS {
        let z = DVector::from_fn(n, |_, _| rng.normal());
        let step = &steps * z;
        let tried: Vec<f64> = theta.iter().zip(step.iter()).map(|(t, s)| t + s).collect();
        let chance = libm::log(rng.uniform());
        if let Some(new_density) = log_density(&mut criterion, fit, &tried)
            && chance < new_density - density
        {
            (theta, density) = (tried, new_density);
            accepted += 1;
        }
        if round < BURN_IN && round % 50 == 49 {
            let rate = f64::from(accepted) / 50.0;
            steps *= if rate < 0.15 {
                0.6
            } else if rate > 0.4 {
                1.5
            } else {
                1.0
            };
            accepted = 0;
        }
        if round >= BURN_IN && (round - BURN_IN) % THIN == THIN - 1 {
            draws.push(theta.clone());
        }
    }
    Some(draws)
}

/// Where the chain begins: parameters at a bound are moved inside.
fn inner_start(fit: &Fit) -> Vec<f64> {
    let mut theta = fit.theta.clone();
    for (k, entry) in fit.layout.entries.iter().enumerate() {
        if !fit.free.contains(&k) {
            theta[k] = match entry {
                Parameter::Rate => fit.layout.upper[k] - 2.3,
                Parameter::Nugget if fit.theta[k] < 0.0 => -2.0,
                Parameter::Nugget => 2.0,
                Parameter::Error(_) => theta[k],
                _ => -2.0,
            };
        }
    }
    theta
}

/// Factor of the proposal covariance: that of the estimates, standard deviation 1 for parameters at a bound.
fn step_factor(fit: &Fit) -> DMatrix<f64> {
    let n = fit.theta.len();
    let mut covariance = DMatrix::identity(n, n);
    let eigen = symmetric_eigen(&fit.hessian);
    let bounded = eigen.eigenvalues.map(|value: f64| 1.0 / value.max(0.5));
    let inner = &eigen.eigenvectors * DMatrix::from_diagonal(&bounded) * eigen.eigenvectors.transpose();
    for (i, &row) in fit.free.iter().enumerate() {
        for (j, &column) in fit.free.iter().enumerate() {
            covariance[(row, column)] = inner[(i, j)];
        }
    }
    let scale = 2.38 / libm::sqrt(n as f64);
    covariance.cholesky().map_or_else(|| DMatrix::identity(n, n) * 0.2, |factor| factor.l() * scale)
}

/// Log restricted likelihood plus log prior; `None` outside the bounds.
fn log_density(criterion: &mut Criterion, fit: &Fit, theta: &[f64]) -> Option<f64> {
    let layout = &fit.layout;
    let within = (0..theta.len()).all(|k| theta[k] > layout.lower[k] && theta[k] < layout.upper[k]);
    if !within {
        return None;
    }
    let gap = fit.design.median_gap();
    let prior: f64 = (layout.entries.iter().zip(theta))
        .map(|(entry, &value)| match entry {
            Parameter::Smoothing(_) => 0.5 * value,
            Parameter::Error(_) => 0.0,
            Parameter::Subject { part: 1, .. } | Parameter::Cluster { part: 1 } => 0.0,
            Parameter::Shared(_) => 0.5 * value,
            Parameter::Rate => value - libm::exp(value) * gap,
            Parameter::Nugget => -value - 2.0 * libm::log1p(libm::exp(-value)),
            // The logarithm of a standard deviation.
            _ => value,
        })
        .sum();
    Some(prior - criterion.evaluate(theta, false)?.value)
}
