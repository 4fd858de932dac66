//! Standard errors that trust the subjects and not the model's covariance.
//!
//! A contrast `f'b` with `b = A^-1 F'V^-1 y` is a sum over subjects of `w_i' e_i`, `e_i` the residuals made
//! independent by the model's own V and `w_i = L_i^-1 F_i A^-1 f`. With the leverage `H_i = L_i^-1 F_i A^-1 F_i' L_i'^-1`
//! taken out, `e_i* = (I - H_i)^(-1/2) e_i`, the sum of `(w_i' e_i*)^2` estimates its variance whatever V is
//! (Bell & McCaffrey 2002, Survey Methodology 28:169, CR2, in the whitened form of Pustejovsky & Tipton 2018,
//! JBES 36:672, from memory). Smoothing bias is in neither this nor the variance that it is laid beside.

use crate::fit::Fit;
use crate::posterior::Contrast;
use crate::spectral::symmetric_eigen;
use nalgebra::{Cholesky, DMatrix, DVector};
use std::collections::BTreeMap;

/// Standard error of a contrast by the model and by the subjects, smoothing bias left out of both.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RobustError {
    /// By the model.
    pub model: f64,
    /// By the subjects, or the clusters where these are in the model.
    pub robust: f64,
}

impl Fit {
    /// Both standard errors of each contrast, on the modelled scale. Units are subjects; where clusters are modelled,
    /// the contributions of a cluster's subjects are summed before they are squared.
    #[must_use]
    pub fn robust_errors(&self, contrasts: &[Contrast]) -> Vec<RobustError> {
        let placement = &self.design.placement;
        let inverses: Vec<DMatrix<f64>> = self.solved.iter().map(|s| s.factor.inverse()).collect();
        // A^-1 f of each contrast, per block.
        let solved: Vec<Vec<DVector<f64>>> = (contrasts.iter())
            .map(|contrast| {
                (0..placement.blocks())
                    .map(|block| &inverses[block] * DVector::from_vec(contrast.on_block(placement, block)))
                    .collect()
            })
            .collect();
        let mut sums: Vec<BTreeMap<usize, f64>> = vec![BTreeMap::new(); contrasts.len()];
        let mut model = vec![0.0; contrasts.len()];
        for (index, pattern) in self.design.patterns.iter().enumerate() {
            let g = pattern.group;
            let block = placement.block(g);
            let Some(factor) = Cholesky::new(self.subject_total(pattern)) else { continue };
            let n = pattern.times.len();
            let own = DMatrix::from_fn(n, placement.extended(g), |j, c| self.design.columns_of(pattern, j)[c]);
            let white = factor.l().solve_lower_triangular(&own).unwrap_or(own.clone());
            let leverage = &white * placement.gather(g, &inverses[block]) * white.transpose();
            let adjust = inverse_root(&(DMatrix::identity(n, n) - leverage));
            let course = &own * placement.gather_rows(g, &self.solved[block].coefficients);
            let m = pattern.subjects.len();
            let cluster = self.design.clusters.iter().position(|of| of.contains(&index));
            for (k, all) in solved.iter().enumerate() {
                let part = DVector::from_fn(placement.extended(g), |c, _| all[block][placement.position(g, c)]);
                let w = &white * part;
                model[k] += m as f64 * w.norm_squared();
                for (s, &subject) in pattern.subjects.iter().enumerate() {
                    let r = DVector::from_fn(n, |j, _| pattern.responses[j * m + s] - course[j]);
                    let e = factor.l().solve_lower_triangular(&r).unwrap_or(r);
                    let unit = cluster.unwrap_or(subject);
                    *sums[k].entry(unit).or_insert(0.0) += w.dot(&(&adjust * e));
                }
            }
        }
        let scale = self.design.units.response_scale;
        (sums.iter().zip(model))
            .map(|(units, model)| RobustError {
                model: scale * libm::sqrt(model),
                robust: scale * libm::sqrt(units.values().map(|sum| sum * sum).sum::<f64>()),
            })
            .collect()
    }
}

/// `S^(-1/2)`; directions without room are left as they are.
fn inverse_root(matrix: &DMatrix<f64>) -> DMatrix<f64> {
    let eigen = symmetric_eigen(&((matrix + matrix.transpose()) * 0.5));
    let roots = eigen.eigenvalues.map(|value: f64| if value > 1e-6 { 1.0 / libm::sqrt(value) } else { 1.0 });
    &eigen.eigenvectors * DMatrix::from_diagonal(&roots) * eigen.eigenvectors.transpose()
}

#[cfg(test)]
mod tests {
    use crate::fit::fit;
    use crate::model::{Data, Model, Shape, SubjectEffects, SubjectRows};
    use crate::special::Rng;

    fn data(groups_differ: bool) -> Data {
        let mut rng = Rng::new(8);
        let mut subjects = Vec::new();
        for k in 0..60 {
            let wide = if groups_differ && k % 2 == 1 { 3.0 } else { 1.0 };
            let level = wide * rng.normal();
            let times: Vec<f64> = (0..6).map(f64::from).collect();
            let responses = times.iter().map(|t| t + level + wide * 0.5 * rng.normal()).collect();
            subjects.push(SubjectRows { group: k % 2, times, responses, ..SubjectRows::default() });
        }
        Data { groups: 2, subjects, ..Data::default() }
    }

    #[test]
    fn both_agree_where_the_model_holds_and_part_where_it_does_not() {
        let lines = Model { shape: Shape::Straight, subjects: SubjectEffects::Intercept, ..Model::default() };
        let right = fit(&data(false), &lines).unwrap();
        let e = right.robust_errors(&[right.gap(0, 1, 2.0)])[0];
        assert!((e.robust / e.model - 1.0).abs() < 0.2, "{e:?}");
        // A course of a wide group, under one spread for all: the model's error is too small.
        let wrong = fit(&data(true), &lines).unwrap();
        let e = wrong.robust_errors(&[wrong.course(1, 2.0)])[0];
        assert!(e.robust > 1.2 * e.model, "{e:?}");
    }

    /// One mean of n values, CR2 = s^2 / n exactly (Bell & McCaffrey 2002).
    #[test]
    fn one_mean_gives_the_textbook_error() {
        let values = [1.0, 2.5, 3.0, 4.5, 7.0];
        let subjects =
            values.iter().map(|&y| SubjectRows { times: vec![0.0], responses: vec![y], ..SubjectRows::default() });
        let data = Data { groups: 1, subjects: subjects.collect(), ..Data::default() };
        let plain = Model { shape: Shape::Straight, subjects: SubjectEffects::None, ..Model::default() };
        let fitted = fit(&data, &plain).unwrap();
        let e = fitted.robust_errors(&[fitted.course(0, 0.0)])[0];
        let mean = values.iter().sum::<f64>() / 5.0;
        let s2 = values.iter().map(|y| (y - mean) * (y - mean)).sum::<f64>() / 4.0;
        assert!((e.robust - (s2 / 5.0).sqrt()).abs() < 1e-9, "{e:?}");
    }
}
