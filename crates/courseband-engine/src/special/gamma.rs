//! Log gamma and the regularised incomplete gamma functions.
//!
//! The common prefactor x^a e^-x / Gamma(a) is written in Loader's saddle-point form (Loader 2000, "Fast and accurate
//! computation of binomial probabilities"): a Stirling error and a deviance that is never a difference of large numbers.

use core::f64::consts::PI;

/// Terms after which a series or continued fraction is given up; near a = x the need grows like the root of a.
const MOST_TERMS: usize = 500_000;
const TINY: f64 = 1e-300;

/// ln |Gamma(x)|.
pub fn ln_gamma(x: f64) -> f64 {
    libm::lgamma(x)
}

/// P(a, x), the regularised lower incomplete gamma function, for a > 0 and x >= 0.
pub fn regularised_gamma(a: f64, x: f64) -> f64 {
    both_tails(a, x).0
}

/// Q(a, x) = 1 - P(a, x), accurate where it is small.
pub fn regularised_gamma_upper(a: f64, x: f64) -> f64 {
    both_tails(a, x).1
}

/// (P, Q). The series below the mean, the continued fraction above it.
fn both_tails(a: f64, x: f64) -> (f64, f64) {
    let proper = a > 0.0 && a.is_finite() && x >= 0.0;
    if !proper {
        return (f64::NAN, f64::NAN);
    }
    if x == 0.0 {
        return (0.0, 1.0);
    }
    if x == f64::INFINITY {
        return (1.0, 0.0);
    }
    let prefactor = gamma_prefactor(a, x);
    if x < a + 1.0 {
        let lower = (prefactor * lower_series(a, x)).min(1.0);
        (lower, 1.0 - lower)
    } else {
        let upper = (prefactor * upper_fraction(a, x)).min(1.0);
        (1.0 - upper, upper)
    }
}

/// x^a e^-x / Gamma(a).
pub(super) fn gamma_prefactor(a: f64, x: f64) -> f64 {
    let exponent = -stirling_error(a) - deviance(a, x, x - a);
    libm::sqrt(a / (2.0 * PI)) * libm::exp(exponent)
}

/// Sum of x^n / (a (a+1) ... (a+n)), n = 0, 1, ... (DLMF 8.11.4).
fn lower_series(a: f64, x: f64) -> f64 {
    let mut term = 1.0 / a;
    let mut sum = term;
    for n in 1..MOST_TERMS {
        term *= x / (a + n as f64);
        sum += term;
        if term < sum * 1e-17 {
            break;
        }
    }
    sum
}

/// Even part of the continued fraction DLMF 8.9.2, by the modified Lentz method.
fn upper_fraction(a: f64, x: f64) -> f64 {
    let mut b = x + 1.0 - a;
    let mut c = 1.0 / TINY;
    let mut d = 1.0 / b;
    let mut value = d;
    for n in 1..MOST_TERMS {
        let k = n as f64;
        let numerator = -k * (k - a);
        b += 2.0;
        d = 1.0 / away_from_zero(numerator * d + b);
        c = away_from_zero(b + numerator / c);
        let step = c * d;
        value *= step;
        if libm::fabs(step - 1.0) < 2e-16 {
            break;
        }
    }
    value
}

pub(super) fn away_from_zero(x: f64) -> f64 {
    if libm::fabs(x) < TINY { TINY } else { x }
}

/// delta(z) = ln Gamma(z) - (z - 1/2) ln z + z - ln(2 pi)/2 for z > 0 (Stirling's series, DLMF 5.11.1).
pub(super) fn stirling_error(z: f64) -> f64 {
    if z < 10.0 {
        let half_ln_two_pi = 0.918_938_533_204_672_8;
        return libm::lgamma(z) - (z - 0.5) * libm::log(z) + z - half_ln_two_pi;
    }
    const SERIES: [f64; 7] =
        [1.0 / 12.0, -1.0 / 360.0, 1.0 / 1260.0, -1.0 / 1680.0, 1.0 / 1188.0, -691.0 / 360_360.0, 1.0 / 156.0];
    let w = 1.0 / (z * z);
    SERIES.iter().rev().fold(0.0, |sum, c| sum * w + c) / z
}

/// k ln(k/m) + m - k >= 0, with the difference `m_less_k` = m - k supplied so that its rounding is the caller's.
pub(super) fn deviance(k: f64, m: f64, m_less_k: f64) -> f64 {
    let e = m_less_k / k;
    if libm::fabs(e) > 0.4 {
        // ln(m/k) taken apart where the quotient would overflow or vanish.
        let ratio = m / k;
        let log_ratio = if ratio.is_normal() { libm::log(ratio) } else { libm::log(m) - libm::log(k) };
        return k * (e - log_ratio);
    }
    // With r = e/(2+e): e - ln(1+e) = e r - 2 (r^3/3 + r^5/5 + ...).
    let r = e / (2.0 + e);
    let w = r * r;
    let mut power = w * r;
    let mut odd = 3.0;
    let mut tail = 0.0;
    loop {
        let term = power / odd;
        tail += term;
        if libm::fabs(term) <= libm::fabs(tail) * 1e-17 {
            break;
        }
        power *= w;
        odd += 2.0;
    }
    k * (e * r - 2.0 * tail)
}

/// Derivative of the logarithm of the gamma function, x above zero: recurrence to 8, then the asymptotic series
/// (Abramowitz & Stegun 6.3.5, 6.3.18).
pub fn digamma(x: f64) -> f64 {
    let (mut x, mut sum) = (x, 0.0);
    while x < 8.0 {
        sum -= 1.0 / x;
        x += 1.0;
    }
    let r = 1.0 / (x * x);
    sum + libm::log(x)
        - 0.5 / x
        - r * (1.0 / 12.0 - r * (1.0 / 120.0 - r * (1.0 / 252.0 - r * (1.0 / 240.0 - r * 5.0 / 660.0))))
}

/// Its derivative (Abramowitz & Stegun 6.4.6, 6.4.12).
pub fn trigamma(x: f64) -> f64 {
    let (mut x, mut sum) = (x, 0.0);
    while x < 8.0 {
        sum += 1.0 / (x * x);
        x += 1.0;
    }
    let r = 1.0 / (x * x);
    sum + 1.0 / x
        + 0.5 * r
        + r / x * (1.0 / 6.0 - r * (1.0 / 30.0 - r * (1.0 / 42.0 - r * (1.0 / 30.0 - r * 5.0 / 66.0))))
}
