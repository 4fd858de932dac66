//! The usual analyses of a plan's rows, beside its curves: for the reader who expects them.
//!
//! Same rows, same scale, same pairs and level as the plan. Each analysis gives its result in sentences and tables, what it
//! assumes, whether the data bear that, and where it and the curves disagree and why. Mathematics is in
//! `courseband_engine::usual` and `::visits`; straight lines are the plan's own model with another shape.

mod anova;
mod ar1;
mod beside;
mod by_visit;
mod category;
mod context;
mod days;
mod findings;
mod lines;
mod print;
mod summary;
#[cfg(test)]
mod tests;
mod welch;

use crate::cohort::Cohort;
use crate::findings::{Findings, FitStatus, Note};
use crate::plan::{Plan, SmallSample};
use crate::refusal::Refusal;
use crate::study::{Refits, Study};
use beside::curves_apart_at;
use by_visit::ByVisit;
use context::Context;
pub use findings::*;

impl Study {
    /// The usual analyses of a plan's rows, beside its curves. A plan that asks for calibrated bands is compared by its
    /// bands with degrees of freedom; see [`Study::usual_calibrated`].
    ///
    /// # Errors
    /// A plan or table that cannot be used. An analysis that cannot be done is no error: it says why.
    pub fn usual(&mut self, plan: &Plan) -> Result<UsualFindings, Refusal> {
        let mut quick = plan.clone();
        let calibrated = plan.comparisons.small_sample == SmallSample::Calibrated;
        if calibrated {
            quick.comparisons.small_sample = SmallSample::Df;
        }
        let findings = self.run(&quick)?;
        let mut usual = self.usual_beside(plan, &findings)?;
        if calibrated {
            let message = "Compared with the curves' bands by degrees of freedom, not with the calibrated ones.".into();
            usual.notes.push(Note { about: "bands".into(), message });
        }
        Ok(usual)
    }

    /// The same beside the curves with the critical values that refits gave.
    ///
    /// # Errors
    /// As [`Study::usual`].
    pub fn usual_calibrated(&mut self, plan: &Plan, refits: &Refits) -> Result<UsualFindings, Refusal> {
        let findings = self.run_calibrated(plan, refits)?;
        self.usual_beside(plan, &findings)
    }

    fn usual_beside(&mut self, plan: &Plan, findings: &Findings) -> Result<UsualFindings, Refusal> {
        plan.need_normal("The usual analyses")?;
        let cohort = Cohort::new(self.reading(plan)?, plan)?;
        Ok(analyse(&Context::new(plan, &cohort, findings)))
    }
}

fn analyse(context: &Context) -> UsualFindings {
    let cohort = context.cohort;
    let subjects = &context.plan.words.subjects;
    let by_visit = ByVisit::new(cohort, context.time_word(), subjects);
    let (lines, bend) = lines::analyse(context);
    let analyses = vec![
        anova::analyse(context, by_visit.as_ref()),
        lines,
        category::analyse(context, by_visit.as_ref()),
        welch::analyse(context, by_visit.as_ref()),
        summary::analyse(context, bend.as_ref()),
    ];
    UsualFindings {
        version: env!("CARGO_PKG_VERSION").into(),
        rows: cohort.data.rows(),
        subjects: cohort.data.subjects.len(),
        time_word: context.time_word().into(),
        ratio: context.is_log(),
        shared_visits: by_visit.as_ref().ok().map(|b| b.panel.times.clone()),
        pairs: pairs(context),
        analyses,
        notes: notes(context, by_visit.as_ref().ok()),
    }
}

fn pairs(context: &Context) -> Vec<UsualPair> {
    let pair = |(k, &(from, to)): (usize, &(usize, usize))| {
        let curves = context.curves(k);
        let apart = |d: &crate::findings::Difference| {
            d.at_visits.time.iter().copied().filter(|&t| curves_apart_at(d, t)).collect()
        };
        UsualPair {
            from: context.group(from).into(),
            to: context.group(to).into(),
            curves_apart: curves.map(|d| d.stretches.clone()),
            curves_days: curves.map(apart).unwrap_or_default(),
        }
    };
    context.pairs.iter().enumerate().map(pair).collect()
}

fn notes(context: &Context, by_visit: Option<&ByVisit>) -> Vec<Note> {
    let mut messages = by_visit::notes(context.cohort, by_visit, context.time_word(), context.is_log());
    if let Some(cluster) = &context.findings.columns.cluster {
        messages.push(format!(
            "{} of one {cluster} are taken as independent. Where treatment was given per {cluster}, the p-values are too small.",
            crate::sentences::capital(&context.plan.words.subjects)
        ));
    }
    if context.findings.fit.status == FitStatus::Failed {
        messages.push("The plan's curves could not be fitted: the usual analyses stand by themselves.".into());
    }
    messages.into_iter().map(|message| Note { about: "usual".into(), message }).collect()
}
