//! Day as a category: a mean for each visit, any covariance between visits; AR(1) where that cannot be estimated.

use super::beside::{Manner, compare};
use super::by_visit::ByVisit;
use super::context::{Context, Gap};
use super::days::{DayGap, DayGaps};
use super::findings::*;
use super::print::*;
use crate::sentences::number;
use courseband_engine as engine;
use courseband_engine::usual::Panel;
use courseband_engine::visits::{VisitEstimate, VisitFit, VisitTest, VisitTestUndefined, fit_visits};

pub(super) const KIND: UsualKind = UsualKind::DayAsCategory;
pub(super) const NAME: &str = "Day as a category";

pub(super) fn analyse(context: &Context, by_visit: Result<&ByVisit, &String>) -> UsualAnalysis {
    let by_visit = match by_visit {
        Ok(by_visit) => by_visit,
        Err(why) => return context.refused(KIND, NAME, assumption(context, false), why.clone()),
    };
    let Kept { panel, used } = Kept::new(context, by_visit);
    match fit_visits(&panel) {
        Ok(fit) => unstructured(context, &panel, &fit, used),
        Err(error) => super::ar1::analyse(context, &panel, &error, used),
    }
}

pub(super) fn assumption(context: &Context, ar1: bool) -> String {
    let covariance =
        if ar1 { "correlation that fades with time (AR(1)), one spread" } else { "any covariance between visits" };
    format!(
        "Every visit has its own mean and tells nothing of its neighbours; {covariance}, the same in all groups; gaps at \
         random given what was measured{}.",
        if context.is_log() { "; log scale" } else { "" }
    )
}

/// Visits with at least two values more than groups.
fn estimable(panel: &Panel) -> Vec<bool> {
    let enough = |visit: usize| {
        let counts: Vec<usize> = (0..panel.groups).map(|g| panel.values_at(g, visit).len()).collect();
        counts.iter().sum::<usize>() >= counts.iter().filter(|n| **n > 0).count() + 2
    };
    (0..panel.times.len()).map(enough).collect()
}

/// The visits that have values enough, and what they use of the plan's rows.
struct Kept {
    panel: Panel,
    used: Used,
}

impl Kept {
    fn new(context: &Context, by_visit: &ByVisit) -> Kept {
        let keep = estimable(&by_visit.panel);
        let panel = by_visit.only(&keep);
        let subjects = panel.values.iter().filter(|row| row.iter().any(Option::is_some)).count();
        let used = context.used(subjects, by_visit.rows_at(&keep));
        Kept { panel, used }
    }
}

fn unstructured(context: &Context, panel: &Panel, fit: &VisitFit, used: Used) -> UsualAnalysis {
    let level = context.level();
    let differences = fit.differences(&context.pairs, level);
    let mut gaps: Vec<Vec<Result<DayGap, String>>> = vec![Vec::new(); context.pairs.len()];
    for (k, difference) in differences.iter().enumerate() {
        let gap = difference.estimate.map(|e| gap_of(&e)).ok_or_else(|| "a group has no value".to_string());
        gaps[k / panel.times.len().max(1)].push(gap);
    }
    let gaps = DayGaps::new(panel.times.clone(), gaps);
    let mut said = Vec::new();
    if !context.pairs.is_empty() {
        said.push(gaps.result(context));
    }
    said.push(overall_said("Groups by visits", fit.groups_by_visits_test(), context, panel));
    said.push(overall_said("Groups", fit.groups_test(), context, panel));
    said.push(overall_said("Visits", fit.visits_test(), context, panel));
    if fit.verdict() == engine::Verdict::Boundary {
        said.push("The covariance is estimated at the edge of what is possible: some visits repeat others.".into());
    }
    said.retain(|s| !s.is_empty());
    let mut tables =
        vec![overall_table(context, panel, fit), means_table(context, panel, |g, v| fit.mean(g, v, level))];
    if !context.pairs.is_empty() {
        tables.insert(0, gaps.table(context, "Differences by visit", &[], |_, _| Vec::new()));
    }
    tables.push(covariance_table(context, panel, fit));
    UsualAnalysis {
        kind: KIND,
        name: format!("{NAME}, unstructured covariance"),
        done: true,
        result: said.join(" "),
        tables,
        assumption: assumption(context, false),
        bearing: bearing(context, panel, Some(fit)),
        beside: compare(context, &gaps.outcomes(context), Manner::OwnMeans(gaps.comparisons())),
        used,
        lines: Vec::new(),
    }
}

fn gap_of(e: &VisitEstimate) -> DayGap {
    DayGap { estimate: e.estimate, se: e.se, df: e.df, p: e.p, interval: e.interval }
}

fn undefined(context: &Context, panel: &Panel, reason: VisitTestUndefined) -> String {
    match reason {
        VisitTestUndefined::OneGroup => "there is one group".into(),
        VisitTestUndefined::EmptyCell { group, visit } => {
            format!("{} has no value at {}", context.group(group), context.when(panel.times[visit]))
        }
        VisitTestUndefined::TooFewDegrees { least } => {
            format!("a part of the test has {} degrees of freedom, where more than 2 are needed", number(least, 1))
        }
    }
}

fn overall_said(name: &str, test: Result<VisitTest, VisitTestUndefined>, context: &Context, panel: &Panel) -> String {
    match test {
        Ok(t) => format!("{name}: {}.", f_said(t.f, t.df, t.df_error, t.p)),
        Err(VisitTestUndefined::OneGroup) => String::new(),
        Err(reason) => format!("{name} cannot be tested: {}.", undefined(context, panel, reason)),
    }
}

fn overall_table(context: &Context, panel: &Panel, fit: &VisitFit) -> UsualTable {
    let tests = [
        ("Groups", fit.groups_test()),
        ("Visits", fit.visits_test()),
        ("Groups by visits", fit.groups_by_visits_test()),
    ];
    let cells = |test: &Result<VisitTest, VisitTestUndefined>| match test {
        Ok(t) => vec![df_cell(t.df), df_cell(t.df_error), fixed(t.f, 2), p_cell(t.p)],
        Err(_) => (0..4).map(|_| no_cell()).collect(),
    };
    let mut whys: Vec<String> =
        tests.iter().filter_map(|(_, t)| t.err().map(|reason| undefined(context, panel, reason))).collect();
    whys.dedup();
    let why = if whys.is_empty() { String::new() } else { format!(" Not tested: {}.", whys.join("; ")) };
    UsualTable {
        title: "Overall tests".into(),
        label_heads: heads(&["Effect"]),
        heads: heads(&["df", "df error", "F", "p"]),
        rows: tests.iter().map(|(name, test)| row(&[name], cells(test))).collect(),
        note: format!("Wald F tests, degrees of freedom after Fai and Cornelius.{why}"),
    }
}

pub(super) fn means_table(
    context: &Context,
    panel: &Panel,
    mean: impl Fn(usize, usize) -> Option<VisitEstimate>,
) -> UsualTable {
    let mut rows = Vec::new();
    for g in 0..panel.groups {
        for (v, t) in panel.times.iter().enumerate() {
            let n = panel.values_at(g, v).len();
            let mut cells = vec![cell(n as f64, n.to_string())];
            match mean(g, v) {
                Some(e) => {
                    let gap = Gap { estimate: e.estimate, lower: e.interval.0, upper: e.interval.1 };
                    cells.extend(context.gap_cells(gap, e.se));
                    cells.push(df_cell(e.df));
                }
                None => cells.extend((0..5).map(|_| no_cell())),
            }
            rows.push(row(&[context.group(g), &context.when(*t)], cells));
        }
    }
    let head = if context.is_log() { "Geometric mean" } else { "Mean" };
    UsualTable {
        title: "Means by visit".into(),
        label_heads: heads(&["Group", "Visit"]),
        heads: heads(&["n", head, "Lower", "Upper", context.se_head(), "df"]),
        rows,
        note: String::new(),
    }
}

fn covariance_table(context: &Context, panel: &Panel, fit: &VisitFit) -> UsualTable {
    let sigma = fit.covariance();
    let sd: Vec<f64> = (0..sigma.len()).map(|v| libm::sqrt(sigma[v][v])).collect();
    let visits: Vec<String> = panel.times.iter().map(|&t| context.when(t)).collect();
    let cells = |v: usize| {
        let mut cells = vec![by_width(sd[v], sd[v] / 5.0)];
        let correlation = |w: usize| fixed(sigma[v][w] / (sd[v] * sd[w]), 2);
        cells.extend((0..sd.len()).map(|w| if w <= v { correlation(w) } else { no_cell() }));
        cells
    };
    let mut columns = vec!["SD"];
    columns.extend(visits.iter().map(String::as_str));
    UsualTable {
        title: "Standard deviations and correlations".into(),
        label_heads: heads(&["Visit"]),
        heads: heads(&columns),
        rows: visits.iter().enumerate().map(|(v, name)| row(&[name], cells(v))).collect(),
        note: String::new(),
    }
}

/// Largest ratio of two groups' standard deviations at a visit with at least five values each.
fn largest_ratio(panel: &Panel) -> Option<(f64, f64)> {
    let sd = |values: &[f64]| {
        let mean = values.iter().sum::<f64>() / values.len() as f64;
        libm::sqrt(values.iter().map(|y| (y - mean) * (y - mean)).sum::<f64>() / (values.len() - 1) as f64)
    };
    let mut most: Option<(f64, f64)> = None;
    for (v, &t) in panel.times.iter().enumerate() {
        let all: Vec<f64> = (0..panel.groups)
            .map(|g| panel.values_at(g, v))
            .filter(|values| values.len() >= 5)
            .map(|values| sd(&values))
            .filter(|sd| *sd > 0.0)
            .collect();
        let (low, high) = all.iter().fold((f64::INFINITY, 0.0_f64), |(l, h), x| (l.min(*x), h.max(*x)));
        if all.len() > 1 && most.is_none_or(|(_, ratio)| high / low > ratio) {
            most = Some((t, high / low));
        }
    }
    most
}

pub(super) fn bearing(context: &Context, panel: &Panel, fit: Option<&VisitFit>) -> Bearing {
    let visits = panel.times.len();
    let cells = (0..panel.groups).flat_map(|g| (0..visits).map(move |v| (g, v)));
    let fewest = cells.map(|(g, v)| (panel.values_at(g, v).len(), g, v)).min().unwrap_or((0, 0, 0));
    let mut numbers = vec![named("Fewest values of a group at a visit", cell(fewest.0 as f64, fewest.0.to_string()))];
    let mut sentence = format!(
        "Fewest values: {} in {} at {}.",
        fewest.0,
        context.group(fewest.1),
        context.when(panel.times[fewest.2])
    );
    let mut doubtful = fewest.0 < 5;
    if let Some(fit) = fit {
        let parameters = visits * (visits + 1) / 2;
        doubtful |= fit.subjects() < 2 * visits + panel.groups;
        sentence.push_str(&format!(
            " {} stand behind {parameters} variances and covariances.",
            context.subjects(fit.subjects())
        ));
        numbers.push(named("Variances and covariances", cell(parameters as f64, parameters.to_string())));
    }
    if let Some((t, ratio)) = largest_ratio(panel) {
        // Twice the standard deviation, four times the variance: common practice, no source.
        doubtful |= ratio > 2.0;
        sentence.push_str(&format!(
            " The groups' standard deviations differ most at {}, by a factor of {}.",
            context.when(t),
            number(ratio, 1)
        ));
        numbers.push(named("Largest ratio of group SDs", fixed(ratio, 2)));
    }
    let lead = if doubtful {
        "Thin or uneven data: read with care."
    } else {
        "Enough values at every visit, and like spreads."
    };
    let verdict = if doubtful { Borne::Doubtful } else { Borne::Yes };
    Bearing { verdict, sentence: format!("{lead} {sentence}"), numbers }
}
