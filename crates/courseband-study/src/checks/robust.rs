//! The gap's standard error by the model beside that by the subjects alone.

use super::{ALARM, Check, CheckPlot, PlotSeries, Subject};
use crate::evaluate::Evaluation;
use crate::plan::{self, Plan};
use crate::sentences::number;
use courseband_engine::{Contrast, Fit, Replicas};

/// Fewer subjects per group than this say too little by themselves.
const FEWEST: usize = 6;
/// Below this ratio nothing needs to be explained.
const NEAR: f64 = 1.25;
/// Above this many rows no table is simulated.
const MOST_ROWS: usize = 20_000;
/// Simulated tables that the ratio is compared with.
const REPLICAS: u64 = 99;

impl Subject<'_> {
    /// Standard errors of the gaps at the visits, both ways.
    pub(super) fn robust(&self) -> Option<Check> {
        if self.cohort.groups.iter().any(|g| g.subjects < FEWEST) {
            return None;
        }
        let gaps = self.gaps();
        let series: Vec<PlotSeries> = (gaps.iter())
            .map(|(from, to, times, contrasts)| {
                let y = ratios(self.fit, contrasts);
                {
                    let (from, to) = (&self.cohort.groups[*from].name, &self.cohort.groups[*to].name);
                    let name = format!("{to} to {from}");
                    PlotSeries { name, group: Some(to.clone()), joined: true, x: times.clone(), y }
                }
            })
            .collect();
        let contrasts: Vec<Contrast> = gaps.into_iter().flat_map(|(.., contrasts)| contrasts).collect();
        let ratio = average(&ratios(self.fit, &contrasts))?;
        let p = self.chance(&contrasts, ratio);
        let lit = p.is_some_and(|p| p <= ALARM);
        let word = &self.plan.words.subjects;
        Some(Check {
            key: "robust".into(),
            title: "Errors by the model".into(),
            lit,
            p,
            seen: format!(
                "Standard errors of the gaps that trust the {word} alone are on average {} times those of the model.",
                number(ratio, 2)
            ),
            means: if lit { "The model makes the gaps look surer than they are.".into() } else { String::new() },
            advice: if lit {
                "Look at the other checks: spread, subjects and serial correlation.".into()
            } else {
                String::new()
            },
            trial: self.freer(),
            consequence: None,
            more: Vec::new(),
            plot: CheckPlot {
                across: "time".into(),
                up: "standard error by the subjects, in those of the model".into(),
                series,
                ..CheckPlot::default()
            },
        })
    }

    /// Gaps at the visits, pair by pair.
    fn gaps(&self) -> Vec<(usize, usize, Vec<f64>, Vec<Contrast>)> {
        let evaluation = Evaluation::new(self.plan, self.cohort, self.fit, None);
        let pair = |comparison: crate::comparison::Comparison| {
            let (from, to) = comparison.pair()?;
            let [low, high] = evaluation.overlap(&comparison)?;
            let times: Vec<f64> = self.cohort.visits.iter().copied().filter(|&t| t >= low && t <= high).collect();
            let contrasts = times.iter().map(|&t| self.fit.gap(from, to, t)).collect();
            Some((from, to, times, contrasts))
        };
        evaluation.comparisons().into_iter().filter_map(pair).collect()
    }

    /// Share of simulated tables that obey the model with so large an average ratio, the table itself counted as one
    /// (Davison & Hinkley 1997, eq 4.11). Not computed where the ratio is near one or the table is large.
    fn chance(&self, contrasts: &[Contrast], ratio: f64) -> Option<f64> {
        if ratio < NEAR || self.residuals.len() > MOST_ROWS {
            return None;
        }
        let replicas = Replicas::new(self.fit, self.plan.seed)?;
        let others = (0..REPLICAS).filter_map(|k| average(&ratios(&replicas.get(k)?, contrasts)));
        let others: Vec<f64> = others.collect();
        Some((1 + others.iter().filter(|&&other| other >= ratio).count()) as f64 / (1 + others.len()) as f64)
    }

    /// The plan with all that checks may ask for: trends, serial correlation, a spread of its own in each group.
    fn freer(&self) -> Option<Plan> {
        let mut trial = self.plan.clone();
        trial.errors.spread = plan::Spread::ByGroup;
        match trial.subjects {
            plan::SubjectEffects::None => trial.subjects = plan::SubjectEffects::Intercept,
            plan::SubjectEffects::Intercept => trial.subjects = plan::SubjectEffects::Slope,
            _ => {}
        }
        if trial.subjects != plan::SubjectEffects::Curve {
            trial.errors.serial = plan::Serial::Ar1;
        }
        (trial != *self.plan).then_some(trial)
    }
}

/// Errors by the subjects over those by the model.
fn ratios(fit: &Fit, contrasts: &[Contrast]) -> Vec<f64> {
    let errors = fit.robust_errors(contrasts);
    errors.iter().map(|e| if e.model > 0.0 { e.robust / e.model } else { 1.0 }).collect()
}

/// Geometric mean; `None` of nothing.
fn average(ratios: &[f64]) -> Option<f64> {
    let mean = ratios.iter().map(|r| libm::log(r.max(1e-6))).sum::<f64>() / ratios.len() as f64;
    mean.is_finite().then(|| libm::exp(mean))
}
