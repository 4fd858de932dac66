//! Pooling over several imputed tables.
//!
//! With M estimates Q_m and their variances U_m (Rubin 1987, Multiple Imputation for Nonresponse in Surveys, sec. 3.1):
//!
//! ```text
//! W = mean U_m,   B = variance of Q_m (divisor M - 1),   T = W + (1 + 1/M) B,   r = (1 + 1/M) B / W
//! lambda = (1 + 1/M) B / T
//! ```
//!
//! Degrees of freedom with nu_com in the complete table (Barnard & Rubin 1999, Biometrika 86:948, eq. 3):
//!
//! ```text
//! nu_m   = (M - 1) / lambda^2
//! nu_obs = (nu_com + 1) / (nu_com + 3) * nu_com * (1 - lambda)
//! nu     = 1 / (1/nu_m + 1/nu_obs)
//! ```

use crate::special::{t_quantile, t_sf};

/// A pooled estimate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pooled {
    /// Mean of the estimates.
    pub estimate: f64,
    /// Mean variance within tables, W.
    pub within: f64,
    /// Variance between tables, B.
    pub between: f64,
    /// Total variance, T.
    pub total: f64,
    /// Share of the total due to what is missing, lambda.
    pub missing_share: f64,
    /// Degrees of freedom; infinite when nothing differs between tables and the complete-table value is infinite.
    pub df: f64,
}

impl Pooled {
    /// Confidence interval of the estimate at `level`.
    pub fn interval(&self, level: f64) -> (f64, f64) {
        let half = t_quantile(0.5 + 0.5 * level, self.df) * libm::sqrt(self.total);
        (self.estimate - half, self.estimate + half)
    }

    /// Two-sided p-value of the estimate against `null`.
    pub fn p_value(&self, null: f64) -> f64 {
        2.0 * t_sf(libm::fabs(self.estimate - null) / libm::sqrt(self.total), self.df)
    }
}

/// Pools M >= 2 estimates with their variances; `complete_df` is nu_com, infinity where the normal would be used.
/// None for fewer than two tables, or where the variance within tables is not above zero.
///
/// # Panics
/// If the two slices differ in length.
pub fn pool(estimates: &[f64], variances: &[f64], complete_df: f64) -> Option<Pooled> {
    assert_eq!(estimates.len(), variances.len(), "one variance per estimate");
    let tables = estimates.len() as f64;
    if estimates.len() < 2 {
        return None;
    }
    let (estimate, squares) = super::mean_and_squares(estimates);
    let within = variances.iter().sum::<f64>() / tables;
    let between = squares / (tables - 1.0);
    let total = within + (1.0 + 1.0 / tables) * between;
    (within > 0.0).then(|| {
        let missing_share = (1.0 + 1.0 / tables) * between / total;
        let df = barnard_rubin_df(tables, missing_share, complete_df);
        Pooled { estimate, within, between, total, missing_share, df }
    })
}

/// Degrees of freedom for M tables, missing share lambda and nu_com.
fn barnard_rubin_df(tables: f64, missing_share: f64, complete_df: f64) -> f64 {
    // Worked in reciprocals, so that lambda = 0 and infinite nu_com need no cases of their own.
    let between = missing_share * missing_share / (tables - 1.0);
    let shrink = 1.0 - 2.0 / (complete_df + 3.0);
    let observed = 1.0 / (shrink * complete_df * (1.0 - missing_share));
    1.0 / (between + observed)
}

/// A pooled curve on a grid of m points.
#[derive(Clone, Debug, PartialEq)]
pub struct PooledCurve {
    /// Mean curve, m values.
    pub estimate: Vec<f64>,
    /// Total covariance T, m x m, row by row.
    pub covariance: Vec<f64>,
    /// Degrees of freedom at each point.
    pub df: Vec<f64>,
    /// Share of the variance due to what is missing, at each point.
    pub missing_share: Vec<f64>,
}

/// Pools M >= 2 curves (m values each) with their m x m covariances, row by row. Points without variance within
/// tables keep `complete_df` and a missing share of zero. None for fewer than two tables.
///
/// # Panics
/// If the sizes do not agree.
pub fn pool_curves(curves: &[Vec<f64>], covariances: &[Vec<f64>], complete_df: f64) -> Option<PooledCurve> {
    assert_eq!(curves.len(), covariances.len(), "one covariance per curve");
    if curves.len() < 2 {
        return None;
    }
    let (tables, m) = (curves.len() as f64, curves[0].len());
    let mut estimate = vec![0.0; m];
    for curve in curves {
        assert_eq!(curve.len(), m, "curves on one grid");
        estimate.iter_mut().zip(curve).for_each(|(sum, value)| *sum += value / tables);
    }
    let mut covariance = vec![0.0; m * m];
    let spread = (1.0 + 1.0 / tables) / (tables - 1.0);
    for (curve, own) in curves.iter().zip(covariances) {
        assert_eq!(own.len(), m * m, "covariances on the same grid");
        for i in 0..m {
            let away = spread * (curve[i] - estimate[i]);
            for j in 0..m {
                covariance[i * m + j] += own[i * m + j] / tables + away * (curve[j] - estimate[j]);
            }
        }
    }
    let at_point = |j: usize| {
        let values: Vec<f64> = curves.iter().map(|c| c[j]).collect();
        let variances: Vec<f64> = covariances.iter().map(|c| c[j * m + j]).collect();
        pool(&values, &variances, complete_df).map_or((complete_df, 0.0), |p| (p.df, p.missing_share))
    };
    let (df, missing_share) = (0..m).map(at_point).unzip();
    Some(PooledCurve { estimate, covariance, df, missing_share })
}
