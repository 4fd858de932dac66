//! Tables of the report, as printed.

use super::{ReportTable, effects};
use crate::findings::{Findings, Stretch};
use crate::sentences::{decimals, number, plain};

pub(super) fn tables(findings: &Findings) -> Vec<ReportTable> {
    [curves(findings), gaps(findings), stretches(findings), effect_sizes(findings)]
        .into_iter()
        .filter(|table| !table.rows.is_empty())
        .collect()
}

fn cell(value: Option<f64>, digits: usize) -> String {
    value.map_or_else(|| "\u{2013}".into(), |value| number(value, digits))
}

/// Digits for a column of limits.
fn digits(lower: &[Option<f64>], upper: &[Option<f64>]) -> usize {
    let widths: Vec<f64> = lower.iter().zip(upper).filter_map(|(l, u)| Some((*u)? - (*l)?)).collect();
    let least = widths.iter().copied().filter(|w| *w > 0.0).fold(f64::INFINITY, f64::min);
    decimals(if least.is_finite() { least } else { 1.0 })
}

fn curves(findings: &Findings) -> ReportTable {
    let mut rows = Vec::new();
    for curve in &findings.curves {
        let p = &curve.at_visits;
        let d = digits(&p.response_lower, &p.response_upper);
        let group = findings.groups.iter().find(|g| g.name == curve.group);
        for (k, &time) in p.time.iter().enumerate() {
            let at = findings.visits.iter().position(|v| *v == time);
            let seen = group.zip(at).map_or(0, |(group, at)| group.at_visit[at]);
            let values = [p.response_mean[k], p.response_lower[k], p.response_upper[k]].map(|v| cell(v, d));
            rows.push([curve.group.clone(), plain(time), seen.to_string()].into_iter().chain(values).collect());
        }
    }
    let mean = if findings.scale.ratio { "Geometric mean" } else { "Mean" };
    table(
        "curves",
        format!("{} at the visits, with simultaneous bands", findings.scale.response),
        &["Group", &findings.scale.time_word, "Measured", mean, "Lower", "Upper"],
        rows,
    )
}

fn gaps(findings: &Findings) -> ReportTable {
    let mut rows = Vec::new();
    for d in &findings.differences {
        let p = &d.at_visits;
        let places = digits(&p.response_lower, &p.response_upper);
        for (k, &time) in p.time.iter().enumerate() {
            let values = [p.response_estimate[k], p.response_lower[k], p.response_upper[k]].map(|v| cell(v, places));
            let df = cell(p.df.get(k).copied().flatten(), 1);
            rows.push([d.to.clone(), d.from.clone(), plain(time)].into_iter().chain(values).chain([df]).collect());
        }
    }
    let kind = if findings.scale.ratio { "Ratio" } else { "Difference" };
    table(
        "gaps",
        "Gaps at the visits, with bands over the whole course and all compared pairs".into(),
        &["Group", "Compared with", &findings.scale.time_word, kind, "Lower", "Upper", "df"],
        rows,
    )
}

fn stretches(findings: &Findings) -> ReportTable {
    let span = match (findings.visits.first(), findings.visits.last()) {
        (Some(first), Some(last)) => last - first,
        _ => 1.0,
    };
    let places = decimals(span / 10.0).min(2);
    let mut rows = Vec::new();
    for d in &findings.differences {
        for (kind, list) in
            [("apart", &d.stretches), ("beyond the margin", &d.beyond), ("inside the margin", &d.inside)]
        {
            rows.extend(list.iter().map(|s: &Stretch| {
                let direction = s.direction.map_or("\u{2013}", |direction| match direction {
                    crate::findings::Direction::Above => "above",
                    crate::findings::Direction::Below => "below",
                });
                let start = if s.open_start { "first visit".into() } else { number(s.start, places) };
                let end = if s.open_end { "last visit".into() } else { number(s.end, places) };
                vec![d.to.clone(), d.from.clone(), kind.into(), direction.into(), start, end]
            }));
        }
    }
    table(
        "stretches",
        "Stretches of time, from the bands".into(),
        &["Group", "Compared with", "State", "Direction", "From", "To"],
        rows,
    )
}

fn effect_sizes(findings: &Findings) -> ReportTable {
    let mut rows = Vec::new();
    for (d, e) in findings.differences.iter().zip(&findings.pair_effects) {
        let mut add = |name: String, effect: &crate::findings::Effect| {
            let places = decimals(effect.upper - effect.lower);
            let values = [effect.estimate, effect.lower, effect.upper].map(|v| number(v, places));
            let df = effect.df.map_or_else(|| "\u{2013}".into(), |df| number(df, 1));
            rows.push([d.to.clone(), d.from.clone(), name].into_iter().chain(values).chain([df]).collect());
        };
        if let (Some(time), Some(effect)) = (e.landmark_time, &e.landmark) {
            add(format!("gap at {} {}", findings.scale.time_word, plain(time)), effect);
        }
        e.average.iter().for_each(|effect| add("average gap".into(), effect));
        e.area.iter().for_each(|effect| add("area between courses".into(), effect));
        for (name, p) in [("average gap is zero", e.level_p), ("gap alike at all times", e.shape_p)] {
            if let Some(p) = p {
                let dash = || "\u{2013}".to_string();
                rows.push(vec![d.to.clone(), d.from.clone(), name.into(), effects::chance(p), dash(), dash(), dash()]);
            }
        }
    }
    table(
        "effects",
        "Effect sizes, each with an interval by itself".into(),
        &["Group", "Compared with", "What", "Estimate", "Lower", "Upper", "df"],
        rows,
    )
}

fn table(key: &str, title: String, heads: &[&str], rows: Vec<Vec<String>>) -> ReportTable {
    ReportTable { key: key.into(), title, heads: heads.iter().map(|head| (*head).to_string()).collect(), rows }
}
