//! Captions and names.

use crate::numbers::plain;
use crate::scale::Kind;
use crate::source::{Gap, Names, Source};
use crate::view::View;

/// `95 %`.
fn percent(level: f64) -> String {
    format!("{}\u{a0}%", plain((level * 1e6).round() / 1e4))
}

/// Said where lines of another model lie over the courses.
pub(crate) const LAID_OVER: &str = "\u{a0}· thin double lines: the other model laid over";

/// What the courses strip shows.
pub(crate) fn courses(
    source: &Source,
    view: &View,
    noun: &str,
    kind: Kind,
    is_ranged: bool,
    is_hatched: bool,
) -> String {
    let mut parts = Vec::new();
    let response = view.value_title.as_ref().unwrap_or(&source.scale.response);
    match (response.is_empty(), kind) {
        (false, Kind::Log) => parts.push(format!("{response}, log scale")),
        (false, Kind::Linear) => parts.push(response.clone()),
        (true, Kind::Log) => parts.push("log scale".into()),
        (true, Kind::Linear) => {}
    }
    let subject = &source.plan.words.subject;
    parts.push(if source.scale.link == "logit" {
        format!("lines: share of a typical {subject}")
    } else if source.scale.ratio {
        format!("lines: typical {subject} (geometric mean)")
    } else {
        "lines: group mean".into()
    });
    if view.bands || source.plan.curves.shape == "by-time" {
        parts.push(band(source));
    }
    if is_ranged {
        parts.push(format!("thin outlines: 10 to 90\u{a0}% of {noun}"));
    }
    if is_hatched {
        parts.push(format!("hatched: under half the {noun} or under 5 left"));
    }
    if !source.differences.is_empty() {
        parts.push("judge gaps below, not by overlap".into());
    }
    parts.join("\u{a0}· ")
}

/// What the bands promise.
fn band(source: &Source) -> String {
    let level = percent(source.plan.comparisons.level);
    let what = if source.plan.curves.shape == "by-time" { "bars" } else { "bands" };
    if source.plan.comparisons.band == "pointwise" {
        format!("{what}: {level}, each {} by itself", source.scale.time_word)
    } else {
        format!("{what}: {level}, whole course")
    }
}

/// What the gap strips show.
pub(crate) fn gaps(source: &Source, pairs: usize) -> String {
    let mut parts = Vec::new();
    let level = percent(source.plan.comparisons.level);
    parts.push(match (source.plan.comparisons.band.as_str(), pairs) {
        ("pointwise", _) => format!("{level} bands, each {} by itself", source.scale.time_word),
        (_, 1) => format!("{level} band over the whole course"),
        (_, 2) => format!("{level} bands over the whole course and both pairs"),
        (_, n) => format!("{level} bands over the whole course and all {n} pairs"),
    });
    if source.plan.comparisons.margin > 0.0 {
        parts.push(format!("dotted: a gap of {}", margin(source)));
    }
    parts.join("\u{a0}· ")
}

/// The margin, as `10 %` or in the response's unit.
pub(crate) fn margin(source: &Source) -> String {
    let margin = plain(source.plan.comparisons.margin);
    if source.plan.comparisons.margin_unit == "percent" { format!("{margin}\u{a0}%") } else { margin }
}

/// What a pair's numbers are.
pub(crate) fn pair(gap: &Gap, scale: &Names, as_percent: bool) -> String {
    let ratio = scale.ratio;
    if scale.link == "logit" {
        return format!("odds of {} / odds of {}", gap.to, gap.from);
    }
    if gap.kind == "trend" {
        let what = if ratio { "Factor" } else { "Change" };
        return format!("{what} per step, {} to {}", gap.from, gap.to);
    }
    match (ratio, as_percent) {
        (true, true) => format!("{} as % of {}", gap.to, gap.from),
        (true, false) => format!("{} / {}", gap.to, gap.from),
        (false, _) => format!("{} \u{2212} {}", gap.to, gap.from),
    }
}

/// What the followed strip shows.
pub(crate) fn followed(source: &Source, noun: &str) -> String {
    format!("{noun} with a visit on or after this {}", source.scale.time_word)
}

/// What the rates strip shows.
pub(crate) fn rates(source: &Source) -> String {
    let word = &source.scale.time_word;
    let what = if source.scale.ratio { format!("factor per {word}") } else { format!("change per {word}") };
    format!("{what}\u{a0}· bands of their own, over all groups")
}
