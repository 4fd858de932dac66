//! Densities of the families, with what their modes need.

use crate::model::Family;
use crate::special::{digamma, ln_gamma, normal_cdf, normal_pdf, trigamma};

pub(crate) const LN_TWO_PI: f64 = 1.837_877_066_409_345_3;
/// Terms of a Tweedie series on each side of its largest.
const MOST_TERMS: usize = 20_000;

/// One row: its response, what the family needs of it, and the family's dispersion.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Row {
    pub(crate) y: f64,
    /// Trials or limit; not a number where there is none.
    pub(crate) detail: f64,
    pub(crate) dispersion: f64,
}

impl Row {
    fn trials(self) -> f64 {
        if self.detail.is_nan() { 1.0 } else { self.detail }
    }
}

/// The part of the log density that does not depend on the link predictor.
pub(crate) fn constant(family: Family, row: Row) -> f64 {
    let Row { y, dispersion, .. } = row;
    match family {
        Family::Normal | Family::Censored => 0.0,
        Family::Poisson => -ln_gamma(y + 1.0),
        Family::NegativeBinomial => {
            let k = 1.0 / dispersion;
            ln_gamma(y + k) - ln_gamma(k) - ln_gamma(y + 1.0) - y * libm::log(k)
        }
        Family::Gamma => {
            let shape = 1.0 / dispersion;
            shape * libm::log(shape) - ln_gamma(shape) - shape - libm::log(y)
        }
        Family::Binomial => {
            let n = row.trials();
            ln_gamma(n + 1.0) - ln_gamma(y + 1.0) - ln_gamma(n - y + 1.0)
        }
        Family::Beta => -libm::log(y) - libm::log1p(-y),
        Family::Tweedie(power) => {
            let p = f64::from(power) / 1000.0;
            tweedie_series(y, dispersion, p) + saturated(y, p) / dispersion
        }
    }
}

/// The exponent of a Tweedie density at its largest.
fn saturated(y: f64, p: f64) -> f64 {
    if y > 0.0 { libm::pow(y, 2.0 - p) * (1.0 / (1.0 - p) - 1.0 / (2.0 - p)) } else { 0.0 }
}

/// The rest of the log density, its first derivative for the link predictor and minus its second. It stays near zero at the
/// mode however small the dispersion: a mode is followed to a share of this height.
pub(crate) fn density(family: Family, row: Row, eta: f64) -> [f64; 3] {
    let Row { y, dispersion, .. } = row;
    match family {
        Family::Normal => {
            let r = y - eta;
            [-0.5 * (LN_TWO_PI + libm::log(dispersion) + r * r / dispersion), r / dispersion, 1.0 / dispersion]
        }
        Family::Censored => censored(row, eta),
        Family::Poisson => {
            let mu = libm::exp(eta);
            [y * eta - mu, y - mu, mu]
        }
        Family::NegativeBinomial => {
            let (k, mu) = (1.0 / dispersion, libm::exp(eta));
            [
                y * eta - (y + k) * libm::log1p(mu / k),
                y - (y + k) * mu / (k + mu),
                (y + k) * k * mu / ((k + mu) * (k + mu)),
            ]
        }
        Family::Gamma => {
            let (shape, ratio) = (1.0 / dispersion, y * libm::exp(-eta));
            [-shape * (eta + ratio - libm::log(y) - 1.0), shape * (ratio - 1.0), shape * ratio]
        }
        Family::Binomial => {
            let (n, p) = (row.trials(), 1.0 / (1.0 + libm::exp(-eta)));
            let log = if eta > 0.0 { eta + libm::log1p(libm::exp(-eta)) } else { libm::log1p(libm::exp(eta)) };
            [y * eta - n * log, y - n * p, n * p * (1.0 - p)]
        }
        Family::Beta => beta(row, eta),
        Family::Tweedie(power) => {
            let p = f64::from(power) / 1000.0;
            let (low, high) = (libm::exp((1.0 - p) * eta), libm::exp((2.0 - p) * eta));
            let value = (y * low / (1.0 - p) - high / (2.0 - p) - saturated(y, p)) / dispersion;
            [value, (y * low - high) / dispersion, ((p - 1.0) * y * low + (2.0 - p) * high) / dispersion]
        }
    }
}

/// Normal, or the chance of lying beyond a limit.
fn censored(row: Row, eta: f64) -> [f64; 3] {
    if row.detail.abs() != 1.0 {
        return density(Family::Normal, row, eta);
    }
    let sd = libm::sqrt(row.dispersion);
    let side = row.detail;
    // Below its limit: log F(z); above: log F(-z).
    let z = -side * (row.y - eta) / sd;
    let (log, ratio) = if z < -30.0 {
        // Mills' ratio far out (Abramowitz & Stegun 26.2.12).
        let q = -z;
        let tail = 1.0 - 1.0 / (q * q);
        (-0.5 * z * z - 0.5 * LN_TWO_PI - libm::log(q) + libm::log(tail), q / tail)
    } else {
        let p = normal_cdf(z).max(1e-300);
        (libm::log(p), normal_pdf(z) / p)
    };
    [log, side * ratio / sd, (ratio * (ratio + z)).max(0.0) / row.dispersion]
}

/// Beta; where the second derivative is not clearly negative, a share of its expected value.
fn beta(row: Row, eta: f64) -> [f64; 3] {
    let k = 1.0 / row.dispersion;
    let m = (1.0 / (1.0 + libm::exp(-eta))).clamp(1e-12, 1.0 - 1e-12);
    let (a, b) = (m * k, (1.0 - m) * k);
    let (log_y, log_rest) = (libm::log(row.y), libm::log1p(-row.y));
    let value = ln_gamma(k) - ln_gamma(a) - ln_gamma(b) + a * log_y + b * log_rest;
    let slope = m * (1.0 - m) * k;
    let away = (log_y - log_rest) - (digamma(a) - digamma(b));
    let expected = slope * slope * (trigamma(a) + trigamma(b));
    let observed = expected - slope * (1.0 - 2.0 * m) * away;
    [value, slope * away, observed.max(0.05 * expected)]
}

/// `ln a(y, phi, p)` of the Tweedie density for 1 < p < 2: zero at y = 0, else the series of Dunn & Smyth 2005, sec 3, summed
/// from its largest term outwards.
fn tweedie_series(y: f64, phi: f64, p: f64) -> f64 {
    if y <= 0.0 {
        return 0.0;
    }
    let alpha = (2.0 - p) / (1.0 - p);
    let log_z =
        -alpha * libm::log(y) + alpha * libm::log(p - 1.0) - (1.0 - alpha) * libm::log(phi) - libm::log(2.0 - p);
    let term = |j: f64| j * log_z - ln_gamma(1.0 + j) - ln_gamma(-alpha * j);
    let top = libm::round(libm::pow(y, 2.0 - p) / (phi * (2.0 - p))).max(1.0);
    let largest = term(top);
    let mut sum = 1.0;
    for direction in [1.0, -1.0] {
        for step in 1..=MOST_TERMS {
            let j = top + direction * step as f64;
            let part = if j < 1.0 { -1e3 } else { term(j) - largest };
            if part < -37.0 {
                break;
            }
            sum += libm::exp(part);
        }
    }
    largest + libm::log(sum) - libm::log(y)
}
