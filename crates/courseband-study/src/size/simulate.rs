//! One simulated study, and counts of many.

use super::request::{GoalKind, SizeRequest};
use courseband_engine::special::Rng;
use courseband_engine::{
    Basis, Contrast, CriticalValues, Data, Dimension, Estimate, Fit, Model, Serial, Shape, SubjectEffects, SubjectRows,
    fit,
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
            shape: if self.days.len() < 4 { Shape::ByTime } else { Shape::Smooth(Basis::Cubic, Dimension::Auto) },
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
        let level_sd = s.on_a_day * libm::sqrt(s.alike);
        let rest_sd = s.on_a_day * libm::sqrt(1.0 - s.alike);
        let middle = 0.5 * (self.days[0] + self.days[self.days.len() - 1]);
        let mut subjects = Vec::new();
        for (group, count) in self.enrolled(design).into_iter().enumerate() {
            for _ in 0..count {
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
                        responses.push(mean + level + trend * (t - middle) + rest_sd * state);
                    }
                }
                subjects.push(SubjectRows { group, times, responses, ..SubjectRows::default() });
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
        let times = self.points();
        let contrasts: Vec<Contrast> = times.iter().map(|&t| fitted.gap(0, 1, t)).collect();
        let estimates: Vec<Estimate> = contrasts.iter().map(|c| posterior.estimate(c)).collect();
        let least = estimates.iter().map(|e| e.df).fold(f64::INFINITY, f64::min);
        let most = estimates.iter().map(|e| e.df).fold(1.0, f64::max);
        let maxima = posterior.family(&contrasts, DIRECTIONS, seed);
        let critical = CriticalValues::simultaneous(&maxima, self.goal.level, least, most);
        estimates.iter().zip(&times).any(|(e, &t)| shown(e, t, &critical))
    }

    fn points(&self) -> Vec<f64> {
        let (first, last) = (self.days[0], self.days[self.days.len() - 1]);
        let between = (0..POINTS).map(|k| first + (last - first) * k as f64 / (POINTS - 1) as f64);
        crate::cohort::distinct(between.chain(self.days.iter().copied()))
    }
}
