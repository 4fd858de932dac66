//! Degrees of freedom of an estimated variance.

/// df = 2 v^2 / (g' W g): the chi-squared distribution with the same first two moments as the estimate of v.
///
/// Satterthwaite 1946; with gradients, Fai & Cornelius 1996 (J. Statist. Comput. Simul. 54:363).
///
/// `variance` is v, the squared standard error of an estimate; `gradient` is g, its derivative in each variance
/// parameter (k of them); `covariance` is W, the k x k covariance matrix of their estimates, row by row. None when v is
/// not above zero or g' W g is not: then v is known, or not estimated at all, and the caller decides.
///
/// # Panics
/// If `covariance` is not k x k.
pub fn satterthwaite_df(variance: f64, gradient: &[f64], covariance: &[f64]) -> Option<f64> {
    let k = gradient.len();
    assert_eq!(covariance.len(), k * k, "the covariance must be k x k");
    let mut spread = 0.0;
    for i in 0..k {
        for j in 0..k {
            spread += gradient[i] * covariance[i * k + j] * gradient[j];
        }
    }
    let df = 2.0 * variance * variance / spread;
    (variance > 0.0 && spread > 0.0 && df.is_finite()).then_some(df)
}
