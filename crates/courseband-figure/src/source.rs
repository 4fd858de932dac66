//! What a figure needs of an analysis.
//!
//! The keys are those of the findings, so that a [`Source`] reads from the
//! findings' JSON and skips the rest. Values are on the response scale: in the
//! response's own unit, gaps as ratios where `scale.ratio`. Arrays over time in
//! one object have one length; a value that does not exist is `None`.

use serde::Deserialize;

/// Values over time.
pub type Series = Vec<Option<f64>>;

/// What a figure needs of an analysis.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Source {
    /// Groups in the order of `curves`.
    pub groups: Vec<Group>,
    /// One per group.
    pub curves: Vec<Course>,
    /// How fast the courses change, on the response scale; empty unless asked for.
    #[serde(default)]
    pub rates: Vec<RateCourse>,
    /// One per compared pair.
    pub differences: Vec<Gap>,
    /// Distinct times with an observation, ascending.
    pub visits: Vec<f64>,
    /// What the axes are called.
    pub scale: Names,
    /// The part of the plan that captions name.
    pub plan: Choices,
}

/// One group.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Group {
    /// Name.
    pub name: String,
    /// Subjects fitted.
    pub subjects: usize,
    /// Last time of each subject, ascending.
    pub last_times: Vec<f64>,
}

/// A group's course.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Course {
    /// Times of the grid.
    pub time: Vec<f64>,
    /// Mean (geometric mean on a log scale).
    pub response_mean: Series,
    /// Lower band limit.
    pub response_lower: Series,
    /// Upper band limit.
    pub response_upper: Series,
    /// First and last observed time of the group.
    pub support: [f64; 2],
    /// The same at the visits inside `support`.
    pub at_visits: CoursePoints,
}

/// How fast a group's course changes.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct RateCourse {
    /// Group name.
    pub group: String,
    /// Times of the grid.
    pub time: Vec<f64>,
    /// Change per time unit, or the factor per time unit.
    pub response_mean: Series,
    /// Lower band limit.
    pub response_lower: Series,
    /// Upper band limit.
    pub response_upper: Series,
    /// First and last observed time of the group.
    pub support: [f64; 2],
}

/// A course at some times.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct CoursePoints {
    /// Times.
    pub time: Vec<f64>,
    /// Mean.
    pub response_mean: Series,
    /// Lower band limit.
    pub response_lower: Series,
    /// Upper band limit.
    pub response_upper: Series,
}

/// A compared pair: `to` minus `from`, or `to` / `from`.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Gap {
    /// What it is between: `pair`, `factor`, `interaction` or `trend`.
    #[serde(default)]
    pub kind: String,
    /// The control, else the earlier group.
    pub from: String,
    /// The other group.
    pub to: String,
    /// Times of the grid.
    pub time: Vec<f64>,
    /// Gap.
    pub response_estimate: Series,
    /// Lower band limit.
    pub response_lower: Series,
    /// Upper band limit.
    pub response_upper: Series,
    /// Where both groups were observed; `None` where they never overlap.
    pub support: Option<[f64; 2]>,
    /// The margin on the modelled scale; equal numbers for none.
    pub margin: [f64; 2],
    /// Where the band excludes zero.
    pub stretches: Vec<Run>,
    /// Where the band lies beyond the margin.
    pub beyond: Vec<Run>,
    /// Where the band lies inside the margin.
    pub inside: Vec<Run>,
    /// The same at the visits inside `support`.
    pub at_visits: GapPoints,
}

/// A gap at some times.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct GapPoints {
    /// Times.
    pub time: Vec<f64>,
    /// Gap.
    pub response_estimate: Series,
    /// Lower band limit.
    pub response_lower: Series,
    /// Upper band limit.
    pub response_upper: Series,
}

/// A run of time.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
pub struct Run {
    /// Where it begins.
    pub start: f64,
    /// Where it ends.
    pub end: f64,
    /// Where `to` runs; absent for runs inside the margin.
    #[serde(default)]
    pub direction: Option<Direction>,
}

/// Where the second group of a pair runs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Direction {
    /// Above the first.
    Above,
    /// Below the first.
    Below,
}

/// What the axes are called.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Names {
    /// Word for one time unit, such as `day`.
    pub time_word: String,
    /// The response.
    pub response: String,
    /// True where gaps are ratios.
    pub ratio: bool,
    /// `identity`, `log` or `logit`.
    #[serde(default)]
    pub link: String,
}

/// The part of the plan that captions name.
#[derive(Debug, Clone, Default, Deserialize)]
#[serde(default)]
pub struct Choices {
    /// Words for subjects.
    pub words: Nouns,
    /// How sure, which margin.
    pub comparisons: Comparisons,
    /// Shape of the curves.
    pub curves: Curves,
}

/// Words for subjects.
#[derive(Debug, Clone, Deserialize)]
#[serde(default)]
pub struct Nouns {
    /// One.
    pub subject: String,
    /// Several.
    pub subjects: String,
}

impl Default for Nouns {
    fn default() -> Self {
        Nouns { subject: "subject".into(), subjects: "subjects".into() }
    }
}

/// How sure, which margin.
#[derive(Debug, Clone, Deserialize)]
#[serde(default)]
pub struct Comparisons {
    /// Confidence level, between 0 and 1.
    pub level: f64,
    /// Largest gap that does not matter; 0 for none.
    pub margin: f64,
    /// `response` or `percent`.
    pub margin_unit: String,
    /// `simultaneous` or `pointwise`.
    pub band: String,
}

impl Default for Comparisons {
    fn default() -> Self {
        Comparisons { level: 0.95, margin: 0.0, margin_unit: "response".into(), band: "simultaneous".into() }
    }
}

/// Shape of the curves.
#[derive(Debug, Clone, Default, Deserialize)]
#[serde(default)]
pub struct Curves {
    /// `smooth`, `straight` or `by-time`.
    pub shape: String,
}

/// The subjects' own courses: rows of subject `k` are `offsets[k]` to `offsets[k + 1]`, ascending in time.
#[derive(Debug, Clone, Default, Deserialize)]
#[serde(default)]
pub struct Traces {
    /// Group of each subject, as an index into [`Source::groups`].
    pub group: Vec<u32>,
    /// One more than there are subjects.
    pub offsets: Vec<u32>,
    /// Times.
    pub time: Vec<f64>,
    /// Responses in their own unit.
    pub response: Vec<f64>,
}

impl Traces {
    /// Number of subjects.
    #[must_use]
    pub fn len(&self) -> usize {
        self.group.len().min(self.offsets.len().saturating_sub(1))
    }

    /// True without subjects.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Group and points of subject `k`; nothing where the arrays do not fit together.
    pub(crate) fn subject(&self, k: usize) -> Option<(usize, impl Iterator<Item = (f64, f64)> + '_)> {
        let rows = *self.offsets.get(k)? as usize..*self.offsets.get(k + 1)? as usize;
        let (time, response) = (self.time.get(rows.clone())?, self.response.get(rows)?);
        Some((*self.group.get(k)? as usize, time.iter().copied().zip(response.iter().copied())))
    }
}
