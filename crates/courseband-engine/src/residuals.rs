//! Residuals of a fit: around the group's course, and made independent.
//!
//! For one subject `r = y - F b` has covariance `V = Z D Z' + s C`. With
//! `V = L L'`, `w = L^-1 r` has independent standard normal entries if the model holds
//! (curve uncertainty left out); each `w` is a value minus its prediction from the
//! subject's earlier visits, over that prediction's standard deviation.

use crate::fit::Fit;
use crate::params::Layout;
use crate::reduce::Pattern;
use crate::simulate::curve_at;
use nalgebra::{Cholesky, DMatrix, DVector};

/// One row's residuals, in the order of the data's subjects and their times.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Residual {
    /// Index of the subject in the data.
    pub subject: usize,
    /// Group of the subject.
    pub group: usize,
    /// Time in the table's unit.
    pub time: f64,
    /// Course of the group, on the modelled scale.
    pub course: f64,
    /// Response minus course, on the modelled scale.
    pub around_course: f64,
    /// Made independent with unit variance.
    pub independent: f64,
    /// Response minus its prediction from all other rows of the subject, over that prediction's
    /// standard deviation: `(V^-1 r)_j / sqrt((V^-1)_jj)`.
    pub given_rest: f64,
}

impl Fit {
    /// Residuals of every row. Subjects with over 2,000 rows are left out.
    #[must_use]
    pub fn residuals(&self) -> Vec<Residual> {
        let mut all: Vec<Residual> = Vec::new();
        let units = &self.design.units;
        let coefficients: Vec<DMatrix<f64>> = self.solved.iter().map(|s| s.coefficients.clone()).collect();
        for pattern in self.design.patterns.iter().filter(|p| p.times.len() <= 2000) {
            let g = pattern.group;
            let Some(factor) = Cholesky::new(self.subject_total(pattern)) else { continue };
            let inverse = factor.inverse();
            let mean = curve_at(&self.design, pattern, &coefficients);
            let m = pattern.subjects.len();
            for (s, &subject) in pattern.subjects.iter().enumerate() {
                let r = DVector::from_fn(mean.len(), |j, _| pattern.responses[j * m + s] - mean[j]);
                let mut w = r.clone();
                factor.l_dirty().solve_lower_triangular_mut(&mut w);
                let weighed = &inverse * &r;
                all.extend((0..mean.len()).map(|j| Residual {
                    subject,
                    group: g,
                    time: units.time_origin + units.time_span * pattern.times[j],
                    course: units.response_centre + units.response_scale * mean[j],
                    around_course: units.response_scale * r[j],
                    independent: w[j],
                    given_rest: weighed[j] / libm::sqrt(inverse[(j, j)]),
                }));
            }
        }
        all.sort_by(|a, b| a.subject.cmp(&b.subject).then(a.time.total_cmp(&b.time)));
        all
    }

    /// Covariance of one subject's rows, internal unit; its cluster's effects count as its own.
    pub(crate) fn subject_total(&self, pattern: &Pattern) -> DMatrix<f64> {
        let cluster = self.layout.cluster_factor(&self.theta);
        let shared = &cluster * cluster.transpose();
        covariance(&self.layout, &self.theta, pattern.group, &pattern.times, &pattern.effects, Some(shared))
    }
}

/// Covariance of the rows of one subject of `group` at `times`, with its effects' columns (row by row) and what its
/// cluster adds to their covariance.
pub(crate) fn covariance(
    layout: &Layout,
    theta: &[f64],
    group: usize,
    times: &[f64],
    effects: &[f64],
    cluster: Option<DMatrix<f64>>,
) -> DMatrix<f64> {
    let factor = layout.subject_factor(theta, group);
    let mut d = &factor * factor.transpose();
    if let Some(cluster) = cluster {
        d += cluster;
    }
    let variance = layout.variance(theta, group);
    let shape = layout.error_shape(theta);
    let z = DMatrix::from_row_slice(times.len(), d.nrows(), effects);
    let between = &z * d * z.transpose();
    DMatrix::from_fn(times.len(), times.len(), |i, j| {
        let own = if i == j { 1.0 } else { 0.0 };
        let error = shape.map_or(own, |shape| {
            (1.0 - shape.nugget) * libm::exp(-shape.rate * (times[i] - times[j]).abs()) + shape.nugget * own
        });
        variance * error + between[(i, j)]
    })
}

#[cfg(test)]
mod tests {
    use crate::fit::fit;
    use crate::model::{Data, Model, Serial, SubjectEffects, SubjectRows};
    use crate::special::Rng;

    #[test]
    fn independent_residuals_are_standard_normal_where_the_model_holds() {
        let mut rng = Rng::new(9);
        let mut subjects = Vec::new();
        for k in 0..60 {
            let (level, mut state) = (rng.normal(), rng.normal());
            let times: Vec<f64> = (0..8).map(f64::from).collect();
            let responses = (times.iter())
                .map(|t| {
                    state = 0.6 * state + 0.8 * rng.normal();
                    20.0 + t + level + 0.5 * state
                })
                .collect();
            subjects.push(SubjectRows { group: k % 2, times, responses, ..SubjectRows::default() });
        }
        let data = Data { groups: 2, subjects, ..Data::default() };
        let fitted =
            fit(&data, &Model { serial: Serial::Ar1, subjects: SubjectEffects::Intercept, ..Model::default() })
                .unwrap();
        let all = fitted.residuals();
        assert_eq!(all.len(), 480);
        let n = all.len() as f64;
        let square = all.iter().map(|r| r.independent * r.independent).sum::<f64>() / n;
        assert!((square - 1.0).abs() < 0.05, "{square}");
        let rest = all.iter().map(|r| r.given_rest * r.given_rest).sum::<f64>() / n;
        assert!((rest - 1.0).abs() < 0.1, "{rest}");
        let lag = all.windows(2).filter(|w| w[0].subject == w[1].subject).map(|w| w[0].independent * w[1].independent);
        assert!((lag.sum::<f64>() / (60.0 * 7.0)).abs() < 0.12);
        let first = &data.subjects[0];
        assert!((all[0].course + all[0].around_course - first.responses[0]).abs() < 1e-9);
    }
}
