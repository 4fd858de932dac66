//! The regularised incomplete beta function I_x(a, b).
//!
//! I_x(a, b) = x^a y^b / B(a, b) * K with y = 1 - x and K the continued fraction of DiDonato & Morris 1992 (ACM TOMS
//! 18:360, eq. 9; from memory):
//!
//! ```text
//! K         = alpha_1 / (beta_1 + alpha_2 / (beta_2 + ...)),   alpha_1 = 1,   lambda = a - (a + b) x
//! alpha_n+1 = (a+n-1) (a+b+n-1) n (b-n) x^2 / (a+2n-1)^2
//! beta_n+1  = n + n (b-n) x / (a+2n-1) + (a+n) / (a+2n+1) * (lambda + 1 + n (1+y))
//! ```
//!
//! It is used for x below (a+1)/(a+b+2), otherwise on the other side. Unlike the fraction with alternating terms it does
//! not lose digits when one parameter is huge. The prefactor is in saddle-point form (Loader 2000).

use super::gamma::{away_from_zero, deviance, stirling_error};
use core::f64::consts::PI;

const MOST_TERMS: usize = 500_000;

/// I_x(a, b) for a, b > 0 and 0 <= x <= 1.
pub fn regularised_beta(a: f64, b: f64, x: f64) -> f64 {
    beta_tails(a, b, x, 1.0 - x).0
}

/// 1 - I_x(a, b), accurate where it is small.
pub fn regularised_beta_upper(a: f64, b: f64, x: f64) -> f64 {
    beta_tails(a, b, x, 1.0 - x).1
}

/// (I_x(a, b), 1 - I_x(a, b)), with y = 1 - x given by the caller at its own full accuracy.
pub fn beta_tails(a: f64, b: f64, x: f64, y: f64) -> (f64, f64) {
    let proper = a > 0.0 && b > 0.0 && a.is_finite() && b.is_finite() && x >= 0.0 && y >= 0.0;
    if !proper {
        return (f64::NAN, f64::NAN);
    }
    if x == 0.0 {
        return (0.0, 1.0);
    }
    if y == 0.0 {
        return (1.0, 0.0);
    }
    let prefactor = beta_prefactor(a, b, x, y);
    if x * (a + b + 2.0) <= a + 1.0 {
        let lower = (prefactor * fraction(a, b, x, y)).min(1.0);
        (lower, 1.0 - lower)
    } else {
        let upper = (prefactor * fraction(b, a, y, x)).min(1.0);
        (1.0 - upper, upper)
    }
}

/// lambda = a - (a + b) x = (a + b) y - b, from whichever of x and y is the smaller.
fn excess(a: f64, b: f64, x: f64, y: f64) -> f64 {
    if x <= y { a - (a + b) * x } else { (a + b) * y - b }
}

/// x^a y^b / B(a, b).
pub(super) fn beta_prefactor(a: f64, b: f64, x: f64, y: f64) -> f64 {
    let lambda = excess(a, b, x, y);
    let sum = a + b;
    let stirling = stirling_error(sum) - stirling_error(a) - stirling_error(b);
    let exponent = stirling - deviance(a, sum * x, -lambda) - deviance(b, sum * y, lambda);
    // a b / (a + b) without overflow.
    let harmonic = a.min(b) / (1.0 + a.min(b) / a.max(b));
    libm::sqrt(harmonic / (2.0 * PI)) * libm::exp(exponent)
}

/// The continued fraction K, by the modified Lentz method.
fn fraction(a: f64, b: f64, x: f64, y: f64) -> f64 {
    let lambda = excess(a, b, x, y);
    let denominator = |n: f64| {
        let middle = if n > 0.0 { n + n * (b - n) * x / (a + 2.0 * n - 1.0) } else { 0.0 };
        middle + (a + n) / (a + 2.0 * n + 1.0) * (lambda + 1.0 + n * (1.0 + y))
    };
    let mut c = 1e300;
    let mut d = 1.0 / away_from_zero(denominator(0.0));
    let mut value = d;
    for step in 1..MOST_TERMS {
        let n = step as f64;
        let s = a + 2.0 * n - 1.0;
        let numerator = ((a + n - 1.0) / s) * ((a + b + n - 1.0) / s) * n * (b - n) * x * x;
        let beta = denominator(n);
        d = 1.0 / away_from_zero(numerator * d + beta);
        c = away_from_zero(beta + numerator / c);
        let change = c * d;
        value *= change;
        if libm::fabs(change - 1.0) < 2e-16 {
            break;
        }
    }
    value
}
