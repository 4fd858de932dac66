//! Checks that compare the plan's model with the one that would mend it.

use super::{ALARM, Check, Subject};
use crate::plan::{self, Plan, Transform};
use crate::sentences::{capital, number, plain};
use courseband_engine::special::chi2_sf;
use courseband_engine::{Fit, Residual, fit};

impl Subject<'_> {
    /// A richer model's fit and the rise of the log restricted likelihood.
    fn richer(&self, trial: &Plan) -> Option<(Fit, f64)> {
        let other = fit(&self.cohort.data, &self.cohort.model(trial)).ok()?;
        let rise = other.log_reml() - self.fit.log_reml();
        Some((other, rise.max(0.0)))
    }

    /// Do errors go on from visit to visit?
    pub(super) fn serial(&self) -> Option<Check> {
        if self.plan.errors.serial != plan::Serial::None || !self.has_several_visits() {
            return None;
        }
        let mut trial = self.plan.clone();
        trial.errors.serial = plan::Serial::Ar1;
        trial.errors.nugget = self.has_ties();
        let (other, rise) = self.richer(&trial)?;
        // One parameter on its edge (two with measurement error, taken as one more).
        let p =
            if trial.errors.nugget { 0.5 * (chi2_sf(2.0 * rise, 1.0) + chi2_sf(2.0 * rise, 2.0)) } else { edge(rise) };
        let lit = p < ALARM;
        let phi = other.serial_correlation().unwrap_or(0.0);
        Some(Check {
            key: "serial".into(),
            title: "Errors that go on".into(),
            lit,
            p: Some(p),
            seen: if lit {
                format!(
                    "Neighbouring visits of one {} err alike: correlation {} one {} apart.",
                    self.plan.words.subject,
                    number(phi, 2),
                    self.time_word()
                )
            } else {
                "Neighbouring visits do not err alike beyond what the model holds.".into()
            },
            means: if lit {
                "The bands may be too narrow, and the course may follow the errors.".into()
            } else {
                String::new()
            },
            advice: if lit { "Let visits be serially correlated.".into() } else { String::new() },
            trial: Some(trial),
            consequence: None,
            more: vec![self.semivariogram()],
            plot: self.lag_plot(),
        })
    }

    /// Is the spread the same in every group?
    pub(super) fn spread(&self, residuals: &[Residual]) -> Option<Check> {
        let groups = self.cohort.groups.len();
        if groups < 2 || self.plan.errors.spread != plan::Spread::Common {
            return None;
        }
        let mut trial = self.plan.clone();
        trial.errors.spread = plan::Spread::ByGroup;
        let mut parameters = (groups - 1) as f64;
        let effects = self.cohort.model(self.plan).subjects.count() as f64;
        if self.plan.subjects_spread == plan::Sharing::Common && effects > 0.0 {
            trial.subjects_spread = plan::Sharing::ByGroup;
            parameters += (groups - 1) as f64 * effects * (effects + 1.0) / 2.0;
        }
        let (other, rise) = self.richer(&trial)?;
        let p = chi2_sf(2.0 * rise, parameters);
        let lit = p < ALARM;
        let sds: Vec<String> = (0..groups)
            .map(|g| format!("{} {}", self.cohort.groups[g].name, number(other.residual_sd(g), 3)))
            .collect();
        Some(Check {
            key: "spread".into(),
            title: "Unequal spread".into(),
            lit,
            p: Some(p),
            seen: if lit {
                format!(
                    "The groups spread unequally; within {} the standard deviations are {}.",
                    self.plan.words.subjects,
                    sds.join(", ")
                )
            } else {
                "The groups spread alike.".into()
            },
            means: if lit {
                "The gap's interval is too narrow where the group that spreads more is small.".into()
            } else {
                String::new()
            },
            advice: if lit { "Give every group its own spread.".into() } else { String::new() },
            trial: Some(trial),
            consequence: None,
            more: Vec::new(),
            plot: self.spread_plot(residuals),
        })
    }

    /// Do subjects differ in more than the model lets them?
    pub(super) fn subject_effects(&self, residuals: &[Residual]) -> Option<Check> {
        let mut trial = self.plan.clone();
        let (parameters, more) = match self.plan.subjects {
            plan::SubjectEffects::None => (1.0, "level"),
            plan::SubjectEffects::Intercept => (2.0, "trend"),
            _ => return None,
        };
        if !self.has_several_visits() {
            return None;
        }
        trial.subjects = if parameters == 1.0 { plan::SubjectEffects::Intercept } else { plan::SubjectEffects::Slope };
        let (_, rise) = self.richer(&trial)?;
        // Half and half of one parameter more and of one fewer (Self & Liang 1987, cases 5 and 6).
        let p =
            if parameters == 1.0 { edge(rise) } else { 0.5 * (chi2_sf(2.0 * rise, 1.0) + chi2_sf(2.0 * rise, 2.0)) };
        let lit = p < ALARM;
        let many = &self.plan.words.subjects;
        Some(Check {
            key: "subjects".into(),
            title: capital(&format!("{many} differ in {more}")),
            lit,
            p: Some(p),
            seen: if lit {
                format!("The {many} differ in {more}, which the model does not hold.")
            } else {
                format!("The {many} do not differ in {more} beyond what the model holds.")
            },
            means: if lit {
                "The bands are too narrow, most of all where the courses are far from their middle.".into()
            } else {
                String::new()
            },
            advice: if lit { format!("Let {many} differ in {more}.") } else { String::new() },
            trial: Some(trial),
            consequence: None,
            more: Vec::new(),
            plot: self.trend_plot(residuals),
        })
    }

    /// Would the other scale describe the values better?
    pub(super) fn scale(&self, residuals: &[Residual]) -> Option<Check> {
        let log = self.plan.response.transform == Transform::Log;
        let mut trial = self.plan.clone();
        trial.response.transform = if log { Transform::Identity } else { Transform::Log };
        if trial.comparisons.margin_unit == plan::MarginUnit::Percent && log {
            trial.comparisons.margin = 0.0;
            trial.comparisons.margin_unit = plan::MarginUnit::Response;
        }
        let (lean, grow) = self.shape_of_scatter(residuals);
        let p = (2.0 * lean.min(grow)).min(1.0);
        let positive = log || self.cohort.data.subjects.iter().all(|s| s.responses.iter().all(|&y| y > 0.0));
        let lit = p < ALARM;
        Some(Check {
            key: "scale".into(),
            title: "Another scale".into(),
            lit,
            p: Some(p),
            seen: if !lit {
                "The scatter is even and symmetric on this scale.".into()
            } else if grow < lean {
                "The scatter changes with the level of the course.".into()
            } else {
                "The scatter leans to one side.".into()
            },
            means: if lit { "Standard errors are right for no part of the course.".into() } else { String::new() },
            advice: match (lit, positive) {
                (false, _) => String::new(),
                (true, true) => format!("Look at the {} scale.", if log { "raw" } else { "log" }),
                (true, false) => {
                    "The log scale needs values above zero; look for outlying rows, or another distribution.".into()
                }
            },
            trial: positive.then_some(trial),
            consequence: None,
            more: Vec::new(),
            plot: self.fitted_plot(residuals),
        })
    }

    /// Is the basis large enough?
    pub(super) fn basis(&self, residuals: &[Residual]) -> Option<Check> {
        let mut trial = self.plan.clone();
        let available = self.cohort.visits.len();
        let knots = match (self.plan.curves.shape, self.plan.curves.dimension) {
            (plan::Shape::Straight, _) => 2,
            (plan::Shape::Smooth, plan::Dimension::Auto) => available.min(20),
            (plan::Shape::Smooth, plan::Dimension::Knots(count)) => count.min(available),
            _ => return None,
        };
        if knots >= available || available < 3 {
            return None;
        }
        trial.curves.shape = plan::Shape::Smooth;
        trial.curves.dimension = plan::Dimension::Knots((2 * knots).clamp(3, available));
        let (_, rise) = self.richer(&trial)?;
        // Smoothing variances on their edge, one per group: no more than a chi-squared of that many.
        let groups = self.cohort.groups.len() as f64;
        let p = if knots == 2 { edge_many(rise, self.cohort.groups.len()) } else { chi2_sf(2.0 * rise, groups) };
        let lit = p < ALARM;
        Some(Check {
            key: "basis".into(),
            title: if knots == 2 { "More than straight".into() } else { "Basis too small".into() },
            lit,
            p: Some(p),
            seen: if lit {
                format!(
                    "Courses with {} knots describe the table better.",
                    plain((2 * knots).clamp(3, available) as f64)
                )
            } else {
                "More freedom for the courses changes nothing.".into()
            },
            means: if lit { "The courses miss bends that the table shows.".into() } else { String::new() },
            advice: if lit { "Let the courses bend more.".into() } else { String::new() },
            trial: Some(trial),
            consequence: None,
            more: Vec::new(),
            plot: self.time_plot(residuals),
        })
    }

    fn has_several_visits(&self) -> bool {
        self.cohort.data.subjects.iter().filter(|s| s.times.len() > 1).count() >= 3
    }

    fn has_ties(&self) -> bool {
        self.cohort.data.subjects.iter().any(|s| s.times.windows(2).any(|w| w[0] == w[1]))
    }
}

/// Chance of such a rise for one variance that may be zero (Self & Liang 1987, case 5).
pub(super) fn edge(rise: f64) -> f64 {
    if rise <= 0.0 { 1.0 } else { 0.5 * chi2_sf(2.0 * rise, 1.0) }
}

/// The same for several independent variances: binomial mixture of chi-squareds (case 9).
fn edge_many(rise: f64, count: usize) -> f64 {
    let half = libm::pow(0.5, count as f64);
    let mut ways = 1.0;
    let mut p = 0.0;
    for k in 0..=count {
        if k > 0 {
            ways *= (count - k + 1) as f64 / k as f64;
            p += ways * half * chi2_sf(2.0 * rise, k as f64);
        } else if rise <= 0.0 {
            p += half;
        }
    }
    p
}
