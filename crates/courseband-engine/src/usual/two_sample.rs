//! Two means compared, with equal or unequal variances.

use super::satterthwaite::satterthwaite_df;
use super::{Undefined, largest, mean_and_squares, negligible};
use crate::special::{t_quantile, t_sf};

/// What is assumed of the two variances.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Variances {
    /// Welch's comparison.
    Unequal,
    /// Student's comparison.
    Equal,
}

/// Size, mean and standard deviation of one sample.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sample {
    /// Values in the sample.
    pub n: usize,
    /// Their mean.
    pub mean: f64,
    /// Their standard deviation (divisor n - 1); zero for one value.
    pub sd: f64,
}

/// A difference of two means, second less first.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MeanComparison {
    /// The first sample.
    pub first: Sample,
    /// The second sample.
    pub second: Sample,
    /// Second mean less first mean.
    pub difference: f64,
    /// Standard error of the difference.
    pub se: f64,
    /// Degrees of freedom; Satterthwaite's for unequal variances.
    pub df: f64,
    /// Difference over standard error.
    pub t: f64,
    /// Two-sided p-value.
    pub p: f64,
    /// Lower and upper end of the confidence interval of the difference.
    pub interval: (f64, f64),
}

/// Compares the means of two samples; `level` is that of the interval, such as 0.95.
///
/// # Errors
/// Fewer than two values in a sample (its group is reported as 0 or 1), or no variation in either.
pub fn compare_means(
    first: &[f64],
    second: &[f64],
    variances: Variances,
    level: f64,
) -> Result<MeanComparison, Undefined> {
    for (group, sample) in [first, second].into_iter().enumerate() {
        if sample.len() < 2 {
            return Err(Undefined::TooFewValues { group, have: sample.len(), need: 2 });
        }
    }
    let (a, squares_a) = describe(first);
    let (b, squares_b) = describe(second);
    let scale = largest(first.iter().chain(second).copied());
    if negligible(squares_a + squares_b, a.n + b.n, scale) {
        return Err(Undefined::NoVariation);
    }
    let (na, nb) = (a.n as f64, b.n as f64);
    let (variance, df) = match variances {
        Variances::Equal => {
            let df = na + nb - 2.0;
            ((squares_a + squares_b) / df * (1.0 / na + 1.0 / nb), df)
        }
        Variances::Unequal => {
            let (va, vb) = (a.sd * a.sd, b.sd * b.sd);
            let variance = va / na + vb / nb;
            // Var(s^2) = 2 sigma^4 / (n - 1).
            let covariance = [2.0 * va * va / (na - 1.0), 0.0, 0.0, 2.0 * vb * vb / (nb - 1.0)];
            let df = satterthwaite_df(variance, &[1.0 / na, 1.0 / nb], &covariance);
            (variance, df.ok_or(Undefined::NoVariation)?)
        }
    };
    let (difference, se) = (b.mean - a.mean, libm::sqrt(variance));
    let t = difference / se;
    let half = t_quantile(0.5 + 0.5 * level, df) * se;
    Ok(MeanComparison {
        first: a,
        second: b,
        difference,
        se,
        df,
        t,
        p: (2.0 * t_sf(libm::fabs(t), df)).min(1.0),
        interval: (difference - half, difference + half),
    })
}

fn describe(values: &[f64]) -> (Sample, f64) {
    let (mean, squares) = mean_and_squares(values);
    let sd = libm::sqrt(squares / (values.len() - 1) as f64);
    (Sample { n: values.len(), mean, sd }, squares)
}
