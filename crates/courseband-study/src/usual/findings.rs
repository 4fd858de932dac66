//! What the usual analyses say, in numbers and sentences.

use crate::findings::{Note, Stretch};
use serde::Serialize;

/// What the usual analyses of a plan's rows say.
#[derive(Debug, Clone, Serialize)]
pub struct UsualFindings {
    /// Version of this program.
    pub version: String,
    /// Rows of the plan.
    pub rows: usize,
    /// Subjects of the plan.
    pub subjects: usize,
    /// Word for one time unit, such as `day`.
    pub time_word: String,
    /// True where differences are ratios, because the plan is on the log scale.
    pub ratio: bool,
    /// Visits that the by-visit analyses share; `null` where the times are too irregular for them.
    pub shared_visits: Option<Vec<f64>>,
    /// The compared pairs, with what the plan's own curves say of them.
    pub pairs: Vec<UsualPair>,
    /// The analyses, always these five in this order: see [`UsualKind`].
    pub analyses: Vec<UsualAnalysis>,
    /// What holds for all of them, in plain words.
    pub notes: Vec<Note>,
}

/// A compared pair: `to` minus `from`.
#[derive(Debug, Clone, Serialize)]
pub struct UsualPair {
    /// The control, else the earlier group.
    pub from: String,
    /// The other group.
    pub to: String,
    /// Where the plan's curves are shown apart; `null` where they could not be fitted.
    pub curves_apart: Option<Vec<Stretch>>,
    /// Visits inside those stretches.
    pub curves_days: Vec<f64>,
}

/// Which analysis.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum UsualKind {
    /// Repeated-measures analysis of variance on complete subjects.
    RepeatedAnova,
    /// Straight-line mixed model.
    StraightLines,
    /// A mean for each visit, any covariance between visits.
    DayAsCategory,
    /// One Welch test per visit.
    DayByDay,
    /// One number per subject, compared by group.
    OnePerSubject,
}

/// One analysis.
#[derive(Debug, Clone, Serialize)]
pub struct UsualAnalysis {
    /// Which.
    pub kind: UsualKind,
    /// What it is called.
    pub name: String,
    /// False where it cannot be done; `result` then says why, and what to do.
    pub done: bool,
    /// The result in plain sentences with its numbers.
    pub result: String,
    /// All its numbers.
    pub tables: Vec<UsualTable>,
    /// What it assumes, in one line.
    pub assumption: String,
    /// Whether the data bear that.
    pub bearing: Bearing,
    /// Where it and the plan's curves disagree, and why.
    pub beside: Beside,
    /// What it uses of the plan's rows.
    pub used: Used,
    /// Lines to be drawn over the courses; straight lines only, else empty.
    pub lines: Vec<UsualLine>,
}

/// How many subjects and rows an analysis uses.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize)]
pub struct Used {
    /// Subjects used.
    pub subjects: usize,
    /// Rows used.
    pub rows: usize,
    /// Subjects of the plan that it leaves out.
    pub dropped_subjects: usize,
    /// Rows of the plan that it leaves out.
    pub dropped_rows: usize,
}

/// Whether the data bear an assumption.
#[derive(Debug, Clone, Serialize)]
pub struct Bearing {
    /// In one word.
    pub verdict: Borne,
    /// The check that says so, in plain words with its numbers.
    pub sentence: String,
    /// The numbers of the check.
    pub numbers: Vec<NamedNumber>,
}

/// Whether the data bear an assumption, in one word.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Borne {
    /// Nothing speaks against it.
    Yes,
    /// Too little to tell, or something speaks against it.
    Doubtful,
    /// The data contradict it.
    No,
    /// It could not be checked.
    Unknown,
}

/// A number with its name.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct NamedNumber {
    /// What it is.
    pub name: String,
    /// Its value; `null` where it does not exist.
    pub value: Option<f64>,
    /// The same as printed.
    pub text: String,
}

/// An analysis beside the plan's curves.
#[derive(Debug, Clone, Serialize)]
pub struct Beside {
    /// Whether both say the same; `null` where they cannot be compared.
    pub agrees: Option<bool>,
    /// In plain words: where they disagree, and why.
    pub sentence: String,
    /// Pair by pair, in the order of [`UsualFindings::pairs`]; empty where the analysis names no days.
    pub pairs: Vec<PairBeside>,
}

/// One pair, day by day.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PairBeside {
    /// Index into [`UsualFindings::pairs`].
    pub pair: usize,
    /// Visits at which this analysis calls the pair apart.
    pub days: Vec<f64>,
    /// Those of them at which the curves do not.
    pub only_here: Vec<f64>,
    /// Visits, of those that this analysis tests, at which only the curves call the pair apart.
    pub only_curves: Vec<f64>,
    /// In plain words.
    pub sentence: String,
}

/// A table of numbers.
#[derive(Debug, Clone, Serialize)]
pub struct UsualTable {
    /// What it shows.
    pub title: String,
    /// Heads of the labels.
    pub label_heads: Vec<String>,
    /// Heads of the numbers.
    pub heads: Vec<String>,
    /// Rows.
    pub rows: Vec<UsualRow>,
    /// What must be known to read it, in plain words; may be empty.
    pub note: String,
}

/// One row of a table.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct UsualRow {
    /// One per label head.
    pub labels: Vec<String>,
    /// One per head.
    pub cells: Vec<UsualCell>,
}

/// A number in a table.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct UsualCell {
    /// Its value; `null` where it does not exist.
    pub value: Option<f64>,
    /// As printed; a dash where it does not exist.
    pub text: String,
}

/// A group's line over the courses.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct UsualLine {
    /// Group name.
    pub group: String,
    /// Times; curved under log, so more than its two ends.
    pub time: Vec<f64>,
    /// Mean in the response's own unit (geometric mean under log).
    pub response_mean: Vec<f64>,
}
