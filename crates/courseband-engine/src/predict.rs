//! How well a model foresees a subject that it has not seen.
//!
//! Each subject is left out of the curves, variance parameters held at their estimates, and its rows are
//! predicted one by one: mean of its group's course, variance of the curve plus that of a new subject.

use crate::criterion::Criterion;
use crate::fit::Fit;
use crate::posterior::{Contrast, solved_value, variance};

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

#[cfg(test)]
mod tests {
    use crate::fit::fit;
    use crate::model::{Data, Model, SubjectRows};
    use crate::special::Rng;

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
