//! The subjects' own courses, as fitted.

use crate::cohort::Cohort;
use crate::plan::{Distribution, Plan, Transform};
use crate::refusal::Refusal;
use crate::study::Study;
use serde::Serialize;

/// The rows that were fitted. Those of subject `k` are `offsets[k]` to `offsets[k + 1]`, ascending in time.
#[derive(Debug, Default, PartialEq, Serialize)]
pub struct Traces {
    /// Group of each subject, as an index into the findings' groups.
    pub group: Vec<u32>,
    /// Name of each subject.
    pub subject: Vec<String>,
    /// One more than subjects.
    pub offsets: Vec<u32>,
    /// Times.
    pub time: Vec<f64>,
    /// Responses on the scale of `response_*` in the findings.
    pub response: Vec<f64>,
}

impl Study {
    /// The rows that a plan's fit uses.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn traces(&mut self, plan: &Plan) -> Result<Traces, Refusal> {
        let log = plan.response.transform == Transform::Log;
        let cohort = Cohort::new(self.reading(plan)?, plan)?;
        let mut traces = Traces { offsets: vec![0], subject: cohort.subject_names, ..Traces::default() };
        for subject in &cohort.data.subjects {
            traces.group.push(subject.group as u32);
            traces.time.extend(&subject.times);
            let trials = plan.response.distribution == Distribution::Binomial;
            let shown = |(j, &y): (usize, &f64)| match subject.detail.get(j).filter(|_| trials) {
                Some(total) => y / total,
                None if log => libm::exp(y),
                None => y,
            };
            traces.response.extend(subject.responses.iter().enumerate().map(shown));
            traces.offsets.push(traces.time.len() as u32);
        }
        Ok(traces)
    }
}
