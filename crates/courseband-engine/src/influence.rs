//! What one subject does to the answer: every subject left out in turn.
//!
//! Variance parameters are estimated again without the subject (Cook 1977,
//! Technometrics 19:15, carried to mixed models by exact deletion), starting from the
//! full fit, so that a refit takes a few evaluations.

use crate::fit::Fit;
use crate::posterior::Contrast;
use crate::reduce::Design;
use crate::refit::Refitter;

/// What leaving one subject out does to a family of contrasts.
#[derive(Debug, Clone, PartialEq)]
pub struct Influence {
    /// Index of the subject in the data.
    pub subject: usize,
    /// Value of each contrast without the subject, on the modelled scale; empty where the refit
    /// failed or the group would be empty.
    pub values: Vec<f64>,
    /// Largest movement of a contrast in its own standard error of the full fit.
    pub largest: f64,
    /// Index of the contrast that moved most.
    pub at: usize,
}

impl Fit {
    /// Leaves out each of `subjects` in turn (indices into the data). Contrasts whose standard error is zero do not count.
    #[must_use]
    pub fn influence(&self, contrasts: &[Contrast], subjects: &[usize]) -> Vec<Influence> {
        let each: Vec<Vec<usize>> = subjects.iter().map(|&s| vec![s]).collect();
        self.influence_of(contrasts, &each)
    }

    /// The same with several subjects at a time: a cluster. [`Influence::subject`] is the first of them.
    #[must_use]
    pub fn influence_of(&self, contrasts: &[Contrast], sets: &[Vec<usize>]) -> Vec<Influence> {
        let full: Vec<_> = {
            let posterior = self.corrected();
            contrasts.iter().map(|c| posterior.estimate(c)).collect()
        };
        let refitter = Refitter::new(self);
        (sets.iter())
            .map(|subjects| {
                let values: Vec<f64> = (self.design.without_all(subjects))
                    .and_then(|design| refitter.refit_closely(design, &self.theta))
                    .map(|fit| {
                        let posterior = fit.plug_in();
                        contrasts.iter().map(|c| posterior.estimate(c).mean).collect()
                    })
                    .unwrap_or_default();
                let moves =
                    values.iter().zip(&full).map(|(v, e)| if e.se > 0.0 { (v - e.mean).abs() / e.se } else { 0.0 });
                let (at, largest) =
                    moves.enumerate().fold((0, 0.0), |best, (k, m)| if m > best.1 { (k, m) } else { best });
                Influence { subject: subjects[0], values, largest, at }
            })
            .collect()
    }
}

impl Design {
    /// The design without some subjects, units and bases kept. `None` where a group would be empty.
    fn without_all(&self, subjects: &[usize]) -> Option<Design> {
        let (first, rest) = subjects.split_first()?;
        rest.iter().try_fold(self.without(*first)?, |design, &subject| design.without(subject))
    }

    /// The design without one subject, units and bases kept. `None` where its group would be empty.
    pub(crate) fn without(&self, subject: usize) -> Option<Design> {
        let mut design = self.clone();
        let at = design.patterns.iter().position(|p| p.subjects.contains(&subject))?;
        let pattern = &mut design.patterns[at];
        let (g, m, n) = (pattern.group, pattern.subjects.len(), pattern.times.len());
        let column = pattern.subjects.iter().position(|&s| s == subject)?;
        pattern.subjects.remove(column);
        let keep = |k: &usize| k % m != column;
        pattern.responses = (0..n * m).filter(keep).map(|k| pattern.responses[k]).collect();
        if !pattern.detail.is_empty() {
            pattern.detail = (0..n * m).filter(keep).map(|k| pattern.detail[k]).collect();
        }
        pattern.table_row.iter().for_each(|&row| design.seen[g][row] -= 1.0);
        pattern.step.iter().for_each(|&step| design.steps[g][step].count -= 1.0);
        design.rows[g] -= n;
        if m == 1 {
            design.patterns.remove(at);
            for members in &mut design.clusters {
                members.retain(|&p| p != at);
                members.iter_mut().filter(|p| **p > at).for_each(|p| *p -= 1);
            }
            design.clusters.retain(|members| !members.is_empty());
        }
        (design.rows[g] > 0).then_some(design)
    }
}

#[cfg(test)]
mod tests {
    use crate::fit::fit;
    use crate::model::{Data, Model, Serial, SubjectEffects, SubjectRows};
    use crate::special::Rng;

    fn made_up() -> Data {
        let mut rng = Rng::new(31);
        let mut subjects = Vec::new();
        for k in 0..14 {
            let level = 0.8 * rng.normal();
            let times: Vec<f64> = (0..7).map(f64::from).filter(|t| *t == 0.0 || rng.uniform() < 0.85).collect();
            let off = if k == 5 { 6.0 } else { 0.0 };
            let responses =
                times.iter().map(|t| libm::sin(t / 2.0) + level + off * t / 6.0 + 0.4 * rng.normal()).collect();
            subjects.push(SubjectRows { group: k % 2, times, responses, ..SubjectRows::default() });
        }
        Data { groups: 2, subjects, ..Data::default() }
    }

    #[test]
    fn leaving_out_equals_fitting_without() {
        let data = made_up();
        for serial in [Serial::None, Serial::Ar1] {
            let model = Model { serial, subjects: SubjectEffects::Intercept, ..Model::default() };
            let full = fit(&data, &model).unwrap();
            let gaps: Vec<_> = (0..7).map(|t| full.gap(0, 1, f64::from(t))).collect();
            let all: Vec<usize> = (0..data.subjects.len()).collect();
            let influence = full.influence(&gaps, &all);
            for one in &influence {
                let mut less = data.clone();
                less.subjects.remove(one.subject);
                let brute = fit(&less, &model).unwrap();
                for (t, value) in one.values.iter().enumerate() {
                    let expected = brute.plug_in().estimate(&brute.gap(0, 1, t as f64)).mean;
                    assert!((value - expected).abs() < 1e-6, "{serial:?} {} {t}: {value} {expected}", one.subject);
                }
            }
            let most = influence.iter().max_by(|a, b| a.largest.total_cmp(&b.largest)).unwrap();
            assert_eq!(most.subject, 5);
        }
    }
}
