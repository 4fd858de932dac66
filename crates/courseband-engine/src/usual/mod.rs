//! The usual analyses, for the reader who expects them beside the curves.
//!
//! | module | what | after |
//! |---|---|---|
//! | [`repeated`] | repeated-measures analysis of variance, groups by times, complete cases | Winer 1971, ch. 7 |
//! | [`sphericity`] | Mauchly's W, Greenhouse-Geisser and Huynh-Feldt epsilons | see the module |
//! | [`two_sample`] | Welch's and Student's comparison of two means | Welch 1947, Biometrika 34:28 |
//! | [`by_time`] | one comparison per time, Holm over all | Holm 1979, Scand. J. Statist. 6:65 |
//! | [`mod@one_way`] | one-way layout, equal and unequal variances | Welch 1951, Biometrika 38:330 |
//! | [`summary`] | one number per subject, compared by group | Matthews et al. 1990, BMJ 300:230 |
//! | [`adjust`] | p-values adjusted for several tests | Holm 1979; Benjamini & Hochberg 1995 |
//! | [`satterthwaite`] | degrees of freedom of a variance estimate | Satterthwaite 1946, Biometrics Bull. 2:110 |
//! | [`survival`] | Kaplan-Meier curve and log-rank test | Kaplan & Meier 1958; Mantel 1966 |
//! | [`imputation`] | pooling over imputed tables | Rubin 1987; Barnard & Rubin 1999, Biometrika 86:948 |
//!
//! What cannot be computed is an [`Undefined`] with the reason, never a NaN.

pub mod adjust;
pub mod by_time;
pub mod imputation;
pub mod one_way;
pub mod repeated;
pub mod satterthwaite;
pub mod sphericity;
pub mod summary;
pub mod survival;
pub mod two_sample;

pub use adjust::{benjamini_hochberg, holm};
pub use by_time::{TimeTest, tests_by_time};
pub use imputation::{Pooled, PooledCurve, pool, pool_curves};
pub use one_way::{OneWay, one_way, one_way_welch};
pub use repeated::{EffectTest, RepeatedAnova, WithinTest, repeated_anova};
pub use satterthwaite::satterthwaite_df;
pub use sphericity::{Mauchly, Sphericity};
pub use summary::{PairComparison, SummaryComparison, SummaryMeasure, compare_summaries, summarise};
pub use survival::{LogRank, SurvivalCurve, SurvivalStep, kaplan_meier, log_rank};
pub use two_sample::{MeanComparison, Sample, Variances, compare_means};

#[cfg(test)]
mod tests;

/// Subjects by times, replicates at one time already averaged.
#[derive(Clone, Debug, PartialEq)]
pub struct Panel {
    /// The group of each subject, below `groups`.
    pub group_of_subject: Vec<usize>,
    /// Number of groups.
    pub groups: usize,
    /// The times, increasing.
    pub times: Vec<f64>,
    /// One row per subject, one cell per time; none where nothing was measured.
    pub values: Vec<Vec<Option<f64>>>,
}

impl Panel {
    /// The values of one group at one time, in the order of the subjects.
    pub fn values_at(&self, group: usize, time: usize) -> Vec<f64> {
        let of_group = self.values.iter().zip(&self.group_of_subject).filter(|(_, g)| **g == group);
        of_group.filter_map(|(row, _)| row[time]).collect()
    }
}

/// Why a result cannot be computed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Undefined {
    /// No subject has a value at every time.
    NoCompleteSubject,
    /// Fewer than two times.
    OneTime,
    /// Two times have one difference only: sphericity holds by itself.
    TwoTimes,
    /// Only one group has subjects left.
    OneGroup,
    /// A group has too few values for the comparison.
    TooFewValues {
        /// The group.
        group: usize,
        /// How many values it has.
        have: usize,
        /// How many it needs.
        need: usize,
    },
    /// The degrees of freedom left for error are fewer than needed.
    TooFewSubjects {
        /// Degrees of freedom that are left.
        have: usize,
        /// Degrees of freedom that are needed.
        need: usize,
    },
    /// The values do not vary, so there is no error to compare with.
    NoVariation,
    /// Nothing happened in any group: no events to compare.
    NoEvents,
}

impl core::fmt::Display for Undefined {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        match self {
            Self::NoCompleteSubject => write!(f, "no subject has a value at every time"),
            Self::OneTime => write!(f, "there are fewer than two times"),
            Self::TwoTimes => write!(f, "with two times there is only one difference, so there is nothing to test"),
            Self::OneGroup => write!(f, "only one group has subjects left"),
            Self::TooFewValues { have, need, .. } => {
                write!(f, "a group has {have} values where {need} are needed")
            }
            Self::TooFewSubjects { have, need } => {
                write!(f, "{have} degrees of freedom are left for error where {need} are needed")
            }
            Self::NoVariation => write!(f, "the values do not vary"),
            Self::NoEvents => write!(f, "there are no events"),
        }
    }
}

impl core::error::Error for Undefined {}

/// Mean and the sum of squared distances from it.
fn mean_and_squares(values: &[f64]) -> (f64, f64) {
    let mean = values.iter().sum::<f64>() / values.len() as f64;
    (mean, values.iter().map(|v| (v - mean) * (v - mean)).sum())
}

/// Whether a sum of squares is no more than the rounding of values of size `scale`.
fn negligible(squares: f64, count: usize, scale: f64) -> bool {
    let rounding = 1e-14 * scale;
    squares <= count as f64 * rounding * rounding
}

/// The largest absolute value.
fn largest(values: impl IntoIterator<Item = f64>) -> f64 {
    values.into_iter().fold(0.0, |most, v| if libm::fabs(v) > most { libm::fabs(v) } else { most })
}
