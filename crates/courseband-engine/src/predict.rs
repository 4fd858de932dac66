//! How well a model foresees a subject that it has not seen.
//!
//! Each subject is left out of the curves, variance parameters held at their estimates, and its rows are
//! predicted one by one: mean of its group's course, variance of the curve plus that of a new subject.

use crate::criterion::Criterion;
use crate::fit::Fit;
use crate::model::Family;
use crate::posterior::{Contrast, solved_value, variance};
use crate::reduce::Design;
use crate::refit::Refitter;
use crate::special::Rng;
use nalgebra::{Cholesky, DVector};

/// Predictions of one subject's rows by the others, on the modelled scale.
#[derive(Debug, Clone, PartialEq)]
pub struct Foreseen {
    /// Index of the subject in the data.
    pub subject: usize,
    /// Predicted mean of each row.
    pub mean: Vec<f64>,
    /// Predicted standard deviation.
    pub sd: Vec<f64>,
    /// What was measured.
    pub response: Vec<f64>,
}

impl Fit {
    /// Predictions of every subject by the others; a subject whose group would be empty without it is left out.
    #[must_use]
    pub fn foreseen(&self) -> Vec<Foreseen> {
        let units = &self.design.units;
        let mut all = Vec::new();
        for pattern in &self.design.patterns {
            let total = self.subject_total(pattern);
            let m = pattern.subjects.len();
            for (s, &subject) in pattern.subjects.iter().enumerate() {
                let Some(design) = self.design.without(subject) else { continue };
                let solved = Criterion::new(&design, &self.layout).evaluate(&self.theta, false).map(|e| e.solved);
                let Some(solved) = solved else { continue };
                let rows = (0..pattern.times.len()).map(|j| {
                    let contrast = Contrast::of_columns(pattern.group, self.design.columns_of(pattern, j));
                    let mean = solved_value(&design.placement, &solved, &contrast);
                    (mean, libm::sqrt(variance(&design.placement, &solved, &contrast) + total[(j, j)]))
                });
                let rows: Vec<(f64, f64)> = rows.collect();
                let outer = |y: f64| units.response_centre + units.response_scale * y;
                all.push(Foreseen {
                    subject,
                    mean: rows.iter().map(|(mean, _)| outer(*mean)).collect(),
                    sd: rows.iter().map(|(_, sd)| units.response_scale * sd).collect(),
                    response: (0..rows.len()).map(|j| outer(pattern.responses[j * m + s])).collect(),
                });
            }
        }
        all.sort_by_key(|one| one.subject);
        all
    }
}

/// Values that a model foresees for one subject by the others, in the response's own unit.
#[derive(Debug, Clone, PartialEq)]
pub struct ForeseenValues {
    /// Index of the subject in the data.
    pub subject: usize,
    /// Simulated values of each row.
    pub values: Vec<Vec<f64>>,
    /// What was measured.
    pub response: Vec<f64>,
}

impl Fit {
    /// The same as [`Fit::foreseen`] for a response that is not normal: `draws` simulated values per row, of a new
    /// subject, the curve's uncertainty included. The same for the same seed.
    #[must_use]
    pub fn foreseen_values(&self, draws: usize, seed: u64) -> Vec<ForeseenValues> {
        let mut all = Vec::new();
        for pattern in &self.design.patterns {
            let variance_of_error = self.layout.variance(&self.theta, pattern.group);
            let total = self.subject_total(pattern);
            let m = pattern.subjects.len();
            for (s, &subject) in pattern.subjects.iter().enumerate() {
                let Some(design) = self.design.without(subject) else { continue };
                let solved = Criterion::new(&design, &self.layout).evaluate(&self.theta, false).map(|e| e.solved);
                let Some(solved) = solved else { continue };
                let mut rng = Rng::stream(seed, subject as u64);
                let rows = (0..pattern.times.len()).map(|j| {
                    let contrast = Contrast::of_columns(pattern.group, self.design.columns_of(pattern, j));
                    let mean = solved_value(&design.placement, &solved, &contrast);
                    let between = (total[(j, j)] - variance_of_error).max(0.0);
                    let sd = libm::sqrt(variance(&design.placement, &solved, &contrast) + between);
                    let value = |rng: &mut Rng| {
                        let mu = libm::exp((mean + sd * rng.normal()).min(50.0));
                        drawn(self.model.family, mu, variance_of_error, rng)
                    };
                    (0..draws).map(|_| value(&mut rng)).collect()
                });
                let values = rows.collect();
                let response = (0..pattern.times.len()).map(|j| pattern.responses[j * m + s]).collect();
                all.push(ForeseenValues { subject, values, response });
            }
        }
        all.sort_by_key(|one| one.subject);
        all
    }
}

/// One value of a distribution with this mean.
fn drawn(family: Family, mu: f64, dispersion: f64, rng: &mut Rng) -> f64 {
    match family {
        Family::Gamma => mu * dispersion * 0.5 * rng.chi2(2.0 / dispersion),
        Family::NegativeBinomial => {
            let rate = mu * dispersion * 0.5 * rng.chi2(2.0 / dispersion);
            rng.poisson(rate)
        }
        Family::Poisson => rng.poisson(mu),
        // Not foreseen by simulation.
        _ => f64::NAN,
    }
}

/// A subject whose level is far from its group's, in standard deviations of a new subject's.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct OddSubject {
    /// Index of the subject in the data.
    pub subject: usize,
    /// Signed distance; variances and curves estimated without the subject.
    pub distance: f64,
}

/// Subjects whose distance is computed again without them.
const LOOKED_AT: usize = 3;

impl Fit {
    /// The subject whose level is farthest from its group's: the few farthest are each left out and everything is
    /// estimated again, so that a subject does not hide behind the variance that it makes. `None` where no refit succeeds.
    #[must_use]
    pub fn odd_subject(&self) -> Option<OddSubject> {
        let subjects: Vec<usize> = self.design.patterns.iter().flat_map(|p| p.subjects.iter().copied()).collect();
        let mut all: Vec<OddSubject> =
            subjects.into_iter().filter_map(|s| self.distance_of(s, &self.design, self)).collect();
        all.sort_by(|a, b| b.distance.abs().total_cmp(&a.distance.abs()).then(a.subject.cmp(&b.subject)));
        let refitter = Refitter::new(self);
        let again = all.iter().take(LOOKED_AT).filter_map(|one| {
            let without = self.design.without(one.subject)?;
            let refitted = refitter.refit_closely(without, &self.theta)?;
            self.distance_of(one.subject, &self.design, &refitted)
        });
        again.max_by(|a, b| a.distance.abs().total_cmp(&b.distance.abs()))
    }

    /// `1'V^-1 r` over its standard deviation, curves and variances those of `by`.
    fn distance_of(&self, subject: usize, design: &Design, by: &Fit) -> Option<OddSubject> {
        let pattern = design.patterns.iter().find(|p| p.subjects.contains(&subject))?;
        let (n, m) = (pattern.times.len(), pattern.subjects.len());
        let s = pattern.subjects.iter().position(|&own| own == subject)?;
        let mut total = by.subject_total(pattern);
        let contrasts: Vec<Contrast> =
            (0..n).map(|j| Contrast::of_columns(pattern.group, design.columns_of(pattern, j))).collect();
        let placement = &by.design.placement;
        // The curve's own uncertainty, about the same at all rows: its mean over them.
        let curve = contrasts.iter().map(|c| variance(placement, &by.solved, c)).sum::<f64>() / n as f64;
        total.add_scalar_mut(curve);
        let factor = Cholesky::new(total)?;
        let ones = DVector::from_element(n, 1.0);
        let r = DVector::from_fn(n, |j, _| {
            pattern.responses[j * m + s] - solved_value(placement, &by.solved, &contrasts[j])
        });
        let weights = factor.solve(&ones);
        Some(OddSubject { subject, distance: weights.dot(&r) / libm::sqrt(weights.dot(&ones)) })
    }
}

#[cfg(test)]
mod tests {
    use crate::fit::fit;
    use crate::model::{Data, Model, SubjectRows};
    use crate::special::Rng;

    #[test]
    fn a_subject_far_off_is_found_although_it_widens_the_spread() {
        let mut rng = Rng::new(6);
        let mut subjects = Vec::new();
        for k in 0..20 {
            let level = if k == 7 { 4.0 } else { rng.normal() };
            let times: Vec<f64> = (0..6).map(f64::from).collect();
            let responses = times.iter().map(|t| t + level + 0.5 * rng.normal()).collect();
            subjects.push(SubjectRows { group: k % 2, times, responses, ..SubjectRows::default() });
        }
        let odd =
            fit(&Data { groups: 2, subjects, ..Data::default() }, &Model::default()).unwrap().odd_subject().unwrap();
        assert!(odd.subject == 7 && odd.distance > 3.0, "{odd:?}");
    }

    #[test]
    fn new_subjects_lie_in_their_predictions_as_often_as_promised() {
        let mut rng = Rng::new(5);
        let mut subjects = Vec::new();
        for k in 0..120 {
            let level = rng.normal();
            let times: Vec<f64> = (0..5).map(f64::from).collect();
            let responses = times.iter().map(|t| 3.0 + libm::sin(*t) + level + 0.5 * rng.normal()).collect();
            subjects.push(SubjectRows { group: k % 2, times, responses, ..SubjectRows::default() });
        }
        let fitted = fit(&Data { groups: 2, subjects, ..Data::default() }, &Model::default()).unwrap();
        let all = fitted.foreseen();
        let z: Vec<f64> = all
            .iter()
            .flat_map(|f| (0..f.mean.len()).map(|j| (f.response[j] - f.mean[j]) / f.sd[j]).collect::<Vec<_>>())
            .collect();
        assert_eq!(z.len(), 600);
        let square = z.iter().map(|z| z * z).sum::<f64>() / 600.0;
        assert!((square - 1.0).abs() < 0.2, "{square}");
        // Left out for good: the same prediction as from a table without the subject.
        assert!(all[3].sd[0] > 1.0 && all[3].sd[0] < 1.4);
    }
}
