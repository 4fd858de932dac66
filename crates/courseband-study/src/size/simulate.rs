//! One simulated study, and counts of many.

use super::request::{GoalKind, SizeRequest};
use crate::plan::Transform;
use courseband_engine::special::Rng;
use courseband_engine::{
    Basis, ClusterEffects, Contrast, CriticalValues, Data, Dimension, Estimate, Fit, Model, Serial, Shape,
    SubjectEffects, SubjectRows, fit,
};
use serde::{Deserialize, Serialize};

/// Random directions behind a critical value here: its noise averages out over studies.
const DIRECTIONS: usize = 1024;
/// Points between the first and last day, besides the measuring days.
const POINTS: usize = 25;

/// How many simulated studies met the goal.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Counts {
    /// Simulated.
    pub studies: usize,
    /// Goal met, in the assumed direction.
    pub met: usize,
    /// Fits that failed; they count as not met.
    pub failed: usize,
}

impl Counts {
    /// Adds the counts of another worker.
    pub fn add(&mut self, other: Counts) {
        self.studies += other.studies;
        self.met += other.met;
        self.failed += other.failed;
    }
}

impl SizeRequest {
    /// Studies number `first` up to `first + count` of a design.
    #[must_use]
    pub fn simulate(&self, design: [usize; 2], first: usize, count: usize) -> Counts {
        let mut counts = Counts::default();
        for index in first..first + count {
            counts.studies += 1;
            match self.one(design, index) {
                Some(true) => counts.met += 1,
                Some(false) => {}
                None => counts.failed += 1,
            }
        }
        counts
    }

    fn one(&self, design: [usize; 2], index: usize) -> Option<bool> {
        let salt = (design[0] as u64) << 32 | design[1] as u64;
        let mut rng = Rng::stream(self.seed ^ salt.wrapping_mul(0x9E37_79B9_7F4A_7C15), index as u64);
        let fitted = fit(&self.table(design, &mut rng), &self.model()).ok()?;
        Some(self.met(&fitted, index as u64))
    }

    /// The model that is fitted: that of the simulation, with smooth courses.
    pub(crate) fn model(&self) -> Model {
        Model {
            shape: match self.goal.find {
                GoalKind::Average => Shape::ByTime,
                GoalKind::Slope => Shape::Straight,
                _ if self.days.len() < 4 => Shape::ByTime,
                _ => Shape::Smooth(Basis::Cubic, Dimension::Auto),
            },
            clusters: if self.in_clusters() { ClusterEffects::Intercept } else { ClusterEffects::None },
            subjects: match (self.spread.alike > 0.0, self.spread.trend > 0.0) {
                (_, true) => SubjectEffects::Slope,
                (true, false) => SubjectEffects::Intercept,
                (false, false) => SubjectEffects::None,
            },
            serial: if self.spread.serial > 0.0 { Serial::Ar1 } else { Serial::None },
            ..Model::default()
        }
    }

    fn table(&self, design: [usize; 2], rng: &mut Rng) -> Data {
        let s = &self.spread;
        let shared = if self.in_clusters() { s.cluster_alike } else { 0.0 };
        let cluster_sd = s.on_a_day * libm::sqrt(shared);
        let level_sd = s.on_a_day * libm::sqrt(s.alike - shared);
        let rest_sd = s.on_a_day * libm::sqrt(1.0 - s.alike);
        let middle = 0.5 * (self.days[0] + self.days[self.days.len() - 1]);
        let (mut subjects, mut housed) = (Vec::new(), 0);
        for (group, count) in self.enrolled(design).into_iter().enumerate() {
            let mut cluster = 0.0;
            for k in 0..count {
                let starts = self.in_clusters() && k % self.cluster_size == 0;
                if starts {
                    cluster = cluster_sd * rng.normal();
                    housed += 1;
                }
                let (level, trend) = (level_sd * rng.normal(), s.trend * rng.normal());
                let leaves = rng.uniform() < self.losses;
                let last = 1 + rng.below((self.days.len() - 1) as u64) as usize;
                let kept = if leaves { last } else { self.days.len() };
                let mut state = rng.normal();
                let (mut times, mut responses) = (Vec::new(), Vec::new());
                for (visit, &t) in self.days.iter().enumerate() {
                    if visit > 0 {
                        let step = t - self.days[visit - 1];
                        let carry = if s.serial > 0.0 { libm::pow(s.serial, step) } else { 0.0 };
                        state = carry * state + libm::sqrt(1.0 - carry * carry) * rng.normal();
                    }
                    if visit < kept {
                        let gap = if group == 1 { self.gap(t) } else { 0.0 };
                        times.push(t);
                        let mean = self.course(&self.control, t) + gap;
                        responses.push(mean + cluster + level + trend * (t - middle) + rest_sd * state);
                    }
                }
                let cluster = self.in_clusters().then_some(housed);
                subjects.push(SubjectRows { group, times, responses, cluster, ..SubjectRows::default() });
            }
        }
        Data { groups: 2, subjects, ..Data::default() }
    }

    fn met(&self, fitted: &Fit, seed: u64) -> bool {
        let posterior = fitted.corrected();
        let shown = |e: &Estimate, t: f64, critical: &CriticalValues| {
            let side = if self.gap(t) >= 0.0 { 1.0 } else { -1.0 };
            e.se > 0.0 && side * e.mean > critical.at(e.df) * e.se
        };
        if let (GoalKind::Landmark, Some(day)) = (self.goal.find, self.goal.day) {
            let e = posterior.estimate(&fitted.gap(0, 1, day));
            return shown(&e, day, &CriticalValues::pointwise(self.goal.level));
        }
        if matches!(self.goal.find, GoalKind::Average | GoalKind::Slope) {
            let (first, last) = (self.days[0], self.days[self.days.len() - 1]);
            let contrast = if self.goal.find == GoalKind::Average {
                let share = 1.0 / self.days.len() as f64;
                let gaps = self.days[1..].iter().map(|&t| fitted.gap(0, 1, t));
                gaps.fold(fitted.gap(0, 1, first).times(share), |sum, gap| sum.plus(share, &gap))
            } else {
                fitted.gap(0, 1, last).plus(-1.0, &fitted.gap(0, 1, first)).times(1.0 / (last - first))
            };
            let e = posterior.estimate(&contrast);
            let assumed: f64 = match self.goal.find {
                GoalKind::Average => self.days.iter().map(|&t| self.gap(t)).sum(),
                _ => self.gap(last) - self.gap(first),
            };
            let side = if assumed >= 0.0 { 1.0 } else { -1.0 };
            return e.se > 0.0 && side * e.mean > CriticalValues::pointwise(self.goal.level).at(e.df) * e.se;
        }
        let times = self.points();
        let contrasts: Vec<Contrast> = times.iter().map(|&t| fitted.gap(0, 1, t)).collect();
        let estimates: Vec<Estimate> = contrasts.iter().map(|c| posterior.estimate(c)).collect();
        let least = estimates.iter().map(|e| e.df).fold(f64::INFINITY, f64::min);
        let most = estimates.iter().map(|e| e.df).fold(1.0, f64::max);
        let maxima = posterior.family(&contrasts, DIRECTIONS, seed);
        let critical = CriticalValues::simultaneous(&maxima, self.goal.level, least, most);
        if self.goal.find == GoalKind::Onset {
            return self.onset_width(&times, &estimates, &critical).is_some_and(|width| width <= self.goal.width);
        }
        estimates.iter().zip(&times).any(|(e, &t)| shown(e, t, &critical))
    }

    /// Width of the onset's interval: from the start of the last run to the end in which the band's far limit is beyond the
    /// margin, to that of the near limit. `None` where either is not reached, or the direction is not the assumed one.
    fn onset_width(&self, times: &[f64], estimates: &[Estimate], critical: &CriticalValues) -> Option<f64> {
        let side = if self.gap(*times.last()?) >= 0.0 { 1.0 } else { -1.0 };
        let margin = match self.transform {
            Transform::Log => -libm::log1p(-self.goal.margin / 100.0),
            Transform::Identity => self.goal.margin,
        };
        let start = |towards: f64| {
            let value = |e: &Estimate| side * e.mean + towards * critical.at(e.df) * e.se - margin;
            let beyond: Vec<f64> = estimates.iter().map(value).collect();
            let run = beyond.iter().rposition(|&x| x <= 0.0).map_or(0, |k| k + 1);
            if run == times.len() {
                return None;
            }
            if run == 0 {
                return Some(times[0]);
            }
            let (a, b) = (beyond[run - 1], beyond[run]);
            Some(times[run - 1] + (times[run] - times[run - 1]) * (-a / (b - a)))
        };
        Some(start(-1.0)? - start(1.0)?)
    }

    fn points(&self) -> Vec<f64> {
        let (first, last) = (self.days[0], self.days[self.days.len() - 1]);
        let between = (0..POINTS).map(|k| first + (last - first) * k as f64 / (POINTS - 1) as f64);
        crate::cohort::distinct(between.chain(self.days.iter().copied()))
    }
}
