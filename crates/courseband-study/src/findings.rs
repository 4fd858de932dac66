//! The findings: everything that an analysis says, in numbers and sentences.
//!
//! Arrays over time in one object have one length. Times are in the table's
//! own unit. A value that does not exist is `null` in JSON, never a stand-in.

use crate::adjust::Adjustment;
use crate::blocks::{BendEffect, BlockEffects};
use crate::comparison::ComparisonKind;
use crate::housing::ClusterSummary;
use crate::plan::Plan;
use serde::Serialize;

/// Everything that an analysis says.
#[derive(Debug, Clone, Serialize)]
pub struct Findings {
    /// Version of this program.
    pub version: String,
    /// Rows fitted.
    pub rows: usize,
    /// Subjects fitted.
    pub subjects: usize,
    /// Columns as used, with the reason where inferred.
    pub columns: ColumnsUsed,
    /// What was found wrong in the table, row by row.
    pub problems: Vec<Problem>,
    /// The fitted model.
    pub fit: FitSummary,
    /// One per group; empty when the fit failed.
    pub curves: Vec<Curve>,
    /// How fast the courses change; empty unless asked for.
    pub rates: Vec<Rate>,
    /// A distribution or scale that the values suggest; `null` where they suggest nothing else.
    pub proposal: Option<crate::proposal::Proposal>,
    /// In a crossed design the two labels of every group; otherwise empty.
    pub cells: Vec<[String; 2]>,
    /// One per compared pair; empty when the fit failed.
    pub differences: Vec<Difference>,
    /// What else must be known, in plain words.
    pub notes: Vec<Note>,
    /// The plan with every default filled in.
    pub plan: Plan,
    /// Groups in the order of `curves`.
    pub groups: Vec<GroupInfo>,
    /// Distinct times with an observation that was fitted, ascending.
    pub visits: Vec<f64>,
    /// What the time and the response are called, with unit where known.
    pub scale: ScaleInfo,
    /// Plain sentences, most important first.
    pub sentences: Vec<Sentence>,
    /// One per compared pair: effect sizes.
    pub pair_effects: Vec<PairEffects>,
    /// One per group: effect sizes.
    pub group_effects: Vec<GroupEffects>,
    /// Cages, litters, sites; `null` without a cluster column.
    pub clusters: Option<ClusterSummary>,
    /// Effects of explanatory columns, one per shared column of the mean.
    pub adjustments: Vec<Adjustment>,
    /// Effects of explanatory numbers that may bend.
    pub bends: Vec<BendEffect>,
    /// Repeats, batches or plates; `null` without a block column.
    pub blocks: Option<BlockEffects>,
}

/// Columns as used. A role without a column is `null`.
#[derive(Debug, Clone, Default, Serialize)]
pub struct ColumnsUsed {
    /// Subject column.
    pub subject: Option<String>,
    /// Time column.
    pub time: Option<String>,
    /// Group column.
    pub group: Option<String>,
    /// Response column.
    pub response: Option<String>,
    /// Cluster column.
    pub cluster: Option<String>,
    /// Covariates.
    pub covariates: Vec<String>,
    /// One reason for each inferred role, in words.
    pub reasons: Vec<Reason>,
}

/// Why a column was taken for a role.
#[derive(Debug, Clone, Serialize)]
pub struct Reason {
    /// The role: `subject`, `time`, `group`, `response` or `cluster`.
    pub role: String,
    /// The column, or `null` for none.
    pub column: Option<String>,
    /// In plain words.
    pub reason: String,
}

/// Something wrong in one place of the table.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Problem {
    /// Line in the file; the header is line 1.
    pub row: usize,
    /// Column name.
    pub column: String,
    /// The cell as written.
    pub value: String,
    /// What it is and what was done.
    pub message: String,
}

/// What else must be known.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Note {
    /// `table`, `fit`, `bands`, `comparisons` or `curves`.
    pub about: String,
    /// In plain words.
    pub message: String,
}

/// How a fit ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum FitStatus {
    /// An inner optimum was reached.
    Converged,
    /// A valid optimum at the edge of the parameter space; `notes` say which.
    Boundary,
    /// No optimum: no curves and no differences are given.
    Failed,
}

/// A value per group, written as an object in group order.
#[derive(Debug, Clone, Default)]
pub struct PerGroup(pub Vec<(String, f64)>);

impl Serialize for PerGroup {
    fn serialize<S: serde::Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_map(self.0.iter().map(|(name, value)| (name, value)))
    }
}

/// The fitted model.
#[derive(Debug, Clone, Serialize)]
pub struct FitSummary {
    /// How it ended.
    pub status: FitStatus,
    /// Log restricted likelihood, all constants included.
    pub log_reml: Option<f64>,
    /// Total error standard deviation per group, in the modelled unit.
    pub residual_sd: PerGroup,
    /// Dispersion of a gamma or negative binomial response; `null` for others.
    pub dispersion: Option<f64>,
    /// Covariance of the subject effects, level at the first time, trend per time unit.
    /// Empty without subject effects; per group in `subject_covariance_by_group`.
    pub subject_covariance: Vec<Vec<f64>>,
    /// One matrix per group where the plan asks for it, else empty.
    pub subject_covariance_by_group: Vec<Vec<Vec<f64>>>,
    /// Covariance of the cluster effects, level at the first time, trend per time unit; empty without them.
    pub cluster_covariance: Vec<Vec<f64>>,
    /// Correlation of errors one time unit apart; `null` without serial correlation.
    pub serial_correlation: Option<f64>,
    /// Share of the error variance that is measurement error; `null` without that part.
    pub measurement_error_share: Option<f64>,
    /// Effective degrees of freedom per group, level and line included.
    pub effective_df: PerGroup,
    /// Evaluations of the criterion.
    pub evaluations: usize,
    /// Which parameters are at a boundary, or why it failed, in plain words.
    pub remarks: Vec<String>,
}

/// One group's course.
#[derive(Debug, Clone, Serialize)]
pub struct Curve {
    /// Group name.
    pub group: String,
    /// The asked grid.
    #[serde(flatten)]
    pub grid: CurvePoints,
    /// Max-|z| quantile of the family of all curves, or one per grid point.
    pub critical: Critical,
    /// First and last observed time of the group.
    pub support: [f64; 2],
    /// The same at the visits inside support.
    pub at_visits: CurvePoints,
}

/// A course at some times.
#[derive(Debug, Clone, Default, Serialize)]
pub struct CurvePoints {
    /// Times.
    pub time: Vec<f64>,
    /// Mean on the modelled scale.
    pub mean: Vec<Option<f64>>,
    /// Standard error of the mean.
    pub se: Vec<Option<f64>>,
    /// Lower band limit.
    pub lower: Vec<Option<f64>>,
    /// Upper band limit.
    pub upper: Vec<Option<f64>>,
    /// Mean in the response's own unit (geometric mean under log).
    pub response_mean: Vec<Option<f64>>,
    /// Lower limit in the response's own unit.
    pub response_lower: Vec<Option<f64>>,
    /// Upper limit in the response's own unit.
    pub response_upper: Vec<Option<f64>>,
}

/// A critical value: one, or one for each grid point.
#[derive(Debug, Clone, Serialize)]
#[serde(untagged)]
pub enum Critical {
    /// One value for all times.
    One(f64),
    /// One for each grid point.
    Many(Vec<Option<f64>>),
}

/// One compared pair: `to` minus `from`.
#[derive(Debug, Clone, Serialize)]
pub struct Difference {
    /// What it is between: `pair`, `factor`, `interaction` or `trend`.
    pub kind: ComparisonKind,
    /// The control, else the earlier group; of a trend the first group in order.
    pub from: String,
    /// The other group; of a trend the last in order.
    pub to: String,
    /// The asked grid.
    #[serde(flatten)]
    pub grid: DifferencePoints,
    /// One value for all compared pairs, or one per grid point.
    pub critical: Critical,
    /// Overlap of the two groups' observed ranges; `null` where they do not overlap.
    pub support: Option<[f64; 2]>,
    /// The margin on the modelled scale, as [lower, upper]; [0, 0] without one.
    pub margin: [f64; 2],
    /// Were the courses one: chance of so large a largest gap in standard errors, adjusted over all compared
    /// pairs. Below `1 - level` exactly where there are stretches (simultaneous bands only).
    pub p_adjusted: Option<f64>,
    /// Maximal runs where the band excludes zero.
    pub stretches: Vec<Stretch>,
    /// Maximal runs where the band lies beyond the margin.
    pub beyond: Vec<Stretch>,
    /// Maximal runs where the band lies inside the margin.
    pub inside: Vec<Stretch>,
    /// Maximal runs where the band rules out that `to` is worse by more than the margin; empty unless asked for.
    pub not_worse: Vec<Stretch>,
    /// The same at the visits inside support.
    pub at_visits: DifferencePoints,
}

/// A difference at some times.
#[derive(Debug, Clone, Default, Serialize)]
pub struct DifferencePoints {
    /// Times.
    pub time: Vec<f64>,
    /// `to` minus `from` on the modelled scale.
    pub estimate: Vec<Option<f64>>,
    /// Its standard error.
    pub se: Vec<Option<f64>>,
    /// Lower band limit.
    pub lower: Vec<Option<f64>>,
    /// Upper band limit.
    pub upper: Vec<Option<f64>>,
    /// Difference in the response's unit, or the ratio `to` / `from` under log.
    pub response_estimate: Vec<Option<f64>>,
    /// Lower limit of that.
    pub response_lower: Vec<Option<f64>>,
    /// Upper limit of that.
    pub response_upper: Vec<Option<f64>>,
    /// Degrees of freedom, where used.
    pub df: Vec<Option<f64>>,
}

/// A run of time.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Stretch {
    /// Where it begins, on the continuous curve.
    pub start: f64,
    /// Where it ends.
    pub end: f64,
    /// `above` or `below`; absent for stretches inside the margin.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub direction: Option<Direction>,
    /// Cut by the start of support.
    pub open_start: bool,
    /// Cut by the end of support.
    pub open_end: bool,
}

/// Direction of a gap: where `to` runs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Direction {
    /// `to` runs above `from`.
    Above,
    /// `to` runs below `from`.
    Below,
}

/// One group.
#[derive(Debug, Clone, Serialize)]
pub struct GroupInfo {
    /// Name.
    pub name: String,
    /// Subjects fitted.
    pub subjects: usize,
    /// Rows fitted.
    pub rows: usize,
    /// Last fitted time of each subject, ascending: who is still followed when.
    pub last_times: Vec<f64>,
    /// Number of subjects with an observation at each entry of `visits`.
    pub at_visit: Vec<usize>,
}

/// What the axes are called.
#[derive(Debug, Clone, Serialize)]
pub struct ScaleInfo {
    /// Word for one time unit, such as `day`.
    pub time_word: String,
    /// Name of the response column.
    pub response: String,
    /// True where gaps are ratios: of the courses or, under a logit link, of odds.
    pub ratio: bool,
    /// `identity`, `log` or `logit`.
    pub link: &'static str,
}

/// A finding in words.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Sentence {
    /// What kind: `gap`, `undecided`, `inside`, `none-apart`, `followed`, `caution`.
    pub kind: String,
    /// Index into `differences`, where it is about one pair.
    pub pair: Option<usize>,
    /// The few words that carry it, such as `Hydrogel runs below Saline.`
    pub headline: String,
    /// The rest, in plain sentences with numbers.
    pub text: String,
    /// What it depends on, such as `36 mice, 327 visits`.
    pub depends: String,
}

/// How fast a course changes.
#[derive(Debug, Clone, Serialize)]
pub struct Rate {
    /// Group name.
    pub group: String,
    /// First and last time of the group.
    pub support: [f64; 2],
    /// The asked grid.
    pub time: Vec<f64>,
    /// Change per time unit: in the response's unit or, under log, the factor per time unit.
    pub response_mean: Vec<Option<f64>>,
    /// Lower limit of a band of its own over all courses' rates; it rests on degrees of freedom.
    pub response_lower: Vec<Option<f64>>,
    /// Upper limit.
    pub response_upper: Vec<Option<f64>>,
}

/// A number with its interval, on the response scale; ratios where `scale.ratio` and it is a gap.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Effect {
    /// Estimate.
    pub estimate: f64,
    /// Lower limit at the plan's level, for this number by itself.
    pub lower: f64,
    /// Upper limit.
    pub upper: f64,
    /// Degrees of freedom; `null` where infinite.
    pub df: Option<f64>,
}

/// A time with its interval. `null` stands for never within the support.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct TimeEffect {
    /// From the fitted curve.
    pub estimate: Option<f64>,
    /// Earliest time that is compatible.
    pub lower: Option<f64>,
    /// Latest time that is compatible.
    pub upper: Option<f64>,
    /// True where the lower end is the first time of support: it may have been earlier.
    pub at_or_before_start: bool,
    /// Probability that it holds from the first time on.
    pub already_at_start: f64,
    /// Probability that it is not reached by the end of support.
    pub never: f64,
}

/// Effect sizes of a pair, in the order of `differences`.
#[derive(Debug, Clone, Serialize)]
pub struct PairEffects {
    /// The time of `landmark`.
    pub landmark_time: Option<f64>,
    /// Gap at the landmark: `to` minus `from`, or the ratio.
    pub landmark: Option<Effect>,
    /// Gap averaged over the support, or the geometric mean of the ratio over time.
    pub average: Option<Effect>,
    /// Area between the courses: response unit times time unit; `null` on a ratio scale.
    pub area: Option<Effect>,
    /// Start of the last run, unbroken to the end of support, in which the gap is beyond the margin;
    /// `null` without a margin.
    pub onset: Option<TimeEffect>,
    /// Direction of `onset`.
    pub onset_direction: Option<Direction>,
    /// How much later `to` reaches the plan's level than `from`, in time units; `null` without a level, or where one of
    /// them may not reach it.
    pub to_level: Option<Effect>,
    /// Were the average gap zero: chance of one so large (t test).
    pub level_p: Option<f64>,
    /// Were the gap the same at all times: chance of so large a largest departure from its average.
    pub shape_p: Option<f64>,
}

/// Effect sizes of a group, in the order of `groups`.
#[derive(Debug, Clone, Serialize)]
pub struct GroupEffects {
    /// Mean level over the group's support (geometric mean under log).
    pub average: Option<Effect>,
    /// Area under the course: response unit times time unit; `null` on a ratio scale.
    pub area: Option<Effect>,
    /// First and last time of `growth`.
    pub growth_over: Option<[f64; 2]>,
    /// When the course reaches the plan's level; `null` without a level.
    pub to_level: Option<TimeEffect>,
    /// Change per time unit over `growth_over`: a difference, or a ratio.
    pub growth: Option<Effect>,
    /// Time to double under log, negative where it halves; limits `null` where the growth's interval holds no change.
    pub doubling_time: Option<Effect>,
    /// Highest point of the course.
    pub peak: Option<Extreme>,
    /// Lowest point of the course.
    pub nadir: Option<Extreme>,
}

/// An extreme of a course.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Extreme {
    /// When, with quantiles of posterior draws.
    pub time: Effect,
    /// How high, with quantiles of posterior draws.
    pub height: Effect,
    /// True where the fitted extreme is at an end of the support, so that it may lie outside.
    pub at_end: bool,
}
