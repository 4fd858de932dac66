//! Should the findings be believed: checks of the model against the table.
//!
//! Where a richer model would mend the fault, the check is a restricted-likelihood
//! comparison with that model (same means, so the criteria may be compared; for a
//! variance on the edge of its space the reference is the mixture of
//! Self & Liang 1987, JASA 82:605), and the check offers that model as the choice to try.
//! The family has one false-alarm rate: each check lights at [`ALARM`].

mod models;
mod scatter;

use crate::cohort::Cohort;
use crate::evaluate::Evaluation;
use crate::plan::Plan;
use crate::refusal::Refusal;
use crate::study::Study;
use courseband_engine::{Fit, fit};
use serde::Serialize;

/// Chance at which each check lights on a table that obeys the model: seven checks, about 7 % together.
pub(crate) const ALARM: f64 = 0.01;
/// Above this many subjects, influence is computed for those with the largest residuals only.
const MOST_LEFT_OUT: usize = 200;

/// All checks of one analysis.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ChecksFindings {
    /// The checks, lit ones first.
    pub checks: Vec<Check>,
    /// One sentence over all.
    pub verdict: String,
}

/// One check.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Check {
    /// `serial`, `spread`, `subjects`, `scale`, `basis`, `outlying`, `influence`.
    pub key: String,
    /// What is asked, in a few words.
    pub title: String,
    /// True where the table speaks against the model.
    pub lit: bool,
    /// Chance of so much under the model; `null` where none is computed.
    pub p: Option<f64>,
    /// What is seen.
    pub seen: String,
    /// What it means for the conclusion.
    pub means: String,
    /// What to try, in words.
    pub advice: String,
    /// The plan that tries it; `null` where there is nothing to set.
    pub trial: Option<Plan>,
    /// Points of the check's small plot.
    pub plot: CheckPlot,
}

/// A small plot: points in one or several series, and lines to compare with.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct CheckPlot {
    /// Title of the horizontal axis.
    pub across: String,
    /// Title of the vertical axis.
    pub up: String,
    /// Series of points.
    pub series: Vec<PlotSeries>,
    /// Lower and upper line of what the model would give, at the x of the first series; may be empty.
    pub envelope: Vec<[f64; 2]>,
}

/// One series of points.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct PlotSeries {
    /// Name, such as a group's or a subject's.
    pub name: String,
    /// True where points are joined.
    pub joined: bool,
    /// Horizontal.
    pub x: Vec<f64>,
    /// Vertical.
    pub y: Vec<f64>,
}

/// What every check looks at.
pub(crate) struct Subject<'a> {
    pub(crate) plan: &'a Plan,
    pub(crate) cohort: &'a Cohort,
    pub(crate) fit: &'a Fit,
    /// Names of the subjects, in the order of the data.
    pub(crate) names: Vec<String>,
}

impl Study {
    /// Checks of a plan's model. No checks where the fit failed.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn checks(&mut self, plan: &Plan) -> Result<ChecksFindings, Refusal> {
        plan.check()?;
        let reading = self.answered(plan)?;
        let cohort = Cohort::new(reading, plan)?;
        let Ok(fitted) = fit(&cohort.data, &cohort.model(plan)) else {
            let verdict = "The fit failed, so there is nothing to check.".into();
            return Ok(ChecksFindings { checks: Vec::new(), verdict });
        };
        let names = cohort.subject_names.clone();
        let subject = Subject { plan, cohort: &cohort, fit: &fitted, names };
        Ok(subject.all())
    }
}

impl Subject<'_> {
    fn all(&self) -> ChecksFindings {
        let residuals = self.fit.residuals();
        let mut checks: Vec<Check> = [
            self.serial(&residuals),
            self.spread(&residuals),
            self.subject_effects(&residuals),
            self.scale(&residuals),
            self.basis(&residuals),
            Some(self.outlying(&residuals)),
            self.influence(&residuals),
        ]
        .into_iter()
        .flatten()
        .collect();
        checks.sort_by_key(|check| !check.lit);
        let lit: Vec<String> = checks.iter().filter(|c| c.lit).map(|c| c.title.to_lowercase()).collect();
        let verdict = match lit.len() {
            0 => format!("None of {} checks speaks against the model.", checks.len()),
            n => format!(
                "{n} of {} checks {} against the model: {}. See whether the conclusion stands when you try what they suggest.",
                checks.len(),
                if n == 1 { "speaks" } else { "speak" },
                crate::sentences::joined(&lit)
            ),
        };
        ChecksFindings { checks, verdict }
    }

    fn influence(&self, residuals: &[courseband_engine::Residual]) -> Option<Check> {
        let evaluation = Evaluation::new(self.plan, self.cohort, self.fit, None);
        let pairs = evaluation.pairs();
        let mut contrasts = Vec::new();
        let mut places = Vec::new();
        for &(from, to) in &pairs {
            if let Some([low, high]) = evaluation.overlap(from, to) {
                for &t in self.cohort.visits.iter().filter(|&&t| t >= low && t <= high) {
                    contrasts.push(self.fit.gap(from, to, t));
                    places.push((from, to, t));
                }
            }
        }
        if contrasts.is_empty() {
            return None;
        }
        let influence = self.fit.influence(&contrasts, &self.left_out(residuals));
        let most = influence.iter().max_by(|a, b| a.largest.total_cmp(&b.largest))?;
        let group = &self.cohort.groups[self.cohort.data.subjects[most.subject].group];
        // Without one of n, a gap moves by about one n-th of its spread; one standard error is large.
        let lit = most.largest > 1.0;
        let (from, to, time) = places[most.at];
        let word = &self.plan.words.subject;
        let name = &self.names[most.subject];
        let series = PlotSeries {
            name: String::new(),
            joined: false,
            x: (0..influence.len()).map(|k| k as f64 + 1.0).collect(),
            y: influence.iter().map(|i| i.largest).collect(),
        };
        Some(Check {
            key: "influence".into(),
            title: "One decides".into(),
            lit,
            p: None,
            seen: format!(
                "Without {word} {name} ({}) the gap {} to {} moves most, by {} of its standard errors at time {}.",
                group.name,
                self.cohort.groups[from].name,
                self.cohort.groups[to].name,
                crate::sentences::number(most.largest, 2),
                crate::sentences::plain(time)
            ),
            means: if lit {
                format!("The conclusion leans on this {word}.")
            } else {
                format!("No single {word} moves a gap by more than one standard error.")
            },
            advice: if lit {
                "Look at its rows in Data. Leave it out only for a reason that does not come from its values, and report both."
                    .to_string()
            } else {
                String::new()
            },
            trial: None,
            plot: CheckPlot {
                across: format!("{word}, in the order of the table"),
                up: "largest movement of a gap, in standard errors".into(),
                series: vec![series],
                envelope: Vec::new(),
            },
        })
    }

    /// All subjects, or those with the largest sums of squared residuals.
    fn left_out(&self, residuals: &[courseband_engine::Residual]) -> Vec<usize> {
        let count = self.cohort.data.subjects.len();
        let mut order: Vec<usize> = (0..count).collect();
        if count > MOST_LEFT_OUT {
            let mut size = vec![0.0; count];
            residuals.iter().for_each(|r| size[r.subject] += r.independent * r.independent);
            order.sort_by(|&a, &b| size[b].total_cmp(&size[a]).then(a.cmp(&b)));
            order.truncate(MOST_LEFT_OUT);
            order.sort_unstable();
        }
        order
    }
}

#[cfg(test)]
mod tests;
