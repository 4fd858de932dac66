//! Do the differences between times all vary alike? (Sphericity.)
//!
//! With k = times - 1 orthonormal contrasts and their error covariance S on nu degrees of freedom:
//!
//! ```text
//! W   = det S / (tr S / k)^k                              Mauchly 1940, Ann. Math. Statist. 11:204
//! GG  = (tr S)^2 / (k tr S^2)                             Greenhouse & Geisser 1959, Psychometrika 24:95
//! HF  = ((nu + 1) k GG - 2) / (k (nu - k GG))             Huynh & Feldt 1976 in the form of Lecoutre 1991,
//!                                                         J. Educ. Statist. 16:371
//! ```
//!
//! The p-value of W is the chi-squared expansion to second order (Anderson 1984, An Introduction to Multivariate
//! Statistical Analysis, sec. 10.7; from memory), good for nu well above k only.

use super::Undefined;
use crate::special::chi2_sf;
use nalgebra::DMatrix;

/// Mauchly's test.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mauchly {
    /// W, between 0 and 1; 1 is perfect sphericity.
    pub w: f64,
    /// Degrees of freedom of the chi-squared approximation, k(k+1)/2 - 1.
    pub df: f64,
    /// p-value.
    pub p: f64,
}

/// Sphericity of the within-subject error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sphericity {
    /// Mauchly's test, or why it cannot be computed.
    pub mauchly: Result<Mauchly, Undefined>,
    /// Greenhouse-Geisser epsilon, between `lower_bound` and 1.
    pub greenhouse_geisser: f64,
    /// Huynh-Feldt epsilon as computed, which may be above 1; none where its denominator is not above zero.
    pub huynh_feldt: Option<f64>,
    /// The value put to use: at most 1.
    pub huynh_feldt_used: f64,
    /// The smallest possible epsilon, 1/k.
    pub lower_bound: f64,
}

/// Sphericity from the k x k error sums of squares and products of orthonormal contrasts, on `df` degrees of freedom.
pub(super) fn sphericity(products: &DMatrix<f64>, df: usize) -> Sphericity {
    let k = products.nrows() as f64;
    let nu = df as f64;
    let trace = products.trace();
    let gg = trace * trace / (k * products.norm_squared());
    let room = k * (nu - k * gg);
    let hf = (room > 1e-9 * k * nu).then(|| ((nu + 1.0) * k * gg - 2.0) / room);
    Sphericity {
        mauchly: mauchly(products, df),
        greenhouse_geisser: gg.min(1.0),
        huynh_feldt: hf,
        // Never below the lower bound either, where the formula's numerator fails.
        huynh_feldt_used: hf.unwrap_or(1.0).min(1.0).max(1.0 / k),
        lower_bound: 1.0 / k,
    }
}

fn mauchly(products: &DMatrix<f64>, df: usize) -> Result<Mauchly, Undefined> {
    let size = products.nrows();
    if size < 2 {
        return Err(Undefined::TwoTimes);
    }
    if df < size {
        return Err(Undefined::TooFewSubjects { have: df, need: size });
    }
    let (k, nu) = (size as f64, df as f64);
    let mean = products.trace() / k;
    let factor = (products / mean).cholesky().ok_or(Undefined::NoVariation)?;
    let ln_w: f64 = 2.0 * factor.l_dirty().diagonal().iter().map(|d| libm::log(*d)).sum::<f64>();
    let freedom = k * (k + 1.0) / 2.0 - 1.0;
    let rho = 1.0 - (2.0 * k * k + k + 2.0) / (6.0 * k * nu);
    let second = (k + 2.0) * (k - 1.0) * (k - 2.0) * (2.0 * k * k * k + 6.0 * k * k + 3.0 * k + 2.0)
        / (288.0 * nu * nu * k * k * rho * rho);
    let statistic = -nu * rho * ln_w;
    let first_order = chi2_sf(statistic, freedom);
    let p = first_order + second * (chi2_sf(statistic, freedom + 4.0) - first_order);
    Ok(Mauchly { w: libm::exp(ln_w), df: freedom, p: p.clamp(0.0, 1.0) })
}
