//! Sentences on factors, differences of differences, trends, and on what is not worse.

use super::{Speaker, decimals, joined, number, percent};
use crate::comparison::ComparisonKind;
use crate::findings::{DifferencePoints, Direction, Sentence, Stretch};

impl Speaker<'_> {
    /// The sentence of a comparison that is no plain pair; `None` for a pair.
    pub(super) fn combined(&self) -> Option<Sentence> {
        let d = self.difference;
        let shown = !d.stretches.is_empty();
        let side = d.stretches.iter().max_by(|a, b| (a.end - a.start).total_cmp(&(b.end - b.start)));
        let above = side.and_then(|s| s.direction) == Some(Direction::Above);
        let both_ways = d.stretches.windows(2).any(|w| w[0].direction != w[1].direction);
        let headline = match (d.kind, shown) {
            (ComparisonKind::Pair, _) => return None,
            (ComparisonKind::Factor, true) if both_ways => {
                format!("{} crosses {}, averaged over the other factor.", d.to, d.from)
            }
            (ComparisonKind::Factor, true) => {
                format!(
                    "{} runs {} {}, averaged over the other factor.",
                    d.to,
                    if above { "above" } else { "below" },
                    d.from
                )
            }
            (ComparisonKind::Factor, false) => {
                format!("{} and {} are not shown apart, averaged over the other factor.", d.to, d.from)
            }
            (ComparisonKind::Interaction, true) => {
                format!("{} differs from {}.", d.to, d.from)
            }
            (ComparisonKind::Interaction, false) => {
                format!("{} is not shown to differ from {}.", d.to, d.from)
            }
            (ComparisonKind::Trend, true) if both_ways => {
                "The response changes with the order of the groups, both ways.".into()
            }
            (ComparisonKind::Trend, true) => {
                format!("The response {} with the order of the groups.", if above { "rises" } else { "falls" })
            }
            (ComparisonKind::Trend, false) => "No trend over the order of the groups is shown.".into(),
        };
        let Some(support) = d.support else {
            return Some(self.over_all("none-apart", headline, "They were never followed at the same time.".into()));
        };
        let mut text = Vec::new();
        let landmark = side.and_then(|s| s.direction).and_then(|side| self.landmark(side)).unwrap_or(support[1]);
        text.extend(self.size_at(landmark));
        if shown {
            text.push(self.days());
        }
        text.extend(self.rest());
        let kind = if shown { "gap" } else { "undecided" };
        Some(self.over_all(kind, headline, text.join(" ")))
    }

    fn over_all(&self, kind: &str, headline: String, text: String) -> Sentence {
        let f = self.findings;
        let depends = format!("{} {}, {} measurements", f.subjects, f.plan.words.subjects, f.rows);
        Sentence { kind: kind.into(), pair: Some(self.index), headline, text, depends }
    }

    /// Size of a combined difference at a time.
    fn size_at(&self, t: f64) -> Option<String> {
        let d = self.difference;
        let at = |points: &DifferencePoints| {
            let k = points.time.iter().position(|&x| x == t)?;
            Some((points.response_estimate[k]?, points.response_lower[k]?, points.response_upper[k]?))
        };
        let (estimate, lower, upper) = at(&d.at_visits).or_else(|| at(&d.grid))?;
        let rest = if self.findings.scale.ratio { 1.0 } else { 0.0 };
        let least = decimals(upper - lower) + usize::from(self.findings.scale.ratio);
        let at_rest =
            |digits: usize| [lower, upper].iter().any(|x| *x != rest && number(*x, digits) == number(rest, digits));
        // A limit that excludes no difference is not printed as none.
        let digits = (least..least + 4).find(|&digits| !at_rest(digits)).unwrap_or(least);
        let [e, l, u] = [estimate, lower, upper].map(|value| number(value, digits));
        let what = match (d.kind, self.findings.scale.ratio) {
            (ComparisonKind::Trend, false) => "the change per step is",
            (ComparisonKind::Trend, true) => "each step multiplies it by",
            (ComparisonKind::Interaction, false) => "the difference of the differences is",
            (ComparisonKind::Interaction, true) => "the ratio of the ratios is",
            (_, false) => "the difference is",
            (_, true) => "the ratio is",
        };
        Some(format!("At {} {what} {e} ({l} to {u}).", self.when(t)))
    }

    /// Where `to` is shown not to be worse by more than the margin; `None` where that is not asked.
    pub(super) fn not_worse(&self) -> Option<String> {
        let d = self.difference;
        self.findings.plan.comparisons.not_worse.filter(|_| d.margin[1] > 0.0)?;
        let level = percent(0.5 + 0.5 * self.findings.plan.comparisons.level);
        let whole = |s: &Stretch| s.open_start && s.open_end;
        Some(if d.not_worse.iter().any(whole) {
            format!(
                "Over {} {} is not worse than {} by more than {} (one-sided, {level}).",
                self.whole(),
                d.to,
                d.from,
                self.margin()
            )
        } else if d.not_worse.is_empty() {
            format!("Nowhere is it shown that {} is not worse than {} by more than {}.", d.to, d.from, self.margin())
        } else {
            let spans: Vec<String> = d.not_worse.iter().map(|s| self.span(s)).collect();
            format!(
                "{} is not worse than {} by more than {} {} (one-sided, {level}); elsewhere that is not shown.",
                d.to,
                d.from,
                self.margin(),
                joined(&spans)
            )
        })
    }
}
