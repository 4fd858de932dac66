//! One-way layout: do several groups share one mean?

use super::{Undefined, largest, mean_and_squares, negligible};
use crate::special::f_sf;

/// An F test of equal means.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OneWay {
    /// F statistic.
    pub f: f64,
    /// Degrees of freedom between groups.
    pub df: f64,
    /// Degrees of freedom for error.
    pub df_error: f64,
    /// p-value.
    pub p: f64,
}

/// The F test with one common variance. Groups without values are left out.
///
/// # Errors
/// Fewer than two groups with values, as many groups as values, or no variation within groups.
pub fn one_way(groups: &[Vec<f64>]) -> Result<OneWay, Undefined> {
    let present: Vec<&Vec<f64>> = groups.iter().filter(|g| !g.is_empty()).collect();
    let total: usize = present.iter().map(|g| g.len()).sum();
    if present.len() < 2 {
        return Err(Undefined::OneGroup);
    }
    let df_error = total - present.len();
    if df_error == 0 {
        return Err(Undefined::TooFewSubjects { have: 0, need: 1 });
    }
    let grand = present.iter().flat_map(|g| g.iter()).sum::<f64>() / total as f64;
    let (mut between, mut within) = (0.0, 0.0);
    for group in &present {
        let (mean, squares) = mean_and_squares(group);
        between += group.len() as f64 * (mean - grand) * (mean - grand);
        within += squares;
    }
    if negligible(within, total, largest(present.iter().flat_map(|g| g.iter().copied()))) {
        return Err(Undefined::NoVariation);
    }
    let (df, df_error) = ((present.len() - 1) as f64, df_error as f64);
    let f = (between / df) / (within / df_error);
    Ok(OneWay { f, df, df_error, p: f_sf(f, df, df_error) })
}

/// Welch's F test, each group with its own variance (Welch 1951, Biometrika 38:330).
///
/// # Errors
/// Fewer than two groups with values, a group with one value, or a group without variation.
pub fn one_way_welch(groups: &[Vec<f64>]) -> Result<OneWay, Undefined> {
    let mut cells = Vec::with_capacity(groups.len());
    for (group, values) in groups.iter().enumerate().filter(|(_, v)| !v.is_empty()) {
        if values.len() < 2 {
            return Err(Undefined::TooFewValues { group, have: 1, need: 2 });
        }
        let (mean, squares) = mean_and_squares(values);
        if negligible(squares, values.len(), largest(values.iter().copied())) {
            return Err(Undefined::NoVariation);
        }
        let n = values.len() as f64;
        // (n, mean, weight n / s^2)
        cells.push((n, mean, n * (n - 1.0) / squares));
    }
    if cells.len() < 2 {
        return Err(Undefined::OneGroup);
    }
    let k = cells.len() as f64;
    let weight: f64 = cells.iter().map(|c| c.2).sum();
    let centre = cells.iter().map(|c| c.2 * c.1).sum::<f64>() / weight;
    let between: f64 = cells.iter().map(|c| c.2 * (c.1 - centre) * (c.1 - centre)).sum();
    let unevenness: f64 = cells.iter().map(|c| (1.0 - c.2 / weight) * (1.0 - c.2 / weight) / (c.0 - 1.0)).sum();
    let correction = 1.0 + 2.0 * (k - 2.0) / (k * k - 1.0) * unevenness;
    let f = between / (k - 1.0) / correction;
    let df_error = (k * k - 1.0) / (3.0 * unevenness);
    Ok(OneWay { f, df: k - 1.0, df_error, p: f_sf(f, k - 1.0, df_error) })
}
