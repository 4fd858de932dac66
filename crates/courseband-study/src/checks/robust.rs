//! The gap's standard error by the model beside that by the subjects alone.

use super::{Check, CheckPlot, PlotSeries, Subject};
use crate::evaluate::Evaluation;
use crate::sentences::number;

/// Fewer subjects per group than this say too little by themselves.
const FEWEST: usize = 6;
/// A robust error this many times the model's speaks against the model.
const FAR: f64 = 2.0;

impl Subject<'_> {
    /// Standard errors of the gaps at the visits, both ways.
    pub(super) fn robust(&self) -> Option<Check> {
        if self.cohort.groups.iter().any(|g| g.subjects < FEWEST) {
            return None;
        }
        let evaluation = Evaluation::new(self.plan, self.cohort, self.fit, None);
        let (mut series, mut ratios) = (Vec::new(), Vec::new());
        for (from, to) in evaluation.pairs() {
            let Some([low, high]) = evaluation.overlap(from, to) else { continue };
            let times: Vec<f64> = self.cohort.visits.iter().copied().filter(|&t| t >= low && t <= high).collect();
            let contrasts: Vec<_> = times.iter().map(|&t| self.fit.gap(from, to, t)).collect();
            let errors = self.fit.robust_errors(&contrasts);
            let y: Vec<f64> = errors.iter().map(|e| if e.model > 0.0 { e.robust / e.model } else { 1.0 }).collect();
            ratios.extend(y.iter().copied());
            series.push(PlotSeries { name: self.cohort.groups[to].name.clone(), joined: true, x: times, y });
        }
        let mean = ratios.iter().map(|r| libm::log(r.max(1e-6))).sum::<f64>() / ratios.len().max(1) as f64;
        if ratios.is_empty() || !mean.is_finite() {
            return None;
        }
        let (ratio, lit) = (libm::exp(mean), libm::exp(mean) > FAR);
        let word = &self.plan.words.subjects;
        Some(Check {
            key: "robust".into(),
            title: "Errors by the model".into(),
            lit,
            p: None,
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
            trial: None,
            plot: CheckPlot {
                across: "time".into(),
                up: "standard error by the subjects, in those of the model".into(),
                series,
                envelope: Vec::new(),
            },
        })
    }
}
