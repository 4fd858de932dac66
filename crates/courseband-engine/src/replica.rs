//! Tables that obey a fit's model, each fitted like the fit's own: what a check must be compared with.
//!
//! Responses are simulated on the same design from the estimates, and everything is estimated again
//! (the parametric bootstrap; Davison & Hinkley 1997, Bootstrap Methods and their Application, sec 4.2).

use crate::fit::Fit;
use crate::refit::Refitter;
use crate::simulate::simulate_responses;
use crate::special::Rng;
use nalgebra::DMatrix;

/// Streams of random numbers that calibration does not use.
const STREAM: u64 = 1 << 40;

/// Simulated tables of one fit.
#[derive(Debug)]
pub struct Replicas<'a> {
    fit: &'a Fit,
    refitter: Refitter,
    coefficients: Vec<DMatrix<f64>>,
    seed: u64,
}

impl<'a> Replicas<'a> {
    /// Prepares simulated tables; `None` where the response is not normal.
    #[must_use]
    pub fn new(fit: &'a Fit, seed: u64) -> Option<Self> {
        if fit.model.family != crate::model::Family::Normal {
            return None;
        }
        let coefficients = fit.solved.iter().map(|solved| solved.coefficients.clone()).collect();
        Some(Replicas { fit, refitter: Refitter::new(fit), coefficients, seed })
    }

    /// Table number `index` fitted; the same for the same seed. `None` where that fit failed.
    #[must_use]
    pub fn get(&self, index: u64) -> Option<Fit> {
        let mut rng = Rng::stream(self.seed, STREAM + index);
        let Fit { design, layout, theta, .. } = self.fit;
        let table = simulate_responses(design, layout, theta, &self.coefficients, &mut rng);
        self.refitter.refit(table, theta)
    }
}

/// Lower and upper limits between which 95 % of `curves` lie with all their points: pointwise the k-th smallest and
/// largest, k as large as that allows (Davison & Hinkley 1997, sec 4.2.4). `curves` have equal lengths; empty without any.
#[must_use]
pub fn envelope(curves: &[Vec<f64>]) -> Vec<[f64; 2]> {
    let (count, points) = (curves.len(), curves.first().map_or(0, Vec::len));
    let sorted: Vec<Vec<f64>> = (0..points)
        .map(|j| {
            let mut column: Vec<f64> = curves.iter().map(|curve| curve[j]).collect();
            column.sort_by(f64::total_cmp);
            column
        })
        .collect();
    let wholly = |k: usize| {
        let within = |curve: &&Vec<f64>| {
            curve.iter().zip(&sorted).all(|(&y, column)| y >= column[k] && y <= column[count - 1 - k])
        };
        curves.iter().filter(within).count()
    };
    let depth = (1..count / 2).take_while(|&k| 20 * wholly(k) >= 19 * count).last().unwrap_or(0);
    sorted.iter().map(|column| [column[depth], column[count - 1 - depth]]).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fit::fit;
    use crate::model::{Data, Model, SubjectRows};

    #[test]
    fn an_envelope_holds_its_share_of_fresh_curves_with_all_their_points() {
        let mut rng = Rng::new(4);
        let mut curve = || (0..20).map(|_| rng.normal()).collect::<Vec<f64>>();
        let limits = envelope(&(0..999).map(|_| curve()).collect::<Vec<_>>());
        let fresh = (0..2000).filter(|_| curve().iter().zip(&limits).all(|(y, [low, high])| y >= low && y <= high));
        let share = fresh.count() as f64 / 2000.0;
        assert!((share - 0.95).abs() < 0.025, "{share}");
    }

    #[test]
    fn replicas_obey_the_model_and_come_again() {
        let mut rng = Rng::new(8);
        let mut subjects = Vec::new();
        for k in 0..20 {
            let level = rng.normal();
            let times: Vec<f64> = (0..6).map(f64::from).collect();
            let responses = times.iter().map(|t| libm::sin(*t) + level + 0.5 * rng.normal()).collect();
            subjects.push(SubjectRows { group: k % 2, times, responses, ..SubjectRows::default() });
        }
        let fitted = fit(&Data { groups: 2, subjects, ..Data::default() }, &Model::default()).unwrap();
        let replicas = Replicas::new(&fitted, 1).unwrap();
        let all: Vec<Fit> = (0..60).filter_map(|k| replicas.get(k)).collect();
        assert!(all.len() > 55);
        let mean = all.iter().map(|one| one.residual_sd(0)).sum::<f64>() / all.len() as f64;
        assert!((mean / fitted.residual_sd(0) - 1.0).abs() < 0.05, "{mean}");
        assert_eq!(replicas.get(3).unwrap().theta, replicas.get(3).unwrap().theta);
        assert_ne!(all[0].theta, all[1].theta);
    }
}
