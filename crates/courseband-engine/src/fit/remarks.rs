//! What is unusual about an optimum.

use crate::params::{Layout, Parameter};
use crate::reduce::Design;
use nalgebra::DMatrix;

/// What is unusual about an optimum.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Remark {
    /// A smoothing variance is zero: the course of this group (or of all) is a straight line.
    StraightCourse(Option<usize>),
    /// A variance of the subject effects is zero.
    NoSubjectVariance {
        /// Group, or all.
        group: Option<usize>,
        /// False: level; true: trend.
        trend: bool,
    },
    /// Level and trend of the subjects are perfectly correlated.
    PerfectCorrelation(Option<usize>),
    /// Subjects do not curve: the variance of their splines is zero.
    NoSubjectCurve(Option<usize>),
    /// A variance of the cluster effects is zero.
    NoClusterVariance {
        /// False: level; true: trend.
        trend: bool,
    },
    /// Level and trend of the clusters are perfectly correlated.
    PerfectClusterCorrelation,
    /// The variance of a run of shared columns is zero.
    NoSharedVariance(usize),
    /// The serial correlation is zero.
    NoSerialCorrelation,
    /// The serial correlation is at its upper limit.
    FullSerialCorrelation,
    /// The measurement error is zero.
    NoMeasurementError,
    /// There is measurement error only.
    OnlyMeasurementError,
    /// The correlation time exceeds the follow-up: level and serial correlation cannot be told apart.
    LevelOrSerial,
    /// A direction of the parameters is not determined by the data.
    FlatDirection,
}

/// A variance under a millionth of the error variance counts as zero, a correlation over 0.999 as one.
pub(super) fn remarks(design: &Design, layout: &Layout, theta: &[f64]) -> Vec<Remark> {
    let mut remarks = Vec::new();
    let groups = design.bases.len();
    for (k, entry) in layout.entries.iter().enumerate() {
        match *entry {
            Parameter::Smoothing(group) if theta[k] <= layout.lower[k] => remarks.push(Remark::StraightCourse(group)),
            Parameter::Subject { group, part: 0 } => {
                let g = (0..groups).find(|&g| layout.subject[g] == k).unwrap_or(0);
                subject_remarks(layout, theta, g, group, &mut remarks);
            }
            Parameter::Subject { group, part: 3 } if theta[k] <= layout.lower[k] => {
                remarks.push(Remark::NoSubjectCurve(group));
            }
            Parameter::Cluster { part: 0 } => cluster_remarks(layout, theta, &mut remarks),
            Parameter::Shared(run) if theta[k] <= layout.lower[k] => remarks.push(Remark::NoSharedVariance(run)),
            _ => {}
        }
    }
    if let Some(shape) = layout.error_shape(theta) {
        let rate = layout.rate.unwrap_or(0);
        if theta[rate] >= layout.upper[rate] {
            remarks.push(Remark::NoSerialCorrelation);
        } else if theta[rate] <= layout.lower[rate] {
            remarks.push(Remark::FullSerialCorrelation);
        } else if shape.rate < 1.0 && layout.subjects.count() > 0 {
            remarks.push(Remark::LevelOrSerial);
        }
        if layout.nugget.is_some() && shape.nugget < 1e-6 {
            remarks.push(Remark::NoMeasurementError);
        } else if layout.nugget.is_some() && shape.nugget > 1.0 - 1e-6 {
            remarks.push(Remark::OnlyMeasurementError);
        }
    }
    remarks
}

fn subject_remarks(layout: &Layout, theta: &[f64], g: usize, group: Option<usize>, remarks: &mut Vec<Remark>) {
    let factor = layout.subject_factor(theta, g);
    let (level, trend, perfect) = zeros(&factor, layout.subjects.count(), layout.variance(theta, g));
    remarks.extend(level.then_some(Remark::NoSubjectVariance { group, trend: false }));
    remarks.extend(trend.then_some(Remark::NoSubjectVariance { group, trend: true }));
    remarks.extend(perfect.then_some(Remark::PerfectCorrelation(group)));
}

fn cluster_remarks(layout: &Layout, theta: &[f64], remarks: &mut Vec<Remark>) {
    let least = (0..layout.error.len()).map(|g| layout.variance(theta, g)).fold(f64::INFINITY, f64::min);
    let (level, trend, perfect) = zeros(&layout.cluster_factor(theta), layout.clusters.count(), least);
    remarks.extend(level.then_some(Remark::NoClusterVariance { trend: false }));
    remarks.extend(trend.then_some(Remark::NoClusterVariance { trend: true }));
    remarks.extend(perfect.then_some(Remark::PerfectClusterCorrelation));
}

/// Level without variance, trend without variance, and both perfectly correlated.
fn zeros(factor: &DMatrix<f64>, lines: usize, error: f64) -> (bool, bool, bool) {
    let covariance = factor * factor.transpose();
    let zero = |a: usize| covariance[(a, a)] < 1e-6 * error;
    if lines < 2 {
        return (lines == 1 && zero(0), false, false);
    }
    let product = covariance[(0, 0)] * covariance[(1, 1)];
    let perfect = !zero(0) && !zero(1) && covariance[(0, 1)].abs() > 0.999 * product.sqrt();
    (zero(0), zero(1), perfect)
}
