//! Should the findings be believed: checks of the model against the table.
//!
//! Where a richer model would mend the fault, the check is a restricted-likelihood
//! comparison with that model (same means, so the criteria may be compared; for a
//! variance on the edge of its space the reference is the mixture of
//! Self & Liang 1987, JASA 82:605), and the check offers that model as the choice to try.
//! The family has one false-alarm rate: each check lights at [`ALARM`].

mod clustered;
mod consequence;
mod influence;
mod models;
mod plots;
mod robust;
mod scatter;

pub use consequence::{Consequence, Outcome, TriedPair};

use crate::cohort::Cohort;
use crate::plan::{self, Plan};
use crate::refusal::Refusal;
use crate::study::Study;
use courseband_engine::{Fit, Replicas, Residual, fit};
use courseband_table::Observations;
use serde::Serialize;

/// Chance at which each check lights on a table that obeys the model: seven checks, about 7 % together.
pub(crate) const ALARM: f64 = 0.01;
/// Above this many subjects, influence is computed for those with the largest residuals only.
const MOST_LEFT_OUT: usize = 200;
/// Simulated tables to compare plots with, and above how many rows fewer and none are made.
const REPLICAS: [(usize, u64); 3] = [(5_000, 199), (20_000, 39), (usize::MAX, 0)];
/// Above this many rows remedies are not tried unasked.
const MOST_TRIED: usize = 50_000;

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
    /// `serial`, `spread`, `subjects`, `scale`, `basis`, `outlying`, `subject`, `robust`, `influence`, `clusters`.
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
    /// The plan that tries the remedy, lit or not; `null` where there is nothing to set.
    pub trial: Option<Plan>,
    /// What the remedy does to the stretches; `null` where none was tried.
    pub consequence: Option<Consequence>,
    /// The check's small plot.
    pub plot: CheckPlot,
    /// Further plots.
    pub more: Vec<CheckPlot>,
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
    /// What the envelope is; empty without one.
    pub says: String,
}

/// One series of points.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct PlotSeries {
    /// Name, such as a group's or a subject's.
    pub name: String,
    /// Group that it belongs to, where it is not named like it.
    pub group: Option<String>,
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
    pub(crate) residuals: Vec<Residual>,
    /// Residuals of simulated tables that obey the model, each fitted; empty for large tables.
    pub(crate) simulated: Vec<Vec<Residual>>,
    /// Where rows stand in the file, to leave them out.
    pub(crate) observations: &'a Observations,
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
        let mut checks = Subject::new(plan, &cohort, &fitted, &reading.observations, true).all();
        if cohort.data.rows() <= MOST_TRIED {
            let tried = consequence::Base::new(plan, &cohort, &fitted, &reading.observations.time_word);
            for check in &mut checks {
                check.consequence = check.trial.as_ref().map(|trial| tried.beside(self, trial));
            }
        }
        checks.sort_by_key(|check| !check.lit);
        let verdict = consequence::verdict(&checks);
        Ok(ChecksFindings { checks, verdict })
    }

    /// Keys of the checks that light, without envelopes and remedies: much quicker.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn checks_lit(&mut self, plan: &Plan) -> Result<Vec<String>, Refusal> {
        plan.check()?;
        plan.need_normal("Checks of the model")?;
        let reading = self.answered(plan)?;
        let cohort = Cohort::new(reading, plan)?;
        let Ok(fitted) = fit(&cohort.data, &cohort.model(plan)) else { return Ok(Vec::new()) };
        let all = Subject::new(plan, &cohort, &fitted, &reading.observations, false).all();
        Ok(all.into_iter().filter(|check| check.lit).map(|check| check.key).collect())
    }
}

impl<'a> Subject<'a> {
    fn new(plan: &'a Plan, cohort: &'a Cohort, fit: &'a Fit, observations: &'a Observations, envelopes: bool) -> Self {
        let rows = if envelopes { cohort.data.rows() } else { usize::MAX };
        let count = REPLICAS.iter().find(|(most, _)| rows <= *most).map_or(0, |(_, count)| *count);
        let replicas = Replicas::new(fit, plan.seed).filter(|_| count > 0);
        let simulated = replicas.map_or_else(Vec::new, |replicas| {
            (0..count).filter_map(|index| replicas.get(index)).map(|one| one.residuals()).collect()
        });
        let (names, residuals) = (cohort.subject_names.clone(), fit.residuals());
        Subject { plan, cohort, fit, names, residuals, simulated, observations }
    }

    fn all(&self) -> Vec<Check> {
        let residuals = &self.residuals;
        [
            self.serial(),
            self.spread(residuals),
            self.subject_effects(residuals),
            self.scale(residuals),
            self.basis(residuals),
            self.clustered(),
            Some(self.outlying(residuals)),
            self.odd_subject(),
            self.robust(),
            self.influence(residuals),
        ]
        .into_iter()
        .flatten()
        .collect()
    }

    fn time_word(&self) -> &str {
        self.plan.words.time.as_deref().unwrap_or(&self.observations.time_word)
    }

    /// The plan without some measurements of a subject: all, or one by its number among the subject's rows.
    fn without(&self, subject: usize, only: Option<usize>) -> Plan {
        let mut trial = self.plan.clone();
        for (j, &measurement) in self.cohort.places[subject].iter().enumerate() {
            let (row, column) = self.observations.place(measurement);
            let there = |e: &plan::Exclusion| e.row == row && (e.column.is_none() || e.column.as_deref() == column);
            if only.is_none_or(|only| only == j) && !trial.exclusions.iter().any(there) {
                let reason = "Left out to see what it changes.".to_string();
                trial.exclusions.push(plan::Exclusion { row, reason, column: column.map(str::to_string) });
            }
        }
        trial
    }

    /// All subjects, or those with the largest sums of squared residuals.
    fn left_out(&self, residuals: &[Residual]) -> Vec<usize> {
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
