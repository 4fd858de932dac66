//! From data and model to a fit, with a verdict that can be trusted.
//!
//! The criterion can have several maxima once errors are serially correlated
//! beside random effects, so the fit starts from the fit without serial
//! correlation and from several decay rates, and is never left worse than that
//! nested fit. A variance that does not help is set to its bound exactly, and
//! said; a fit without an optimum is `Failed`.

use crate::basis::{Units, group_bases, with_start};
use crate::criterion::{Criterion, Solved};
use crate::model::{Data, Family, Likelihood, Model, Serial};
use crate::optimise::{Bounds, Objective, Point, Polished, newton, plain_inverse, quasi_newton, start};
use crate::params::{Layout, Parameter};
use crate::reduce::Design;
use nalgebra::DMatrix;
use remarks::remarks;

pub use remarks::Remark;

/// How a fit ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Verdict {
    /// An inner optimum.
    Converged,
    /// A valid optimum at the edge of the parameter space.
    Boundary,
}

/// Why there is no fit.
#[derive(Debug, Clone, PartialEq)]
pub enum FitError {
    /// A group has no rows.
    EmptyGroup(usize),
    /// A time or response is not finite.
    NotFinite,
    /// The responses do not vary around the curves, so nothing can be estimated.
    NoVariation,
    /// Fewer rows than free coefficients and one.
    TooFewRows {
        /// Rows in the data.
        rows: usize,
        /// Rows needed.
        needed: usize,
    },
    /// Several rows at one time of one subject, under serial correlation without measurement error.
    TiedTimes,
    /// A common start is asked for, but this group is not seen at the first time, or only then.
    NoCommonStart(usize),
    /// A shared column is a combination of the groups' own columns and the shared ones before it.
    Inseparable {
        /// Index of the shared column.
        column: usize,
    },
    /// The criterion cannot be computed at any start.
    NoStart,
    /// No optimum was reached.
    NotConverged {
        /// Predicted further rise of the log restricted likelihood.
        decrement: f64,
    },
}

/// A fitted model.
#[derive(Debug, Clone)]
pub struct Fit {
    pub(crate) model: Model,
    pub(crate) design: Design,
    pub(crate) layout: Layout,
    pub(crate) theta: Vec<f64>,
    pub(crate) solved: Vec<Solved>,
    /// Entries of theta that are inside their bounds.
    pub(crate) free: Vec<usize>,
    /// Hessian of minus the log restricted likelihood over `free`.
    pub(crate) hessian: DMatrix<f64>,
    pub(crate) value: f64,
    pub(crate) verdict: Verdict,
    pub(crate) remarks: Vec<Remark>,
    pub(crate) evaluations: usize,
}

impl Objective for Criterion<'_> {
    fn at(&mut self, theta: &[f64]) -> Option<(f64, Vec<f64>)> {
        self.evaluate(theta, true).map(|e| (e.value, e.gradient))
    }
}

/// Fits `model` to `data` by restricted maximum likelihood.
///
/// # Errors
/// Says why nothing can be fitted, or that no optimum was reached.
pub fn fit(data: &Data, model: &Model) -> Result<Fit, FitError> {
    check(data)?;
    let units = Units::of(data);
    let units = if model.family.is_scaled() { units } else { units.with_plain_responses() };
    let bases = group_bases(data, model, &units);
    if let Some(group) = model.common_start.then(|| group_without_start(data)).flatten() {
        return Err(FitError::NoCommonStart(group));
    }
    let started = model.common_start.then(|| with_start(data, &bases, &units));
    let data = started.as_ref().unwrap_or(data);
    let design = Design::new(data, units, bases, model);
    let free = design.unpenalised();
    if data.rows() < free + 1 {
        return Err(FitError::TooFewRows { rows: data.rows(), needed: free + 1 });
    }
    if let Some(column) = design.inseparable() {
        return Err(FitError::Inseparable { column });
    }
    if model.serial == Serial::Ar1 && design.has_ties() {
        return Err(FitError::TiedTimes);
    }
    let layout = Layout::new(model, &design);
    let found = search(data, &design, model, &layout)?;
    finish(design, model, layout, found)
}

/// A group that is not seen at the first time, or only then.
fn group_without_start(data: &Data) -> Option<usize> {
    let times = |g: Option<usize>| {
        let own = data.subjects.iter().filter(move |s| g.is_none_or(|g| s.group == g));
        own.flat_map(|s| s.times.iter().copied())
    };
    let first = times(None).fold(f64::INFINITY, f64::min);
    (0..data.groups).find(|&g| times(Some(g)).all(|t| t > first) || times(Some(g)).all(|t| t <= first))
}

fn check(data: &Data) -> Result<(), FitError> {
    for group in 0..data.groups {
        if !data.subjects.iter().any(|s| s.group == group && !s.times.is_empty()) {
            return Err(FitError::EmptyGroup(group));
        }
    }
    let finite = |s: &crate::model::SubjectRows| s.times.iter().chain(&s.responses).all(|x| x.is_finite());
    if !data.subjects.iter().all(finite) {
        return Err(FitError::NotFinite);
    }
    let mut responses = data.subjects.iter().flat_map(|s| &s.responses);
    let first = responses.next();
    if responses.all(|y| Some(y) == first) { Err(FitError::NoVariation) } else { Ok(()) }
}

struct Found {
    polished: Polished,
    evaluations: usize,
}

/// Above this many rows the optimum of a sample of the subjects is the start for all of them.
const SAMPLED_ABOVE: usize = 30_000;
/// Rows of that sample, about.
const SAMPLE_ROWS: usize = 8_000;

fn search(data: &Data, design: &Design, model: &Model, layout: &Layout) -> Result<Found, FitError> {
    let found = match sample(data) {
        Some(sample) => {
            let smaller = design.again(&sample, model.clusters);
            let first = search_fully(&smaller, model, layout)?;
            refine(design, layout, first, data.rows() as f64 / sample.rows() as f64)?
        }
        None => search_fully(design, model, layout)?,
    };
    let point = &found.polished.point;
    if (0..design.bases.len()).any(|g| point.theta[layout.error[g]] < -34.0) {
        return Err(FitError::NoVariation);
    }
    if found.polished.decrement > STOPPED_SHORT {
        return Err(FitError::NotConverged { decrement: found.polished.decrement });
    }
    Ok(found)
}

/// Every k-th subject of each group, where the data are large and subjects many.
fn sample(data: &Data) -> Option<Data> {
    let every = data.rows() / SAMPLE_ROWS;
    if data.rows() <= SAMPLED_ABOVE {
        return None;
    }
    let mut met = vec![0; data.groups];
    let subjects: Vec<_> = (data.subjects.iter())
        .filter(|s| {
            met[s.group] += 1;
            (met[s.group] - 1usize).is_multiple_of(every)
        })
        .cloned()
        .collect();
    let mut kept = vec![0; data.groups];
    subjects.iter().for_each(|s| kept[s.group] += 1);
    kept.iter().all(|&count| count >= 20).then(|| Data { subjects, ..data.without_subjects() })
}

/// A predicted further fall of the criterion above this is no optimum.
const STOPPED_SHORT: f64 = 1e-4;

/// From a start to the optimum that it leads to.
fn climb(
    criterion: &mut Criterion,
    bounds: &Bounds,
    layout: &Layout,
    begin: Point,
    plain: &DMatrix<f64>,
) -> Result<Polished, FitError> {
    let rows: usize = criterion.design.rows.iter().sum();
    let tolerance = 1e-5 * libm::sqrt(1.0 + rows as f64);
    let mut point = quasi_newton(criterion, bounds, begin, plain, tolerance, 300);
    for _ in 0..3 {
        let before = point.theta.clone();
        point = snap(criterion, bounds, layout, point);
        point = revive(criterion, bounds, layout, point);
        if point.theta == before {
            break;
        }
        point = quasi_newton(criterion, bounds, point, plain, tolerance, 100);
    }
    newton(criterion, bounds, point, 12).ok_or(FitError::NoStart)
}

fn search_fully(design: &Design, model: &Model, layout: &Layout) -> Result<Found, FitError> {
    let mut criterion = Criterion::new(design, layout);
    let bounds = Bounds { lower: &layout.lower, upper: &layout.upper };
    let scale = design.rows.iter().sum::<usize>() as f64 / 2.0;
    let plain = plain_inverse(layout.len(), scale);
    let mut spent = 0;
    let begin = if model.serial == Serial::None {
        start(&mut criterion, &bounds, plain_start(layout)).ok_or(FitError::NoStart)?
    } else {
        let (theta, used) = nested_start(design, model, layout)?;
        spent += used;
        serial_start(&mut criterion, &bounds, layout, theta, &plain)?
    };
    let mut polished = climb(&mut criterion, &bounds, layout, begin.clone(), &plain)?;
    // A ridge can stop the climb short of its top: begin again from other places, and keep the best.
    for (level, trend, smooth) in [(-0.3, -3.0, -1.0), (-1.5, -1.5, 4.0), (-3.0, -4.0, 0.0)] {
        if polished.decrement <= STOPPED_SHORT {
            break;
        }
        let mut theta = begin.theta.clone();
        for (entry, value) in layout.entries.iter().zip(theta.iter_mut()) {
            match entry {
                Parameter::Smoothing(_) => *value = smooth,
                Parameter::Subject { part: 0, .. } | Parameter::Cluster { part: 0 } => *value = level,
                Parameter::Subject { part: 1, .. } | Parameter::Cluster { part: 1 } => *value = 0.0,
                Parameter::Subject { .. } | Parameter::Cluster { .. } => *value = trend,
                _ => {}
            }
        }
        if let Some(again) = start(&mut criterion, &bounds, theta) {
            let other = climb(&mut criterion, &bounds, layout, again, &plain)?;
            if other.point.value < polished.point.value + 1e-6 && other.decrement < polished.decrement {
                polished = other;
            }
        }
    }
    Ok(Found { polished, evaluations: spent + criterion.evaluations })
}

/// From the optimum of a sample to that of all data. The sample's Hessian, times the ratio of
/// rows, serves as the first curvature and, at the end, as the Hessian.
fn refine(design: &Design, layout: &Layout, sample: Found, ratio: f64) -> Result<Found, FitError> {
    let mut criterion = Criterion::new(design, layout);
    let bounds = Bounds { lower: &layout.lower, upper: &layout.upper };
    let n = layout.len();
    let rows: usize = design.rows.iter().sum();
    let mut inverse = plain_inverse(n, rows as f64 / 2.0);
    let mut hessian = DMatrix::from_diagonal_element(n, n, rows as f64 / 2.0);
    let small = sample.polished.hessian.clone().cholesky().ok_or(FitError::NoStart)?.inverse() / ratio;
    for (i, &row) in sample.polished.free.iter().enumerate() {
        for (j, &column) in sample.polished.free.iter().enumerate() {
            inverse[(row, column)] = small[(i, j)];
            hessian[(row, column)] = sample.polished.hessian[(i, j)] * ratio;
        }
    }
    let mut theta = sample.polished.point.theta;
    for (k, value) in plain_start(layout).into_iter().enumerate() {
        if !sample.polished.free.contains(&k) {
            theta[k] = value;
        }
    }
    let begin = start(&mut criterion, &bounds, theta).ok_or(FitError::NoStart)?;
    let tolerance = 3e-6 * libm::sqrt(rows as f64);
    let mut point = quasi_newton(&mut criterion, &bounds, begin, &inverse, tolerance, 60);
    point = snap(&mut criterion, &bounds, layout, point);
    let free = bounds.free(&point);
    let hessian = DMatrix::from_fn(free.len(), free.len(), |i, j| hessian[(free[i], free[j])]);
    let gradient = DMatrix::from_fn(free.len(), 1, |i, _| point.gradient[free[i]]);
    let solved = hessian.clone().cholesky().ok_or(FitError::NoStart)?.solve(&gradient);
    let decrement = 0.5 * gradient.dot(&solved);
    let evaluations = sample.evaluations + criterion.evaluations;
    Ok(Found { polished: Polished { point, free, hessian, decrement, definite: true }, evaluations })
}

/// Half of the variance between subjects, half within; moderate smoothing.
fn plain_start(layout: &Layout) -> Vec<f64> {
    layout
        .entries
        .iter()
        .map(|entry| match entry {
            Parameter::Smoothing(_) => 2.0,
            Parameter::Error(_) => -1.2,
            Parameter::Subject { part: 1, .. } | Parameter::Cluster { part: 1 } => 0.0,
            Parameter::Subject { part: 3, .. } => 0.5,
            Parameter::Subject { .. } => -0.7,
            Parameter::Cluster { .. } => -1.2,
            Parameter::Shared(_) => -2.0,
            Parameter::Rate | Parameter::Nugget => 0.0,
        })
        .collect()
}

/// Optimum of the model without serial correlation, in the layout of the full one.
fn nested_start(design: &Design, model: &Model, layout: &Layout) -> Result<(Vec<f64>, usize), FitError> {
    let nested = Model { serial: Serial::None, ..*model };
    let smaller = Layout::new(&nested, design);
    let mut criterion = Criterion::new(design, &smaller);
    let bounds = Bounds { lower: &smaller.lower, upper: &smaller.upper };
    let scale = design.rows.iter().sum::<usize>() as f64 / 2.0;
    let begin = start(&mut criterion, &bounds, plain_start(&smaller)).ok_or(FitError::NoStart)?;
    let point = {
        let plain = plain_inverse(smaller.len(), scale);
        quasi_newton(&mut criterion, &bounds, begin, &plain, 1e-3 * libm::sqrt(1.0 + 2.0 * scale), 60)
    };
    let mut theta = plain_start(layout);
    theta[..point.theta.len()].copy_from_slice(&point.theta);
    Ok((theta, criterion.evaluations))
}

/// The best of several decay rates, each followed for a few steps.
fn serial_start(
    criterion: &mut Criterion,
    bounds: &Bounds,
    layout: &Layout,
    theta: Vec<f64>,
    plain: &DMatrix<f64>,
) -> Result<Point, FitError> {
    let rate = layout.rate.ok_or(FitError::NoStart)?;
    // Correlations between visits a median gap apart of about 0, 0.14, 0.55, 0.85 and 0.97.
    let offsets = [3.0, 2.0, 0.6, -0.6, -1.8, -3.5];
    let mut starts: Vec<Point> = Vec::new();
    for offset in offsets {
        let mut tried = theta.clone();
        tried[rate] = bounds.upper[rate] - 3.0 + offset;
        if offset < 2.0 {
            // Much of what looked like differences between subjects may be serial correlation.
            for (entry, value) in layout.entries.iter().zip(tried.iter_mut()) {
                if matches!(entry, Parameter::Subject { part: 0 | 2, .. }) {
                    *value = value.max(-3.0);
                }
            }
        }
        if let Some(nugget) = layout.nugget {
            tried[nugget] = if offset == 3.0 { 0.0 } else { -0.8 };
        }
        starts.extend(start(criterion, bounds, tried));
    }
    starts.sort_by(|a, b| a.value.total_cmp(&b.value));
    starts.truncate(2);
    let followed = starts.into_iter().map(|point| quasi_newton(criterion, bounds, point, plain, 1e-3, 8));
    followed.min_by(|a, b| a.value.total_cmp(&b.value)).ok_or(FitError::NoStart)
}

/// Sets to its bound every parameter that does not matter there.
fn snap(criterion: &mut Criterion, bounds: &Bounds, layout: &Layout, mut point: Point) -> Point {
    for k in 0..layout.len() {
        let targets = match layout.entries[k] {
            Parameter::Smoothing(_)
            | Parameter::Shared(_)
            | Parameter::Subject { part: 0 | 2 | 3, .. }
            | Parameter::Cluster { part: 0 | 2 } => vec![bounds.lower[k]],
            Parameter::Rate => vec![bounds.upper[k], bounds.lower[k]],
            Parameter::Nugget => vec![bounds.lower[k], bounds.upper[k]],
            _ => vec![],
        };
        for target in targets {
            let far = point.gradient[k].abs() > 0.05 || point.theta[k] == target;
            if far {
                continue;
            }
            let mut theta = point.theta.clone();
            theta[k] = target;
            if let Some((value, gradient)) = criterion.at(&theta)
                && value <= point.value + 1e-7
            {
                point = Point { theta, value, gradient };
            }
        }
    }
    point
}

/// Tries larger values of every variance at its lower bound: a logarithm that ran off to where
/// the criterion is flat does not come back by itself.
fn revive(criterion: &mut Criterion, bounds: &Bounds, layout: &Layout, mut point: Point) -> Point {
    for k in 0..layout.len() {
        let tries: &[f64] = match layout.entries[k] {
            Parameter::Smoothing(_) => &[-6.0, -3.0, 0.0, 3.0, 6.0],
            Parameter::Subject { part: 0 | 2, .. } | Parameter::Cluster { part: 0 | 2 } => &[-4.0, -2.5, -1.0],
            Parameter::Subject { part: 3, .. } => &[-2.0, 0.0, 2.0],
            Parameter::Shared(_) => &[-6.0, -3.0, -1.0],
            _ => &[],
        };
        if point.theta[k] > bounds.lower[k] {
            continue;
        }
        for &value in tries {
            let mut theta = point.theta.clone();
            theta[k] = value;
            if let Some((value, gradient)) = criterion.at(&theta)
                && value < point.value - 1e-6
            {
                point = Point { theta, value, gradient };
            }
        }
    }
    point
}

fn finish(design: Design, model: &Model, layout: Layout, found: Found) -> Result<Fit, FitError> {
    let Polished { point, free, hessian, definite, .. } = found.polished;
    let solved = Criterion::new(&design, &layout).evaluate(&point.theta, false).ok_or(FitError::NoStart)?.solved;
    let mut remarks = remarks(&design, &layout, &point.theta);
    if !definite {
        remarks.push(Remark::FlatDirection);
    }
    let verdict =
        if remarks.iter().any(|r| *r != Remark::LevelOrSerial) { Verdict::Boundary } else { Verdict::Converged };
    Ok(Fit {
        model: *model,
        design,
        layout,
        theta: point.theta,
        solved,
        free,
        hessian,
        value: point.value,
        verdict,
        remarks,
        evaluations: found.evaluations,
    })
}

impl Fit {
    /// How the fit ended.
    #[must_use]
    pub fn verdict(&self) -> Verdict {
        self.verdict
    }

    /// What is unusual about the optimum.
    #[must_use]
    pub fn remarks(&self) -> &[Remark] {
        &self.remarks
    }

    /// Evaluations of the criterion, all starts together.
    #[must_use]
    pub fn evaluations(&self) -> usize {
        self.evaluations
    }

    /// The fitted model.
    #[must_use]
    pub fn model(&self) -> &Model {
        &self.model
    }

    /// Log restricted likelihood in the table's own units, all constants included
    /// (Harville 1974 without the term in X'X: what mixed-model libraries report).
    #[must_use]
    pub fn log_reml(&self) -> f64 {
        let units = &self.design.units;
        let rows = self.measured_rows();
        let free = self.design.unpenalised();
        let trends = self.design.bases.iter().filter(|b| b.has_trend()).count();
        -self.value
            - (rows as f64 - free as f64) * libm::log(units.response_scale)
            - trends as f64 * libm::log(units.time_span)
    }

    /// Log likelihood in the table's own units, all constants included; that which was maximised.
    #[must_use]
    pub fn log_likelihood(&self) -> f64 {
        if self.model.likelihood == Likelihood::Restricted {
            return self.log_reml();
        }
        let rows = self.measured_rows();
        -self.value - rows as f64 * libm::log(self.design.units.response_scale)
    }

    /// Rows whose density has a unit: those that are no limit.
    fn measured_rows(&self) -> usize {
        let limits = self.design.patterns.iter().flat_map(|p| &p.detail).filter(|d| d.abs() == 1.0);
        let censored = if self.model.family == Family::Censored { limits.count() } else { 0 };
        self.design.rows.iter().sum::<usize>() - censored
    }

    /// Number of estimated parameters: free columns of the mean, and variance parameters inside their bounds.
    #[must_use]
    pub fn parameters(&self) -> usize {
        self.design.unpenalised() + self.free.len()
    }

    /// Total error standard deviation of a group, on the modelled scale.
    #[must_use]
    pub fn residual_sd(&self, group: usize) -> f64 {
        libm::sqrt(self.layout.variance(&self.theta, group)) * self.design.units.response_scale
    }

    /// Dispersion of a gamma (variance `phi mu^2`) or negative binomial (`mu + phi mu^2`) response.
    #[must_use]
    pub fn dispersion(&self) -> Option<f64> {
        let estimated = !self.model.family.is_scaled() && self.model.family.has_dispersion();
        estimated.then(|| self.layout.variance(&self.theta, 0))
    }

    /// Covariance of the subject effects of a group, q x q: level at the table's first
    /// time, trend per time unit of the table.
    #[must_use]
    pub fn subject_covariance(&self, group: usize) -> Vec<Vec<f64>> {
        self.outer_covariance(&self.layout.subject_factor(&self.theta, group), self.layout.subjects.count())
    }

    /// Covariance of the cluster effects, as [`Fit::subject_covariance`]; empty without clusters.
    #[must_use]
    pub fn cluster_covariance(&self) -> Vec<Vec<f64>> {
        self.outer_covariance(&self.layout.cluster_factor(&self.theta), self.layout.clusters.count())
    }

    /// Standard deviation, on the modelled scale, of a shared run's effects.
    #[must_use]
    pub fn shared_sd(&self, run: usize) -> Option<f64> {
        let at = self.layout.entries.iter().position(|entry| *entry == Parameter::Shared(run))?;
        Some(libm::exp(0.5 * self.theta[at]) * self.design.units.response_scale)
    }

    fn outer_covariance(&self, factor: &DMatrix<f64>, lines: usize) -> Vec<Vec<f64>> {
        let units = &self.design.units;
        let factor = factor.view((0, 0), (lines, lines));
        let mut change = DMatrix::identity(lines, lines);
        if lines == 2 {
            change[(0, 1)] = -units.subject_centre;
            change[(1, 1)] = 1.0 / units.time_span;
        }
        let moved = change * factor * units.response_scale;
        let covariance = &moved * moved.transpose();
        (0..lines).map(|a| (0..lines).map(|b| covariance[(a, b)]).collect()).collect()
    }

    /// Correlation of errors one time unit of the table apart, measurement error left out.
    #[must_use]
    pub fn serial_correlation(&self) -> Option<f64> {
        let shape = self.layout.error_shape(&self.theta)?;
        let zero = self.remarks.contains(&Remark::NoSerialCorrelation);
        Some(if zero { 0.0 } else { libm::exp(-shape.rate / self.design.units.time_span) })
    }

    /// Share of measurement error in the error variance.
    #[must_use]
    pub fn measurement_error_share(&self) -> Option<f64> {
        self.layout.nugget?;
        self.layout.error_shape(&self.theta).map(|shape| shape.nugget)
    }

    /// Most degrees of freedom of any contrast: rows less free coefficients; where no cluster holds
    /// several groups, clusters less groups, since groups then differ between clusters only.
    pub(crate) fn most_df(&self) -> f64 {
        let design = &self.design;
        let rows: usize = design.rows.iter().sum();
        let most = rows - design.unpenalised();
        let group_of = |p: &usize| design.patterns[*p].group;
        let nested = design.clusters.iter().all(|of| of.iter().all(|p| group_of(p) == group_of(&of[0])));
        if design.clusters.is_empty() || !nested {
            return most as f64;
        }
        design.clusters.len().saturating_sub(design.bases.len()).clamp(1, most.max(1)) as f64
    }

    /// Effective degrees of freedom of a group's curve: trace of `(C + P)^-1 C`, level and line included.
    #[must_use]
    pub fn effective_df(&self, group: usize) -> f64 {
        let basis = &self.design.bases[group];
        let (free, penalised) = (basis.unpenalised(), basis.penalised());
        let Some(v) = self.layout.smoothing_variance(&self.theta, group) else {
            return free as f64;
        };
        let placement = &self.design.placement;
        let inverse = self.solved[placement.block(group)].factor.inverse();
        let first = placement.position(group, free);
        let lost: f64 = (first..first + penalised).map(|j| inverse[(j, j)]).sum::<f64>() / v;
        (free + penalised) as f64 - lost
    }
}

mod remarks;

#[cfg(test)]
mod tests;
