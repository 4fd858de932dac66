//! An analysis beside the plan's curves: which days each calls apart, and why they differ.

use super::context::Context;
use super::findings::*;
use super::print::days;
use crate::findings::Difference;
use crate::sentences::number;

/// One pair at one visit, on the modelled scale.
#[derive(Clone, Copy)]
pub(super) struct DayOutcome {
    pub(super) time: f64,
    pub(super) estimate: f64,
    pub(super) se: f64,
    /// Called apart by the analysis, all its corrections made.
    pub(super) apart: bool,
    /// Apart by its own p-value, before any correction for several tests.
    pub(super) apart_alone: bool,
}

/// How an analysis comes to its days.
#[derive(Clone, Copy, PartialEq)]
pub(super) enum Manner {
    /// Each day by its own means, corrected over so many comparisons.
    OwnMeans(usize),
    /// Lines through all days.
    Lines,
}

/// All pairs with day-by-day outcomes, in the order of the pairs.
pub(super) fn compare(context: &Context, outcomes: &[Vec<DayOutcome>], manner: Manner) -> Beside {
    if context.pairs.is_empty() {
        return nothing("There is one group, so no days are compared.");
    }
    let Some(pairs) = (0..outcomes.len())
        .map(|pair| Some(compare_pair(context, pair, context.curves(pair)?, &outcomes[pair], manner)))
        .collect::<Option<Vec<PairBeside>>>()
    else {
        return nothing("The curves could not be fitted, so there is nothing to compare with.");
    };
    let differ: Vec<&PairBeside> = pairs.iter().filter(|p| differs(p)).collect();
    let sentence = match differ.as_slice() {
        [] if pairs.iter().all(|p| p.days.is_empty()) => "Neither it nor the curves call any visit apart.".to_string(),
        [] => "It calls the same visits apart as the curves.".to_string(),
        some => {
            let said: Vec<&str> = some.iter().take(3).map(|p| p.sentence.as_str()).collect();
            let more = some.len().saturating_sub(3);
            let rest = if more > 0 { format!(" {more} more pairs differ.") } else { String::new() };
            format!("{}{rest}", said.join(" "))
        }
    };
    Beside { agrees: Some(differ.is_empty()), sentence, pairs }
}

pub(super) fn nothing(why: &str) -> Beside {
    Beside { agrees: None, sentence: why.into(), pairs: Vec::new() }
}

fn differs(pair: &PairBeside) -> bool {
    !(pair.only_here.is_empty() && pair.only_curves.is_empty())
}

/// Whether the curves are shown apart at a time.
pub(super) fn curves_apart_at(difference: &Difference, t: f64) -> bool {
    let room = 1e-9 * (1.0 + t.abs());
    difference.stretches.iter().any(|s| t >= s.start - room && t <= s.end + room)
}

fn compare_pair(
    context: &Context,
    pair: usize,
    difference: &Difference,
    outcomes: &[DayOutcome],
    manner: Manner,
) -> PairBeside {
    let only = |here: bool| -> Vec<DayOutcome> {
        let differs = |o: &&DayOutcome| o.apart == here && curves_apart_at(difference, o.time) != here;
        outcomes.iter().filter(differs).copied().collect()
    };
    let (only_here, only_curves) = (only(true), only(false));
    let times = |all: &[DayOutcome]| all.iter().map(|o| o.time).collect::<Vec<f64>>();
    let days_here: Vec<f64> = outcomes.iter().filter(|o| o.apart).map(|o| o.time).collect();
    let (from, to) = context.pairs[pair];
    let names = format!("{} and {}", context.group(to), context.group(from));
    let word = context.time_word();
    let mut said = Vec::new();
    if !only_curves.is_empty() {
        let why = reason(difference, &only_curves, manner, false);
        said.push(format!(
            "{names} are apart on the curves but not here at {}: {why}.",
            days(word, &times(&only_curves))
        ));
    }
    if !only_here.is_empty() {
        let why = reason(difference, &only_here, manner, true);
        said.push(format!(
            "{names} are apart here but not on the curves at {}: {why}.",
            days(word, &times(&only_here))
        ));
    }
    let sentence = match (said.is_empty(), days_here.is_empty()) {
        (false, _) => said.join(" "),
        (true, true) => format!("Neither shows {names} apart at any visit."),
        (true, false) => format!("{names} are apart at {}, here and on the curves.", days(word, &days_here)),
    };
    PairBeside { pair, days: days_here, only_here: times(&only_here), only_curves: times(&only_curves), sentence }
}

/// Estimate and standard error of the curves at a visit.
fn curve_at(difference: &Difference, t: f64) -> Option<(f64, f64)> {
    let points = &difference.at_visits;
    let k = points.time.iter().position(|&x| x == t)?;
    Some((points.estimate[k]?, points.se[k]?))
}

/// Why both differ on these days: what is seen in most of them.
fn reason(difference: &Difference, on: &[DayOutcome], manner: Manner, here: bool) -> String {
    if let Manner::OwnMeans(comparisons) = manner
        && !here
        && 2 * on.iter().filter(|o| o.apart_alone).count() > on.len()
    {
        return format!(
            "by themselves these days differ, but not after Holm's correction for {comparisons} comparisons"
        );
    }
    // By day: standard error here over the curves', and how much further apart the groups are here, in the curves' SE.
    let against = |o: &DayOutcome| {
        let (estimate, se) = curve_at(difference, o.time).filter(|c| c.1 > 0.0)?;
        Some((o.se / se, (o.estimate * estimate.signum() - estimate.abs()) / se))
    };
    let (mut wider, mut further): (Vec<f64>, Vec<f64>) = on.iter().filter_map(against).unzip();
    if wider.is_empty() {
        return "the curves have no value of their own there".into();
    }
    let middle = |values: &mut Vec<f64>| {
        values.sort_by(f64::total_cmp);
        values[values.len() / 2]
    };
    let (wider, further) = (middle(&mut wider), middle(&mut further));
    let ratio = number(wider, 2);
    match (manner, here) {
        (Manner::OwnMeans(_), false) if wider > 1.1 => format!(
            "each day stands by itself here, so its standard error is {ratio} times the curves', which draw on the days around"
        ),
        (Manner::OwnMeans(_), false) if further < -0.3 => {
            "the day's own means lie closer together than the smooth courses".into()
        }
        (Manner::OwnMeans(_), true) if further > 0.3 => {
            "the day's own means lie further apart than the smooth courses".into()
        }
        (Manner::OwnMeans(_), true) if wider < 0.9 => {
            format!("its standard error is {ratio} times the curves': each model has its own account of the spread")
        }
        (Manner::Lines, false) if further < -0.3 => "the lines cannot bend, and lie closer together there".into(),
        (Manner::Lines, true) if further > 0.3 => "the lines cannot bend, and lie further apart there".into(),
        (Manner::Lines, true) if wider < 0.9 => {
            format!("assuming straight lines makes the standard error {ratio} times the curves'")
        }
        (Manner::Lines, false) if wider > 1.1 => format!("the lines' standard error is {ratio} times the curves'"),
        _ => "the two are close there, on either side of the limit".into(),
    }
}

/// One sentence where an analysis tests a question as a whole: `here` and `curves` hold a p-value for it.
pub(super) fn compare_tests(alpha: f64, question: &str, here: f64, curves: f64) -> (bool, String) {
    let said = |p: f64| format!("{} ({})", if p < alpha { "shown" } else { "not shown" }, super::print::p_said(p));
    let agree = (here < alpha) == (curves < alpha);
    (agree, format!("{question}: {} here, {} by the curves", said(here), said(curves)))
}
