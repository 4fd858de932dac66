//! One quantity of the findings by its name in the expected files.

use crate::expected::Expected;
use courseband_study::{Adjustment, Critical, Effect, Findings};

/// A value, and the standard error that scales its tolerance where it is a mean or a difference.
pub(crate) struct Got {
    pub(crate) value: f64,
    pub(crate) se: f64,
}

/// Half the width of a 95 % normal interval in standard errors (scipy 1.17.1, norm.ppf(0.975)).
const NORMAL: f64 = 1.959_963_984_540_054;

pub(crate) fn got(findings: &Findings, e: &Expected) -> Got {
    let fit = &findings.fit;
    let plain = |value: f64| Got { value, se: 0.0 };
    match e.quantity.as_str() {
        "log_reml" => plain(fit.log_reml.unwrap()),
        "criterion" => plain(-2.0 * fit.log_reml.unwrap()),
        "phi" => plain(fit.serial_correlation.unwrap()),
        "nugget" => plain(fit.measurement_error_share.unwrap()),
        "residual_sd" => plain(fit.residual_sd.0[group(findings, e)].1),
        "var_residual" => {
            let sd = fit.residual_sd.0[group(findings, e)].1;
            plain(sd * sd)
        }
        "effective_df" => plain(fit.effective_df.0[group(findings, e)].1),
        "sd_level" => plain(covariance(findings, e)[0][0].sqrt()),
        "var_level" => plain(covariance(findings, e)[0][0]),
        "sd_trend" => plain(covariance(findings, e)[1][1].sqrt()),
        "var_trend" => plain(covariance(findings, e)[1][1]),
        "sd_cluster_level" => plain(fit.cluster_covariance[0][0].sqrt()),
        "sd_cluster_trend" => plain(fit.cluster_covariance[1][1].sqrt()),
        "adjustment" => plain(adjustment(findings, e).estimate.unwrap()),
        "adjustment_se" => plain(adjustment(findings, e).se.unwrap()),
        "sd_at_time_zero" => plain(at_time_zero(findings, e).0),
        "correlation_at_time_zero" => plain(at_time_zero(findings, e).1),
        "mean" => mean(findings, e),
        "se" => plain(mean(findings, e).se),
        "difference" => difference(findings, e),
        "difference_se" => plain(difference(findings, e).se),
        "critical" => plain(critical(findings, e)),
        "area" => plain(area(findings, e).0),
        "area_se" => plain(area(findings, e).1),
        other => panic!("{}: unknown quantity {other}", e.case),
    }
}

fn group(findings: &Findings, e: &Expected) -> usize {
    if e.group == "all" {
        return 0;
    }
    let named = findings.groups.iter().position(|g| g.name == e.group);
    named.unwrap_or_else(|| panic!("{} {}: no group {:?}", e.case, e.quantity, e.group))
}

fn adjustment<'a>(findings: &'a Findings, e: &Expected) -> &'a Adjustment {
    let named = |a: &&Adjustment| match &a.level {
        Some(level) => format!("{}={level}", a.column) == e.group,
        None => a.column == e.group,
    };
    findings.adjustments.iter().find(named).unwrap_or_else(|| panic!("{}: no adjustment {}", e.case, e.group))
}

fn covariance<'a>(findings: &'a Findings, e: &Expected) -> &'a Vec<Vec<f64>> {
    let fit = &findings.fit;
    fit.subject_covariance_by_group.get(group(findings, e)).unwrap_or(&fit.subject_covariance)
}

/// Standard deviation of the level, and its correlation with the trend, at time 0 instead of the first time.
fn at_time_zero(findings: &Findings, e: &Expected) -> (f64, f64) {
    let c = covariance(findings, e);
    if c.len() == 1 {
        return (c[0][0].sqrt(), f64::NAN);
    }
    let first = findings.visits[0];
    let variance = c[0][0] - 2.0 * first * c[0][1] + first * first * c[1][1];
    let shared = c[0][1] - first * c[1][1];
    (variance.sqrt(), shared / (variance * c[1][1]).sqrt())
}

/// Where a time stands on the grid, else among the visits: `(on the grid, index)`.
fn place(grid: &[f64], visits: &[f64], e: &Expected) -> (bool, usize) {
    let t = e.time.unwrap();
    let find = |times: &[f64]| times.iter().position(|x| (x - t).abs() < 1e-9 * (1.0 + t.abs()));
    match (find(grid), find(visits)) {
        (Some(k), _) => (true, k),
        (None, Some(k)) => (false, k),
        (None, None) => panic!("{} {}: time {t} is neither on the grid nor a visit", e.case, e.quantity),
    }
}

fn mean(findings: &Findings, e: &Expected) -> Got {
    let curve = &findings.curves[group(findings, e)];
    let (on_grid, k) = place(&curve.grid.time, &curve.at_visits.time, e);
    let points = if on_grid { &curve.grid } else { &curve.at_visits };
    Got { value: points.mean[k].unwrap(), se: points.se[k].unwrap() }
}

/// Index of a pair written `to - from`, and -1 where the findings take it the other way round.
fn pair(findings: &Findings, e: &Expected) -> (usize, f64) {
    let (to, from) = e.group.split_once(" - ").unwrap_or_else(|| panic!("{}: {:?} is no pair", e.case, e.group));
    let named = |to: &str, from: &str| findings.differences.iter().position(|d| d.to == to && d.from == from);
    match (named(to, from), named(from, to)) {
        (Some(k), _) => (k, 1.0),
        (None, Some(k)) => (k, -1.0),
        (None, None) => panic!("{}: the pair {:?} is not compared", e.case, e.group),
    }
}

fn difference(findings: &Findings, e: &Expected) -> Got {
    let (index, sign) = pair(findings, e);
    let gap = &findings.differences[index];
    let (on_grid, k) = place(&gap.grid.time, &gap.at_visits.time, e);
    let points = if on_grid { &gap.grid } else { &gap.at_visits };
    Got { value: sign * points.estimate[k].unwrap(), se: points.se[k].unwrap() }
}

/// The critical value of all compared pairs, or of one pair alone where it is the only one.
fn critical(findings: &Findings, e: &Expected) -> f64 {
    if !e.group.is_empty() {
        assert_eq!(findings.differences.len(), 1, "{}: several pairs share one critical value", e.case);
    }
    match &findings.differences[0].critical {
        Critical::One(value) => *value,
        Critical::Many(values) => panic!("{}: one critical value was expected, not {}", e.case, values.len()),
    }
}

/// Area and its standard error, of a group or a pair.
fn area(findings: &Findings, e: &Expected) -> (f64, f64) {
    let parts = |effect: Effect, sign: f64| {
        let (low, high) = (effect.lower, effect.upper);
        (sign * effect.estimate, (high - low) / (2.0 * NORMAL))
    };
    if e.group.contains(" - ") {
        let (index, sign) = pair(findings, e);
        return parts(findings.pair_effects[index].area.unwrap(), sign);
    }
    parts(findings.group_effects[group(findings, e)].area.unwrap(), 1.0)
}
