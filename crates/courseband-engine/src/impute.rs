//! Rows after a subject left, drawn from what the model makes of the rows before.
//!
//! Proper multiple imputation (Rubin 1987, Multiple Imputation for Nonresponse in Surveys): for each table variance
//! parameters are drawn from their regularised posterior, curves from theirs given these, and a subject's later rows from
//! the normal distribution given its earlier ones. Then sensitivity: a shift that grows with the time since it was last
//! seen, or the mean of a reference group (jump to reference, copy increments in reference; Carpenter, Roger & Kenward
//! 2013, J Biopharm Stat 23:1352). The imputed table is fitted anew, smoothing and all.

use crate::calibrate::chain;
use crate::criterion::Criterion;
use crate::fit::Fit;
use crate::model::Data;
use crate::posterior::draw_coefficients;
use crate::residuals::covariance;
use crate::special::Rng;
use nalgebra::{Cholesky, DMatrix, DVector};

/// What a subject's mean is after it left.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum AfterLeaving {
    /// That of its own group: missing at random.
    #[default]
    Own,
    /// That of this group, at once.
    Jump(usize),
    /// Its own last mean, changed as this group's changes.
    Increments(usize),
}

/// Where and how rows are filled in.
#[derive(Debug, Clone, PartialEq)]
pub struct Filling {
    /// Per subject of the data: times after its last row.
    pub times: Vec<Vec<f64>>,
    /// Per group: what the mean is after leaving.
    pub after: Vec<AfterLeaving>,
    /// Per group: shift per time unit since last seen, on the modelled scale.
    pub shift: Vec<f64>,
}

/// A fit prepared for imputation.
#[derive(Debug)]
pub struct Imputer {
    fit: Fit,
    data: Data,
    draws: Vec<Vec<f64>>,
    seed: u64,
}

impl Imputer {
    /// `data` is what was fitted. `None` where variance parameters cannot be drawn, or where columns are shared
    /// or clusters modelled.
    #[must_use]
    pub fn new(fit: Fit, data: &Data, seed: u64) -> Option<Self> {
        if fit.design.shared.columns() > 0 || !fit.design.clusters.is_empty() {
            return None;
        }
        let draws = chain(&fit, seed)?;
        Some(Imputer { fit, data: data.clone(), draws, seed })
    }

    /// Imputed table number `index`: the same whoever makes it. Shifts do not change what is drawn.
    #[must_use]
    pub fn table(&self, filling: &Filling, index: u64) -> Option<Data> {
        let mut rng = Rng::stream(self.seed ^ 0x1D, index + 1);
        let theta = &self.draws[index as usize % self.draws.len()];
        let (design, layout) = (&self.fit.design, &self.fit.layout);
        let solved = Criterion::new(design, layout).evaluate(theta, false)?.solved;
        let curves = draw_coefficients(&solved, &mut rng);
        let units = &design.units;
        let inner = |t: f64| units.inner_time(t);
        let mean = |group: usize, t: f64| {
            let basis = &design.bases[group];
            let mut row = vec![0.0; basis.columns()];
            basis.fill(inner(t), false, &mut row);
            let own = &curves[design.placement.block(group)];
            let value: f64 = row.iter().enumerate().map(|(c, f)| f * own[design.placement.position(group, c)]).sum();
            units.response_centre + units.response_scale * value
        };
        let mut data = self.data.clone();
        for (subject, later) in data.subjects.iter_mut().zip(&filling.times) {
            if later.is_empty() {
                continue;
            }
            let g = subject.group;
            let seen = subject.times.len();
            let times: Vec<f64> = subject.times.iter().chain(later).map(|&t| inner(t)).collect();
            let total = self.covariance(theta, g, &times);
            let before = total.view((0, 0), (seen, seen)).into_owned();
            let across = total.view((seen, 0), (later.len(), seen)).into_owned();
            let after = total.view((seen, seen), (later.len(), later.len())).into_owned();
            let residual = DVector::from_fn(seen, |j, _| {
                (subject.responses[j] - mean(g, subject.times[j])) / units.response_scale
            });
            let factor = Cholesky::new(before)?;
            let expected = &across * factor.solve(&residual);
            let left = after - &across * factor.solve(&across.transpose());
            let root = Cholesky::new((&left + left.transpose()) * 0.5)?.l();
            let drawn = expected + root * DVector::from_fn(later.len(), |_, _| rng.normal());
            let last = subject.times.last().copied()?;
            for (k, &t) in later.iter().enumerate() {
                let base = match filling.after[g] {
                    AfterLeaving::Own => mean(g, t),
                    AfterLeaving::Jump(reference) => mean(reference, t),
                    AfterLeaving::Increments(reference) => mean(g, last) + mean(reference, t) - mean(reference, last),
                };
                subject.times.push(t);
                subject.responses.push(base + units.response_scale * drawn[k] + filling.shift[g] * (t - last));
            }
        }
        Some(data)
    }

    /// Covariance of one subject's rows at internal times, internal unit.
    fn covariance(&self, theta: &[f64], group: usize, times: &[f64]) -> DMatrix<f64> {
        let effects = self.fit.design.effects.table(times);
        covariance(&self.fit.layout, theta, group, times, &effects, None)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fit::fit;
    use crate::model::{Model, SubjectRows};
    use crate::usual::pool;

    /// Subjects with a low value leave; their later values follow their own group, or sink by `sink` a visit more.
    fn made_up(sink: f64, seed: u64) -> (Data, Data) {
        let mut rng = Rng::new(seed);
        let (mut whole, mut seen) = (Vec::new(), Vec::new());
        for k in 0..80 {
            let level = rng.normal();
            let mut full = SubjectRows { group: k % 2, ..SubjectRows::default() };
            let mut left = None;
            for t in 0..8 {
                let gone = left.map_or(0.0, |at: i32| f64::from(t - at));
                let y = 10.0 + 0.5 * f64::from(t) * (k % 2) as f64 + level + 0.5 * rng.normal() - sink * gone;
                full.times.push(f64::from(t));
                full.responses.push(y);
                if left.is_none() && t >= 2 && k % 2 == 1 && rng.uniform() < if level < 0.0 { 0.35 } else { 0.1 } {
                    left = Some(t);
                }
            }
            let keep = left.map_or(8, |t| t as usize + 1);
            let mut part = full.clone();
            part.times.truncate(keep);
            part.responses.truncate(keep);
            whole.push(full);
            seen.push(part);
        }
        let data = |subjects| Data { groups: 2, subjects, ..Data::default() };
        (data(whole), data(seen))
    }

    fn pooled(seen: &Data, shift: f64) -> (f64, f64) {
        let model = Model::default();
        let imputer = Imputer::new(fit(seen, &model).unwrap(), seen, 4).unwrap();
        let later = |s: &SubjectRows| (s.times.len()..8).map(|t| t as f64).collect();
        let filling = Filling {
            times: seen.subjects.iter().map(later).collect(),
            after: vec![AfterLeaving::Own; 2],
            shift: vec![shift; 2],
        };
        let (mut estimates, mut variances) = (Vec::new(), Vec::new());
        for index in 0..20 {
            let table = imputer.table(&filling, index).unwrap();
            assert!(table.subjects.iter().all(|s| s.times.len() == 8));
            let fitted = fit(&table, &model).unwrap();
            let e = fitted.corrected().estimate(&fitted.gap(0, 1, 7.0));
            estimates.push(e.mean);
            variances.push(e.se * e.se);
        }
        let pooled = pool(&estimates, &variances, f64::INFINITY).unwrap();
        (pooled.estimate, libm::sqrt(pooled.between / 20.0))
    }

    #[test]
    fn without_a_shift_it_agrees_with_the_main_analysis() {
        let (_, seen) = made_up(0.0, 11);
        let main = fit(&seen, &Model::default()).unwrap();
        let main = main.plug_in().estimate(&main.gap(0, 1, 7.0));
        let (got, noise) = pooled(&seen, 0.0);
        assert!((got - main.mean).abs() < 3.0 * noise && noise < 0.3 * main.se, "{got} {noise} {main:?}");
    }

    #[test]
    fn the_right_shift_recovers_what_leaving_hid() {
        let (whole, seen) = made_up(0.6, 12);
        let at_end = |data: &Data| {
            let fitted = fit(data, &Model::default()).unwrap();
            fitted.plug_in().estimate(&fitted.gap(0, 1, 7.0)).mean
        };
        let (truth, biased, mended) = (at_end(&whole), at_end(&seen), pooled(&seen, -0.6).0);
        assert!((biased - truth).abs() > 0.5, "leaving hides something: {biased} {truth}");
        assert!((mended - truth).abs() < 0.35 * (biased - truth).abs(), "{mended} {truth} {biased}");
    }
}
