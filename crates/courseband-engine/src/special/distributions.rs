//! Student's t, the F and the chi-squared distribution.
//!
//! Degrees of freedom are real numbers above zero (quantiles are checked from 0.5 up); infinity is the limiting
//! distribution: normal for t, chi-squared over its degrees of freedom for F.

use super::beta::{beta_prefactor, beta_tails};
use super::gamma::{gamma_prefactor, regularised_gamma, regularised_gamma_upper};
use super::invert::{LogProbability, solve_log_probability};
use super::normal::{normal_quantile, normal_sf};

/// False for NaN too.
fn above_zero(x: f64) -> bool {
    x > 0.0
}

/// P(T <= t) for Student's t with `df` degrees of freedom.
pub fn t_cdf(t: f64, df: f64) -> f64 {
    t_sf(-t, df)
}

/// P(T > t) for Student's t with `df` degrees of freedom, accurate in the upper tail.
pub fn t_sf(t: f64, df: f64) -> f64 {
    if df == f64::INFINITY {
        return normal_sf(t);
    }
    if !above_zero(df) || t.is_nan() {
        return f64::NAN;
    }
    let (beyond, _) = t_two_sided(libm::fabs(t), df);
    if t >= 0.0 { 0.5 * beyond } else { 1.0 - 0.5 * beyond }
}

/// (P(|T| > t), P(|T| <= t)) for t >= 0: I_x(df/2, 1/2) at x = df / (df + t^2).
fn t_two_sided(t: f64, df: f64) -> (f64, f64) {
    let (x, y) = t_shares(t, df);
    beta_tails(0.5 * df, 0.5, x, y)
}

/// x = df / (df + t^2) and y = 1 - x without overflow.
fn t_shares(t: f64, df: f64) -> (f64, f64) {
    let root = libm::sqrt(df);
    if t <= root {
        let w = (t / root) * (t / root);
        (1.0 / (1.0 + w), w / (1.0 + w))
    } else {
        let w = (root / t) * (root / t);
        (w / (1.0 + w), 1.0 / (1.0 + w))
    }
}

/// The t with P(T <= t) = `p`. NaN outside \[0, 1\] or for `df` not above zero.
pub fn t_quantile(p: f64, df: f64) -> f64 {
    if df == f64::INFINITY {
        return normal_quantile(p);
    }
    if !above_zero(df) || !(0.0..=1.0).contains(&p) {
        return f64::NAN;
    }
    if p == 0.5 {
        return 0.0;
    }
    let (tail, side) = if p < 0.5 { (p, -1.0) } else { (1.0 - p, 1.0) };
    if tail == 0.0 {
        return side * f64::INFINITY;
    }
    // d P(|T| <= t) / d ln t = 2 x^(df/2) y^(1/2) / B(df/2, 1/2).
    let slope = |t: f64| {
        let (x, y) = t_shares(t, df);
        2.0 * beta_prefactor(0.5 * df, 0.5, x, y)
    };
    let guess = libm::log(libm::fabs(normal_quantile(tail)));
    let central = libm::fabs(p - 0.5) < 0.25;
    let distance = if central {
        let inside = 2.0 * libm::fabs(p - 0.5);
        solve_log_probability(inside, guess, true, |t| LogProbability::new(t_two_sided(t, df).1, slope(t)))
    } else {
        solve_log_probability(2.0 * tail, guess, false, |t| LogProbability::new(t_two_sided(t, df).0, -slope(t)))
    };
    side * distance
}

/// P(F <= x) for the F distribution with `df1` and `df2` degrees of freedom (`df2` may be infinite).
pub fn f_cdf(x: f64, df1: f64, df2: f64) -> f64 {
    f_tails(x, df1, df2).0
}

/// P(F > x), accurate in the upper tail.
pub fn f_sf(x: f64, df1: f64, df2: f64) -> f64 {
    f_tails(x, df1, df2).1
}

/// (P(F <= x), P(F > x)): I_u(df1/2, df2/2) at u = df1 x / (df1 x + df2).
fn f_tails(x: f64, df1: f64, df2: f64) -> (f64, f64) {
    if !above_zero(df1) || !above_zero(df2) || x.is_nan() {
        return (f64::NAN, f64::NAN);
    }
    if x <= 0.0 {
        return (0.0, 1.0);
    }
    if df2 == f64::INFINITY {
        return (chi2_cdf(x * df1, df1), chi2_sf(x * df1, df1));
    }
    let (u, v) = f_shares(x, df1, df2);
    beta_tails(0.5 * df1, 0.5 * df2, u, v)
}

fn f_shares(x: f64, df1: f64, df2: f64) -> (f64, f64) {
    let ratio = x * (df1 / df2);
    if ratio <= 1.0 {
        (ratio / (1.0 + ratio), 1.0 / (1.0 + ratio))
    } else {
        (1.0 / (1.0 + 1.0 / ratio), (1.0 / ratio) / (1.0 + 1.0 / ratio))
    }
}

/// d P(F <= x) / d ln x = u^(df1/2) v^(df2/2) / B(df1/2, df2/2) with u, v as in [`f_cdf`], for finite `df2`.
pub(super) fn f_slope(x: f64, df1: f64, df2: f64) -> f64 {
    let (u, v) = f_shares(x, df1, df2);
    beta_prefactor(0.5 * df1, 0.5 * df2, u, v)
}

/// The x with P(F <= x) = `p`. NaN outside \[0, 1\] or for degrees of freedom not above zero.
pub fn f_quantile(p: f64, df1: f64, df2: f64) -> f64 {
    if !above_zero(df1) || !above_zero(df2) || !(0.0..=1.0).contains(&p) {
        return f64::NAN;
    }
    if df2 == f64::INFINITY {
        return chi2_quantile(p, df1) / df1;
    }
    if p == 0.0 || p == 1.0 {
        return if p == 0.0 { 0.0 } else { f64::INFINITY };
    }
    let slope = |x: f64| f_slope(x, df1, df2);
    // Fisher's z = ln(F)/2 is roughly normal.
    let spread = libm::sqrt(2.0 * (1.0 / df1 + 1.0 / df2));
    let guess = 1.0 / df2 - 1.0 / df1 + spread * normal_quantile(p);
    if p <= 0.5 {
        solve_log_probability(p, guess, true, |x| LogProbability::new(f_tails(x, df1, df2).0, slope(x)))
    } else {
        solve_log_probability(1.0 - p, guess, false, |x| LogProbability::new(f_tails(x, df1, df2).1, -slope(x)))
    }
}

/// P(X <= x) for the chi-squared distribution with `df` degrees of freedom.
pub fn chi2_cdf(x: f64, df: f64) -> f64 {
    regularised_gamma(0.5 * df, 0.5 * x.max(0.0))
}

/// P(X > x), accurate in the upper tail.
pub fn chi2_sf(x: f64, df: f64) -> f64 {
    regularised_gamma_upper(0.5 * df, 0.5 * x.max(0.0))
}

/// The x with P(X <= x) = `p`. NaN outside \[0, 1\] or for `df` not above zero and finite.
pub fn chi2_quantile(p: f64, df: f64) -> f64 {
    if !above_zero(df) || !df.is_finite() || !(0.0..=1.0).contains(&p) {
        return f64::NAN;
    }
    if p == 0.0 || p == 1.0 {
        return if p == 0.0 { 0.0 } else { f64::INFINITY };
    }
    // Wilson & Hilferty 1931 as the start.
    let w = 2.0 / (9.0 * df);
    let cube_root = 1.0 - w + normal_quantile(p) * libm::sqrt(w);
    let guess = libm::log(df) + 3.0 * libm::log(cube_root.max(1e-3));
    let slope = |x: f64| gamma_prefactor(0.5 * df, 0.5 * x);
    if p <= 0.5 {
        solve_log_probability(p, guess, true, |x| LogProbability::new(chi2_cdf(x, df), slope(x)))
    } else {
        solve_log_probability(1.0 - p, guess, false, |x| LogProbability::new(chi2_sf(x, df), -slope(x)))
    }
}
