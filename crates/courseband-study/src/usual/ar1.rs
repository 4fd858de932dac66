//! Day as a category with AR(1) errors, where any covariance between visits is too much to ask.

use super::beside::{Manner, compare};
use super::category::{KIND, NAME, assumption, bearing, means_table};
use super::context::Context;
use super::days::{DayGap, DayGaps};
use super::findings::*;
use super::print::unit;
use crate::sentences::number;
use courseband_engine as engine;
use courseband_engine::Fit;
use courseband_engine::usual::Panel;
use courseband_engine::visits::{MOST_VISITS, VisitEstimate, VisitsError};

/// The analysis, `error` being why it is not that with any covariance.
pub(super) fn analyse(context: &Context, panel: &Panel, error: &VisitsError, used: Used) -> UsualAnalysis {
    let why = format!("An unstructured covariance cannot be estimated: {}.", error_said(context, panel, error));
    let Some(fitted) = fit(panel) else {
        let why = format!("{why} Nor can one with AR(1).");
        return context.refused(KIND, NAME, assumption(context, false), why);
    };
    let asked = Asked { panel, level: context.level(), fitted: &fitted, posterior: fitted.corrected() };
    let of_pair = |&pair: &(usize, usize)| (0..panel.times.len()).map(|v| asked.gap(pair, v)).collect();
    let gaps = DayGaps::new(panel.times.clone(), context.pairs.iter().map(of_pair).collect());
    let phi = fitted.serial_correlation().map_or(String::new(), |phi| {
        format!(" The correlation of values one {} apart is {}.", unit(context.time_word()), number(phi, 2))
    });
    let mut tables = vec![means_table(context, panel, |g, v| asked.mean(g, v))];
    let mut result = String::new();
    if !context.pairs.is_empty() {
        tables.insert(0, gaps.table(context, "Differences by visit", &[], |_, _| Vec::new()));
        result = format!(" {}", gaps.result(context));
    }
    UsualAnalysis {
        kind: KIND,
        name: format!("{NAME}, AR(1) covariance"),
        done: true,
        result: format!("{why} AR(1) is used instead.{result}{phi}"),
        tables,
        assumption: assumption(context, true),
        bearing: bearing(context, panel, None),
        beside: compare(context, &gaps.outcomes(context), Manner::OwnMeans(gaps.comparisons())),
        used,
        lines: Vec::new(),
    }
}

/// Means by visit, AR(1) errors by real time, no subject effects.
fn fit(panel: &Panel) -> Option<Fit> {
    if panel.times.len() < 2 {
        return None;
    }
    let rows = |(values, &group): (&Vec<Option<f64>>, &usize)| {
        let (times, responses) = panel.times.iter().zip(values).filter_map(|(t, y)| y.map(|y| (*t, y))).unzip();
        engine::SubjectRows { group, times, responses, ..engine::SubjectRows::default() }
    };
    let subjects = panel.values.iter().zip(&panel.group_of_subject).map(rows).filter(|s| !s.times.is_empty());
    let data = engine::Data { groups: panel.groups, subjects: subjects.collect(), ..engine::Data::default() };
    let model = engine::Model {
        shape: engine::Shape::ByTime,
        subjects: engine::SubjectEffects::None,
        serial: engine::Serial::Ar1,
        ..engine::Model::default()
    };
    engine::fit(&data, &model).ok()
}

/// A fit, ready to be asked.
struct Asked<'a> {
    panel: &'a Panel,
    level: f64,
    fitted: &'a Fit,
    posterior: engine::Posterior<'a>,
}

impl Asked<'_> {
    fn has(&self, group: usize, visit: usize) -> bool {
        !self.panel.values_at(group, visit).is_empty()
    }

    fn gap(&self, (from, to): (usize, usize), visit: usize) -> Result<DayGap, String> {
        if !self.has(from, visit) || !self.has(to, visit) {
            return Err("a group has no value".to_string());
        }
        let e = self.posterior.estimate(&self.fitted.gap(from, to, self.panel.times[visit]));
        Ok(DayGap::new(e.mean, e.se, e.df, self.level))
    }

    fn mean(&self, group: usize, visit: usize) -> Option<VisitEstimate> {
        self.has(group, visit).then(|| {
            let e = self.posterior.estimate(&self.fitted.course(group, self.panel.times[visit]));
            let DayGap { estimate, se, df, p, interval } = DayGap::new(e.mean, e.se, e.df, self.level);
            VisitEstimate { estimate, se, df, t: estimate / se, p, interval }
        })
    }
}

fn error_said(context: &Context, panel: &Panel, error: &VisitsError) -> String {
    let when = |visit: usize| context.when(panel.times[visit]);
    match *error {
        VisitsError::OneVisit => "fewer than two visits have enough values".into(),
        VisitsError::TooManyVisits { visits } => {
            format!("{visits} visits are too many (at most {})", MOST_VISITS)
        }
        VisitsError::NotFinite => "a value is too large".into(),
        VisitsError::TooFewSubjects { have, need } => {
            format!("subjects less groups are {have}, and {need} are needed for {need} visits")
        }
        VisitsError::TooFewAtVisit { visit, have, need } => {
            format!("{} has {have} values and {need} are needed", when(visit))
        }
        VisitsError::NeverTogether { first, second } => {
            format!("no subject has both {} and {}", when(first), when(second))
        }
        VisitsError::NoVariation { visit } => format!("the values at {} do not vary", when(visit)),
        VisitsError::Singular => "some visits can be computed from others".into(),
        VisitsError::NotDetermined | VisitsError::NotConverged { .. } => "no optimum was found".into(),
    }
}
