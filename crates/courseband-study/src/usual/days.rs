//! Differences of pairs at visits: what the day-as-category model and the day-by-day tests have in common.

use super::beside::DayOutcome;
use super::context::{Context, Gap};
use super::findings::*;
use super::print::*;
use courseband_engine::special::{t_quantile, t_sf};
use courseband_engine::usual::holm;

/// One pair at one visit, on the modelled scale.
#[derive(Clone, Copy, Debug)]
pub(super) struct DayGap {
    pub(super) estimate: f64,
    pub(super) se: f64,
    pub(super) df: f64,
    pub(super) p: f64,
    pub(super) interval: (f64, f64),
}

impl DayGap {
    pub(super) fn new(estimate: f64, se: f64, df: f64, level: f64) -> DayGap {
        let half = t_quantile(0.5 + 0.5 * level, df) * se;
        let p = (2.0 * t_sf((estimate / se).abs(), df)).min(1.0);
        DayGap { estimate, se, df, p, interval: (estimate - half, estimate + half) }
    }

    /// Estimate and limits.
    pub(super) fn said(&self) -> Gap {
        Gap { estimate: self.estimate, lower: self.interval.0, upper: self.interval.1 }
    }
}

/// All pairs at all visits.
pub(super) struct DayGaps {
    times: Vec<f64>,
    /// By pair, then visit; a gap with its p-value adjusted over all of them, or why there is none.
    gaps: Vec<Vec<Result<(DayGap, f64), String>>>,
}

impl DayGaps {
    /// `gaps` by pair, then visit.
    pub(super) fn new(times: Vec<f64>, gaps: Vec<Vec<Result<DayGap, String>>>) -> DayGaps {
        let family: Vec<f64> = gaps.iter().flatten().filter_map(|g| g.as_ref().ok().map(|g| g.p)).collect();
        let mut adjusted = holm(&family).into_iter();
        let mut with_holm = |gap: Result<DayGap, String>| gap.map(|g| (g, adjusted.next().unwrap_or(1.0)));
        let gaps = gaps.into_iter().map(|days| days.into_iter().map(&mut with_holm).collect()).collect();
        DayGaps { times, gaps }
    }

    /// How many comparisons Holm's correction is made for.
    pub(super) fn comparisons(&self) -> usize {
        self.gaps.iter().flatten().filter(|g| g.is_ok()).count()
    }

    pub(super) fn outcomes(&self, context: &Context) -> Vec<Vec<DayOutcome>> {
        let alpha = context.alpha();
        let outcome = |(&time, gap): (&f64, &Result<(DayGap, f64), String>)| {
            let (g, p_holm) = *gap.as_ref().ok()?;
            Some(DayOutcome { time, estimate: g.estimate, se: g.se, apart: p_holm < alpha, apart_alone: g.p < alpha })
        };
        self.gaps.iter().map(|days| self.times.iter().zip(days).filter_map(outcome).collect()).collect()
    }

    /// All numbers. `extra` gives further cells, such as sizes, before the others.
    pub(super) fn table(
        &self,
        context: &Context,
        title: &str,
        extra_heads: &[&str],
        extra: impl Fn(usize, usize) -> Vec<UsualCell>,
    ) -> UsualTable {
        let mut rows = Vec::new();
        let mut missing: Vec<String> = Vec::new();
        for (pair, days) in self.gaps.iter().enumerate() {
            let (from, to) = context.pairs[pair];
            for (visit, gap) in days.iter().enumerate() {
                let when = context.when(self.times[visit]);
                missing.extend(gap.as_ref().err().map(|why| format!("{when}: {why}")));
                let mut cells = extra(pair, visit);
                cells.extend(gap_cells(context, gap));
                rows.push(row(&[context.group(from), context.group(to), &when], cells));
            }
        }
        missing.dedup();
        let more = missing.len().saturating_sub(3);
        missing.truncate(3);
        if more > 0 {
            missing.push(format!("{more} more"));
        }
        let mut all = extra_heads.to_vec();
        all.extend([context.gap_head(), "Lower", "Upper", context.se_head(), "df", "t", "p", "p, Holm"]);
        UsualTable {
            title: title.into(),
            label_heads: heads(&["From", "To", "Visit"]),
            heads: heads(&all),
            rows,
            note: self.note(context, &missing),
        }
    }

    fn note(&self, context: &Context, missing: &[String]) -> String {
        let limits =
            format!("Limits are {} for each difference by itself.", crate::sentences::percent(context.level()));
        if missing.is_empty() { limits } else { format!("{limits} Not compared: {}.", missing.join("; ")) }
    }

    /// Which days are apart and the strongest of them, for up to three pairs.
    pub(super) fn result(&self, context: &Context) -> String {
        let corrected = match self.comparisons() {
            0 => return "No pair could be compared at any visit.".into(),
            1 => String::new(),
            n => format!(" after Holm's correction for {n} comparisons"),
        };
        let mut said = Vec::new();
        let mut quiet = 0;
        for (pair, days) in self.gaps.iter().enumerate() {
            match self.pair_said(context, pair, days, &corrected) {
                Some(sentence) => said.push(sentence),
                None => quiet += 1,
            }
        }
        let more = said.len().saturating_sub(3);
        said.truncate(3);
        if more > 0 {
            said.push(format!(
                "{} apart at some visit: see the table.",
                counted(more, "more pair is", "more pairs are")
            ));
        }
        match (said.is_empty(), quiet) {
            (true, 1) => said.push(format!("The pair is not apart at any visit{corrected}.")),
            (true, _) => said.push(format!("No pair is apart at any visit{corrected}.")),
            (false, 0) => {}
            (false, n) => said.push(format!("{} not apart at any visit.", counted(n, "pair is", "pairs are"))),
        }
        said.join(" ")
    }

    /// Days at which a pair is apart and the clearest of them; none where it is not.
    fn pair_said(
        &self,
        context: &Context,
        pair: usize,
        days: &[Result<(DayGap, f64), String>],
        corrected: &str,
    ) -> Option<String> {
        let apart: Vec<(f64, DayGap, f64)> = (self.times.iter().zip(days))
            .filter_map(|(t, gap)| gap.as_ref().ok().map(|(g, p_holm)| (*t, *g, *p_holm)))
            .filter(|(_, _, p_holm)| *p_holm < context.alpha())
            .collect();
        let size = |g: &DayGap| (g.estimate / g.se).abs();
        let (t, g, p_holm) = apart.iter().max_by(|a, b| size(&a.1).total_cmp(&size(&b.1)))?;
        let times: Vec<f64> = apart.iter().map(|(t, _, _)| *t).collect();
        let (from, to) = context.pairs[pair];
        let (from, to) = (context.group(from), context.group(to));
        Some(format!(
            "{to} and {from} are apart at {}{corrected}; most clearly at {}: {to} {}, t({}) = {}, adjusted {}.",
            super::print::days(context.time_word(), &times),
            context.when(*t),
            context.gap_said(g.said(), from),
            degrees(g.df),
            crate::sentences::number(g.estimate / g.se, 2),
            p_said(*p_holm),
        ))
    }
}

fn gap_cells(context: &Context, gap: &Result<(DayGap, f64), String>) -> Vec<UsualCell> {
    let Ok((g, p_holm)) = gap else {
        return (0..8).map(|_| no_cell()).collect();
    };
    let mut cells = context.gap_cells(g.said(), g.se);
    cells.extend([df_cell(g.df), fixed(g.estimate / g.se, 2), p_cell(g.p), p_cell(*p_holm)]);
    cells
}
