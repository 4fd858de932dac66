//! What all the analyses share: the rows, the pairs, the words, and what the plan's curves say.

use super::findings::*;
use super::print::{by_width, cell};
use crate::cohort::Cohort;
use crate::findings::{Difference, Findings, FitStatus, PairEffects};
use crate::plan::{Plan, Transform};
use crate::sentences::{decimals, number, plain};

/// What all the analyses share.
pub(super) struct Context<'a> {
    pub(super) plan: &'a Plan,
    pub(super) cohort: &'a Cohort,
    /// The plan's curves.
    pub(super) findings: &'a Findings,
    /// Group indices `(from, to)`, in the order of the findings' differences.
    pub(super) pairs: Vec<(usize, usize)>,
}

/// A difference on the modelled scale, ready to be said.
#[derive(Clone, Copy)]
pub(super) struct Gap {
    pub(super) estimate: f64,
    pub(super) lower: f64,
    pub(super) upper: f64,
}

impl<'a> Context<'a> {
    pub(super) fn new(plan: &'a Plan, cohort: &'a Cohort, findings: &'a Findings) -> Self {
        Context { plan, cohort, findings, pairs: cohort.pairs(plan) }
    }

    /// What a p-value must stay below.
    pub(super) fn alpha(&self) -> f64 {
        1.0 - self.plan.comparisons.level
    }

    pub(super) fn level(&self) -> f64 {
        self.plan.comparisons.level
    }

    pub(super) fn is_log(&self) -> bool {
        self.plan.response.transform == Transform::Log
    }

    pub(super) fn back(&self, value: f64) -> f64 {
        if self.is_log() { libm::exp(value) } else { value }
    }

    pub(super) fn group(&self, index: usize) -> &str {
        &self.cohort.groups[index].name
    }

    pub(super) fn time_word(&self) -> &str {
        &self.findings.scale.time_word
    }

    pub(super) fn subjects(&self, count: usize) -> String {
        let words = &self.plan.words;
        super::print::counted(count, &words.subject, &words.subjects)
    }

    /// The curves' difference of a pair; none where they could not be fitted.
    pub(super) fn curves(&self, pair: usize) -> Option<&Difference> {
        if self.findings.fit.status == FitStatus::Failed { None } else { self.findings.differences.get(pair) }
    }

    pub(super) fn effects(&self, pair: usize) -> Option<&PairEffects> {
        self.findings.pair_effects.get(pair)
    }

    /// Head of a column of differences.
    pub(super) fn gap_head(&self) -> &'static str {
        if self.is_log() { "Ratio" } else { "Difference" }
    }

    /// Head of a column of standard errors.
    pub(super) fn se_head(&self) -> &'static str {
        if self.is_log() { "SE (log scale)" } else { "SE" }
    }

    /// Cells of a difference: estimate, lower, upper in the response's unit (or ratios), then SE on the modelled scale.
    pub(super) fn gap_cells(&self, gap: Gap, se: f64) -> Vec<UsualCell> {
        let [e, l, u] = [gap.estimate, gap.lower, gap.upper].map(|x| self.back(x));
        let print = |x: f64| if self.is_log() { by_width(x, (u - l).min(1.0)) } else { by_width(x, u - l) };
        let mut cells: Vec<UsualCell> = [e, l, u].into_iter().map(print).collect();
        cells.push(cell(se, number(se, decimals(se) + 1)));
        cells
    }

    /// `5.2 below Saline (difference -7.1 to -3.3)`, `39 % of Saline (30 % to 51 %)`.
    pub(super) fn gap_said(&self, gap: Gap, from: &str) -> String {
        let [e, l, u] = [gap.estimate, gap.lower, gap.upper].map(|x| self.back(x));
        if self.is_log() {
            let digits = decimals(100.0 * (u - l)).min(2);
            let [e, l, u] = [e, l, u].map(|x| format!("{} %", number(100.0 * x, digits)));
            return format!("{e} of {from} ({l} to {u})");
        }
        let digits = decimals(u - l);
        let word = if e >= 0.0 { "above" } else { "below" };
        format!("{} {word} {from} (difference {} to {})", number(e.abs(), digits), number(l, digits), number(u, digits))
    }

    /// The table's visits as printed.
    pub(super) fn when(&self, t: f64) -> String {
        format!("{} {}", self.time_word(), plain(t))
    }

    /// Rows of the plan that are not among `rows`, and the same of subjects.
    pub(super) fn used(&self, subjects: usize, rows: usize) -> Used {
        Used {
            subjects,
            rows,
            dropped_subjects: self.cohort.data.subjects.len() - subjects,
            dropped_rows: self.cohort.data.rows() - rows,
        }
    }

    /// An analysis that cannot be done.
    pub(super) fn refused(&self, kind: UsualKind, name: &str, assumption: String, why: String) -> UsualAnalysis {
        UsualAnalysis {
            kind,
            name: name.into(),
            done: false,
            result: why,
            tables: Vec::new(),
            assumption,
            bearing: Bearing {
                verdict: Borne::Unknown,
                sentence: "Not checked: nothing was computed.".into(),
                numbers: vec![],
            },
            beside: Beside { agrees: None, sentence: "Nothing to compare with the curves.".into(), pairs: vec![] },
            used: self.used(0, 0),
            lines: Vec::new(),
        }
    }
}
