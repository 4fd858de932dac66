//! Effect sizes as sentences of the results.

use crate::findings::{Effect, Findings};
use crate::sentences::{decimals, number, percent, plain};

/// One sentence per compared pair, with its numbers by themselves.
pub(super) fn sentences(findings: &Findings) -> Vec<String> {
    let level = percent(findings.plan.comparisons.level);
    let ratio = findings.scale.ratio;
    let mut all = Vec::new();
    for (difference, effects) in findings.differences.iter().zip(&findings.pair_effects) {
        let mut parts = Vec::new();
        if let (Some(time), Some(effect)) = (effects.landmark_time, &effects.landmark) {
            let text = written(effect, ratio);
            parts.push(format!("at {} {} {text}", findings.scale.time_word, plain(time)));
        }
        if let Some(effect) = &effects.average {
            parts.push(format!("on average over their common follow-up {}", written(effect, ratio)));
        }
        if let Some(effect) = &effects.area {
            parts.push(format!("area between the courses {}", written(effect, false)));
        }
        if parts.is_empty() {
            continue;
        }
        let kind = if ratio { "Ratio" } else { "Difference" };
        let overall = difference
            .p_adjusted
            .map_or(String::new(), |p| format!(" One shared course: {} over all compared pairs.", chance(p)));
        all.push(format!(
            "{kind} of {} to {} ({level} interval of each number by itself): {}.{overall}",
            difference.to,
            difference.from,
            parts.join("; ")
        ));
    }
    all
}

fn written(effect: &Effect, ratio: bool) -> String {
    let digits =
        if ratio { decimals(effect.upper - effect.lower).max(2) } else { decimals(effect.upper - effect.lower) };
    let say = |value: f64| number(value, digits);
    format!("{} ({} to {})", say(effect.estimate), say(effect.lower), say(effect.upper))
}

/// `p = 0.032`, `p < 0.001`.
pub(super) fn chance(p: f64) -> String {
    if p < 0.001 { "p < 0.001".into() } else { format!("p = {}", number(p, if p < 0.1 { 3 } else { 2 })) }
}
