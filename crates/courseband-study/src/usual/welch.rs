//! Day by day: Welch's test of each pair at each visit, Holm over all of them.

use super::beside::{Manner, compare};
use super::by_visit::ByVisit;
use super::context::Context;
use super::days::{DayGap, DayGaps};
use super::findings::*;
use super::print::*;
use courseband_engine::usual::{Variances, tests_by_time};

const KIND: UsualKind = UsualKind::DayByDay;
const NAME: &str = "Day-by-day Welch tests";

fn assumption(context: &Context) -> String {
    format!(
        "Each day by itself, as if nothing were known of the others; {} still measured then stand for all; values about \
         normal in each group{}.",
        context.plan.words.subjects,
        if context.is_log() { " on the log scale" } else { "" }
    )
}

pub(super) fn analyse(context: &Context, by_visit: Result<&ByVisit, &String>) -> UsualAnalysis {
    let by_visit = match by_visit {
        Ok(by_visit) => by_visit,
        Err(why) => return context.refused(KIND, NAME, assumption(context), why.clone()),
    };
    if context.pairs.is_empty() {
        return context.refused(KIND, NAME, assumption(context), "There is one group, so nothing is compared.".into());
    }
    let panel = &by_visit.panel;
    let mut all: Vec<Vec<Result<DayGap, String>>> = vec![Vec::new(); context.pairs.len()];
    for (k, test) in tests_by_time(panel, &context.pairs, Variances::Unequal, context.level()).iter().enumerate() {
        let gap = test.comparison.map(|c| DayGap {
            estimate: c.difference,
            se: c.se,
            df: c.df,
            p: c.p,
            interval: c.interval,
        });
        all[k / panel.times.len()].push(gap.map_err(|reason| super::anova::why(context, reason)));
    }
    let gaps = DayGaps::new(panel.times.clone(), all);
    let sizes = |pair: usize, visit: usize| {
        let (from, to) = context.pairs[pair];
        let count = |g: usize| panel.values_at(g, visit).len();
        vec![cell(count(from) as f64, count(from).to_string()), cell(count(to) as f64, count(to).to_string())]
    };
    let of_subject: Vec<usize> = (0..panel.values.len()).map(|subject| by_visit.rows_of(subject)).collect();
    let subjects = of_subject.iter().filter(|n| **n > 0).count();
    UsualAnalysis {
        kind: KIND,
        name: NAME.into(),
        done: gaps.comparisons() > 0,
        result: gaps.result(context),
        tables: vec![gaps.table(context, "Welch tests by visit", &["n, from", "n, to"], sizes)],
        assumption: assumption(context),
        bearing: bearing(context, by_visit),
        beside: compare(context, &gaps.outcomes(context), Manner::OwnMeans(gaps.comparisons())),
        used: context.used(subjects, of_subject.iter().sum()),
        lines: Vec::new(),
    }
}

fn bearing(context: &Context, by_visit: &ByVisit) -> Bearing {
    let panel = &by_visit.panel;
    let visits = panel.times.len();
    let cells = (0..panel.groups).flat_map(|g| (0..visits).map(move |v| (g, v)));
    let (fewest, g, v) = cells.map(|(g, v)| (panel.values_at(g, v).len(), g, v)).min().unwrap_or((0, 0, 0));
    let whole = panel.values.len() * visits;
    let missing = panel.values.iter().flatten().filter(|y| y.is_none()).count();
    let doubtful = fewest < 5 || 20 * missing > whole;
    let missed = match missing {
        0 => "No values are missing.".to_string(),
        _ => format!(
            "{} of all values by {} and visit are missing; days after someone has left compare only those who stayed.",
            share(missing, whole),
            context.plan.words.subject
        ),
    };
    let lead = if doubtful { "Thin or incomplete data: read with care." } else { "Enough values on every day." };
    Bearing {
        verdict: if doubtful { Borne::Doubtful } else { Borne::Yes },
        sentence: format!(
            "{lead} Fewest values: {fewest} in {} at {}. {missed}",
            context.group(g),
            context.when(panel.times[v])
        ),
        numbers: vec![
            named("Fewest values of a group at a visit", cell(fewest as f64, fewest.to_string())),
            named("Share of values missing", cell(missing as f64 / whole as f64, share(missing, whole))),
        ],
    }
}
