//! A request from what a table showed.

use super::request::{CourseMeans, SizeRequest, SizeSpread};
use crate::findings::{Findings, FitStatus};

impl SizeRequest {
    /// Courses, spread and measuring days of a fitted table's compared pair. `None` where nothing was fitted or compared.
    ///
    /// An effect that was observed is optimistic: [`SizeRequest::effect`] shrinks it.
    #[must_use]
    pub fn from_findings(findings: &Findings, pair: usize) -> Option<SizeRequest> {
        let difference = findings
            .differences
            .get(pair)
            .filter(|_| findings.fit.status != FitStatus::Failed && !findings.fit.residual_sd.0.is_empty())?;
        let course = |name: &str| {
            let curve = findings.curves.iter().find(|c| c.group == name)?;
            let points = &curve.at_visits;
            let means =
                points.time.iter().zip(&points.response_mean).filter_map(|(&t, mean)| Some([t, rounded((*mean)?)]));
            Some(CourseMeans { name: name.into(), means: means.collect() })
        };
        let support = difference.support?;
        let days = findings.visits.iter().copied().filter(|&t| t >= support[0] && t <= support[1]).collect();
        let residual = findings.fit.residual_sd.0.iter().map(|(_, sd)| sd * sd).sum::<f64>()
            / findings.fit.residual_sd.0.len().max(1) as f64;
        let covariance = &findings.fit.subject_covariance;
        let at = |a: usize, b: usize| covariance.get(a).and_then(|row| row.get(b)).copied().unwrap_or(0.0);
        let between = at(0, 0);
        Some(SizeRequest {
            days,
            control: course(&difference.from)?,
            treated: course(&difference.to)?,
            transform: findings.plan.response.transform,
            spread: SizeSpread {
                on_a_day: rounded(libm::sqrt(between + residual)),
                alike: rounded((between / (between + residual)).min(0.99)),
                trend: rounded(libm::sqrt(at(1, 1))),
                serial: findings.fit.serial_correlation.map_or(0.0, |phi| rounded(phi.clamp(0.0, 0.99))),
                ..SizeSpread::default()
            },
            words: [findings.plan.words.subject.clone(), findings.plan.words.subjects.clone()],
            ..SizeRequest::default()
        })
    }
}

/// Three significant digits: a guess need not have more.
fn rounded(value: f64) -> f64 {
    if value == 0.0 || !value.is_finite() {
        return 0.0;
    }
    let unit = libm::pow(10.0, 2.0 - libm::floor(libm::log10(value.abs())));
    libm::round(value * unit) / unit
}
