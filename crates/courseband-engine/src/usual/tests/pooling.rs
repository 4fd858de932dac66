//! Checks of the usual analyses: pooling against values from outside.

use super::super::*;
use super::{check, find};

#[test]
fn adjusted_p_values_agree_with_statsmodels() {
    // The p-values of Benjamini & Hochberg 1995, out of order.
    let p: Vec<f64> = (0..15).map(|i| find("p_values", &i.to_string()).unwrap()).collect();
    let (family, share) = (holm(&p), benjamini_hochberg(&p));
    for i in 0..15 {
        check("holm", &i.to_string(), family[i]);
        check("benjamini_hochberg", &i.to_string(), share[i]);
    }
    // As printed there: three are found controlling any false finding, four controlling the share.
    assert_eq!(family.iter().filter(|p| **p <= 0.05).count(), 3);
    assert_eq!(share.iter().filter(|p| **p <= 0.05).count(), 4);
    assert!(holm(&[]).is_empty() && benjamini_hochberg(&[]).is_empty());
}

const ESTIMATES: [f64; 5] = [1.2, 1.5, 0.9, 1.4, 1.0];
const VARIANCES: [f64; 5] = [0.20, 0.22, 0.18, 0.25, 0.15];

#[test]
fn pooling_agrees_with_exact_fractions() {
    let pooled = pool(&ESTIMATES, &VARIANCES, 30.0).unwrap();
    check("pool", "estimate", pooled.estimate);
    check("pool", "within", pooled.within);
    check("pool", "between", pooled.between);
    check("pool", "total", pooled.total);
    check("pool", "missing_share", pooled.missing_share);
    check("pool", "df", pooled.df);
    // Without a limit from the complete table it is Rubin's 1987 value.
    check("pool", "df_infinite", pool(&ESTIMATES, &VARIANCES, f64::INFINITY).unwrap().df);
}

#[test]
fn pooled_degrees_of_freedom_never_exceed_the_complete_ones() {
    for complete in [3.0, 10.0, 200.0] {
        assert!(pool(&ESTIMATES, &VARIANCES, complete).unwrap().df < complete);
    }
    // Nothing missing: (nu + 1) / (nu + 3) of the complete table's.
    let same = pool(&[1.0, 1.0], &[0.5, 0.5], 10.0).unwrap();
    assert!((same.df - 110.0 / 13.0).abs() < 1e-12 && same.missing_share == 0.0);
    assert_eq!(pool(&[1.0, 1.0], &[0.5, 0.5], f64::INFINITY).unwrap().df, f64::INFINITY);
    assert_eq!(pool(&[1.0], &[0.5], 10.0), None);
    assert_eq!(pool(&[1.0, 2.0], &[0.0, 0.0], 10.0), None);
}

#[test]
fn interval_and_p_value_belong_together() {
    let pooled = pool(&ESTIMATES, &VARIANCES, 30.0).unwrap();
    let (low, high) = pooled.interval(0.95);
    assert!((pooled.p_value(low) - 0.05).abs() < 1e-12 && (pooled.p_value(high) - 0.05).abs() < 1e-12);
}

#[test]
fn pooled_curve_is_each_point_pooled_with_the_joint_covariance() {
    let curves: Vec<Vec<f64>> = ESTIMATES.iter().map(|q| vec![*q, 2.0 * q + 1.0, 0.0]).collect();
    let covariances: Vec<Vec<f64>> =
        VARIANCES.iter().map(|u| vec![*u, u / 2.0, 0.0, u / 2.0, 3.0 * u, 0.0, 0.0, 0.0, 0.0]).collect();
    let curve = pool_curves(&curves, &covariances, 30.0).unwrap();
    let point = pool(&ESTIMATES, &VARIANCES, 30.0).unwrap();
    assert!((curve.estimate[1] - 3.4).abs() < 1e-12);
    assert!((curve.covariance[0] - point.total).abs() < 1e-12);
    // T12 = mean(u)/2 + 1.2 * 2 B = 0.1 + 0.156.
    assert!((curve.covariance[1] - 0.256).abs() < 1e-12 && curve.covariance[1] == curve.covariance[3]);
    assert!((curve.df[0] - point.df).abs() < 1e-9 && curve.df[2] == 30.0);
    assert_eq!(curve.missing_share[2], 0.0);
    assert!(pool_curves(&curves[..1], &covariances[..1], 30.0).is_none());
}
