//! What the engine remarks about a fit, in plain words.

use crate::blocks;
use crate::cohort::Cohort;
use crate::findings::GroupInfo;
use crate::plan::Plan;
use courseband_engine::{FitError, Remark};

fn of_group(group: Option<usize>, groups: &[GroupInfo]) -> String {
    match group {
        Some(g) if groups.len() > 1 => format!(" of {}", groups[g].name),
        _ => String::new(),
    }
}

/// A remark as a sentence that says what it means.
pub(crate) fn in_words(remark: Remark, cohort: &Cohort, plan: &Plan) -> String {
    let groups = &cohort.groups[..];
    let subjects = &plan.words.subjects;
    match remark {
        Remark::StraightCourse(None) => "The courses are estimated as straight lines: the data show no bend.".into(),
        Remark::StraightCourse(group) => {
            format!("The course{} is estimated as a straight line: the data show no bend.", of_group(group, groups))
        }
        Remark::NoSubjectVariance { group, trend } => format!(
            "The {subjects}{} are estimated not to differ in {}: that variance is zero.",
            of_group(group, groups),
            if trend { "trend" } else { "level" }
        ),
        Remark::PerfectCorrelation(group) => format!(
            "Level and trend of the {subjects}{} are estimated as perfectly correlated: the data do not hold both apart.",
            of_group(group, groups)
        ),
        Remark::NoSubjectCurve(group) => format!(
            "The {subjects}{} are estimated to differ in level and trend only: their curves show no bend of their own.",
            of_group(group, groups)
        ),
        Remark::NoClusterVariance { trend } => format!(
            "The clusters are estimated not to differ in {}: that variance is zero. Degrees of freedom still count clusters.",
            if trend { "trend" } else { "level" }
        ),
        Remark::PerfectClusterCorrelation => {
            "Level and trend of the clusters are estimated as perfectly correlated: the data do not hold both apart.".into()
        }
        Remark::NoSharedVariance(run) => cohort.runs.get(run).map_or_else(String::new, blocks::no_variance),
        Remark::NoSerialCorrelation => "The serial correlation is estimated as zero: errors are taken as independent.".into(),
        Remark::FullSerialCorrelation => {
            "The serial correlation is at its upper limit: it acts like a level of each subject.".into()
        }
        Remark::NoMeasurementError => "The measurement error is estimated as zero.".into(),
        Remark::OnlyMeasurementError => {
            "All error is estimated as measurement error: there is no serial correlation.".into()
        }
        Remark::LevelOrSerial => "Level and serial correlation cannot be told apart: the correlation lasts longer than the \
                                  follow-up. Curves and their standard errors stand; the separate standard deviations and the \
                                  serial correlation do not."
            .into(),
        Remark::FlatDirection => {
            "The data do not determine one combination of the variance parameters. Curves stand; single variances do not.".into()
        }
    }
}

/// Why nothing was fitted, and what to try.
pub(crate) fn failure(error: &FitError, groups: &[GroupInfo]) -> String {
    match error {
        FitError::EmptyGroup(g) => {
            format!("Group {} has no usable rows. Exclude it or correct its values.", groups[*g].name)
        }
        FitError::NotFinite => "A time or response is too large to compute with. Correct it or change its unit.".into(),
        FitError::NoVariation => {
            "The responses do not vary around the courses, so no standard error can be estimated. \
                                  Check that the right column is the response, or choose a simpler model."
                .into()
        }
        FitError::TooFewRows { rows, needed } => format!(
            "There are {rows} rows, but this model needs at least {needed}. Choose straight courses or add data."
        ),
        FitError::NoCommonStart(group) => format!(
            "A common start needs every group at the first time and later, but {} is not. Let groups start apart.",
            groups[*group].name
        ),
        FitError::Inseparable { .. } => {
            "An adjustment cannot be told from the groups or from another adjustment: it takes one value in each group. \
             Leave it out."
                .into()
        }
        FitError::TiedTimes => {
            "One subject has several rows at one time. Add measurement error, or exclude rows.".into()
        }
        FitError::NoStart => {
            "The model cannot be computed on these data. Try a simpler model: subjects with a level only, \
                              independent visits, straight courses."
                .into()
        }
        FitError::NotConverged { .. } => {
            "The fit found no optimum, so nothing is shown. Try a simpler model: subjects with a \
                                          level only, independent visits, or one spread for all groups."
                .into()
        }
    }
}
