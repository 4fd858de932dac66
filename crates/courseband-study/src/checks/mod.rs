//! Should the findings be believed: checks of the model against the table.
//!
//! Where a richer model would mend the fault, the check is a restricted-likelihood
//! comparison with that model (same means, so the criteria may be compared; for a
//! variance on the edge of its space the reference is the mixture of
//! Self & Liang 1987, JASA 82:605), and the check offers that model as the choice to try.
//! The family has one false-alarm rate: each check lights at [`ALARM`].

mod influence;
mod models;
mod robust;
mod scatter;

use crate::cohort::Cohort;
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
    /// `serial`, `spread`, `subjects`, `scale`, `basis`, `outlying`, `subject`, `robust`, `influence`.
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
        plan.need_normal("Checks of the model")?;
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
            self.odd_subject(),
            self.robust(),
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
