//! Findings as plain sentences. They claim only what was compared, and every number has its unit.

use crate::findings::*;
use crate::plan::MarginUnit;

mod combined;

/// Sentences of one analysis, most important first.
pub(crate) fn write(findings: &Findings) -> Vec<Sentence> {
    if findings.fit.status == FitStatus::Failed {
        return Vec::new();
    }
    let mut told: Vec<(usize, Sentence)> = Vec::new();
    let mut quiet = Vec::new();
    for (index, difference) in findings.differences.iter().enumerate() {
        let speaker = Speaker { findings, difference, index };
        if let Some(sentence) = speaker.combined() {
            let list = if difference.stretches.is_empty() { &mut quiet } else { &mut told };
            list.push((index, sentence));
        } else if difference.stretches.is_empty() {
            quiet.push((index, speaker.undecided()));
        } else {
            told.push((index, speaker.apart()));
        }
    }
    let strength = |index: usize| strongest(&findings.differences[index]);
    told.sort_by(|a, b| strength(b.0).total_cmp(&strength(a.0)).then(a.0.cmp(&b.0)));
    let mut sentences: Vec<Sentence> = told.into_iter().chain(quiet).map(|(_, s)| s).collect();
    sentences.extend(few_left(findings));
    sentences
}

/// Largest |estimate| / SE at a visit.
fn strongest(difference: &Difference) -> f64 {
    let points = &difference.at_visits;
    (points.estimate.iter().zip(&points.se))
        .filter_map(|(e, s)| Some(e.as_ref()?.abs() / s.as_ref().filter(|s| **s > 0.0)?))
        .fold(0.0, f64::max)
}

struct Speaker<'a> {
    findings: &'a Findings,
    difference: &'a Difference,
    index: usize,
}

impl Speaker<'_> {
    fn apart(&self) -> Sentence {
        let d = self.difference;
        let directions: Vec<Direction> = d.stretches.iter().filter_map(|s| s.direction).collect();
        let one_way = directions.windows(2).all(|w| w[0] == w[1]);
        let runs = match (one_way, directions.first()) {
            (true, Some(Direction::Above)) => "runs above",
            (true, Some(Direction::Below)) => "runs below",
            _ => "crosses",
        };
        let mut landmarks: Vec<f64> =
            [Direction::Above, Direction::Below].into_iter().filter_map(|side| self.landmark(side)).collect();
        landmarks.sort_by(f64::total_cmp);
        let mut text: Vec<String> = landmarks.into_iter().filter_map(|t| self.reading_at(t)).collect();
        text.push(self.days());
        text.extend(self.onset());
        text.extend(self.not_worse());
        if let Some(rest) = self.rest() {
            text.push(rest);
        }
        self.sentence("gap", format!("{} {runs} {}.", d.to, d.from), text.join(" "))
    }

    fn undecided(&self) -> Sentence {
        let d = self.difference;
        let Some(support) = d.support else {
            let text = "They were never followed at the same time.".to_string();
            return self.sentence("none-apart", format!("{} and {} cannot be compared.", d.to, d.from), text);
        };
        if d.at_visits.se.iter().all(Option::is_none) {
            let word = &self.findings.plan.words.subject;
            if let (Some(_), Some(column)) = (&self.findings.clusters, &self.findings.columns.cluster)
                && self.findings.subjects > self.findings.groups.len()
            {
                let text = format!(
                    "A group with one {column} only cannot be told from its {column}: what sets it apart may be the {column}."
                );
                return self.sentence("none-apart", format!("{} and {} cannot be compared.", d.to, d.from), text);
            }
            let text = format!(
                "There are too few {} to show how they differ, so a gap between the groups cannot be told from a gap \
                 between one {word} and another.",
                self.findings.plan.words.subjects
            );
            return self.sentence("none-apart", format!("{} and {} cannot be compared.", d.to, d.from), text);
        }
        let mut text = Vec::new();
        let whole = |s: &Stretch| s.open_start && s.open_end;
        let headline = if d.inside.iter().any(whole) {
            text.push(format!("Over {} the band lies inside \u{b1}{}.", self.whole(), self.margin()));
            format!("{} stays with {}.", d.to, d.from)
        } else {
            format!("{} and {} are not shown apart.", d.to, d.from)
        };
        text.extend(self.reading_at(support[1]));
        text.extend(self.not_worse());
        if let Some(rest) = self.rest() {
            text.push(rest);
        }
        self.sentence(if d.inside.is_empty() { "undecided" } else { "inside" }, headline, text.join(" "))
    }

    fn sentence(&self, kind: &str, headline: String, text: String) -> Sentence {
        let f = self.findings;
        let (one, many) = (&f.plan.words.subject, &f.plan.words.subjects);
        let used: Vec<&GroupInfo> =
            f.groups.iter().filter(|g| g.name == self.difference.from || g.name == self.difference.to).collect();
        let count: usize = used.iter().map(|g| g.subjects).sum();
        let rows: usize = used.iter().map(|g| g.rows).sum();
        let depends = format!("{count} {}, {rows} measurements", if count == 1 { one } else { many });
        Sentence { kind: kind.into(), pair: Some(self.index), headline, text, depends }
    }

    /// The last visit inside the longest stretch on this side.
    fn landmark(&self, side: Direction) -> Option<f64> {
        let d = self.difference;
        let own = d.stretches.iter().filter(|s| s.direction == Some(side));
        let longest = own.max_by(|a, b| (a.end - a.start).total_cmp(&(b.end - b.start)))?;
        let mut visits = d.at_visits.time.iter().copied().filter(|&t| t >= longest.start && t <= longest.end);
        Some(visits.next_back().unwrap_or(0.5 * (longest.start + longest.end)))
    }

    /// Value and interval at a time.
    fn reading_at(&self, t: f64) -> Option<String> {
        let d = self.difference;
        let at = |points: &DifferencePoints| {
            let k = points.time.iter().position(|&x| x == t)?;
            Some((points.response_estimate[k]?, points.response_lower[k]?, points.response_upper[k]?))
        };
        let (estimate, lower, upper) = at(&d.at_visits).or_else(|| at(&d.grid))?;
        let when = self.when(t);
        Some(if self.findings.scale.link == "logit" {
            let digits = decimals(upper - lower) + 1;
            let [e, l, u] = [estimate, lower, upper].map(|x| number(x, digits));
            format!(
                "At {when} the odds in {} are {e} times those in {} ({l} to {u}).{}",
                d.to,
                d.from,
                self.in_points(t)
            )
        } else if self.findings.scale.ratio {
            let [e, l, u] = shares(estimate, lower, upper);
            format!("At {when} {} is {e} of {} ({l} to {u}).", d.to, d.from)
        } else {
            let least = decimals(upper - lower);
            // A limit that excludes zero is not printed as zero.
            let zero = |digits: &usize| [lower, upper].iter().any(|x| number(*x, *digits) == number(0.0, *digits));
            let digits = (least..least + 4).find(|digits| !zero(digits)).unwrap_or(least);
            let word = if estimate >= 0.0 { "above" } else { "below" };
            format!(
                "At {when} {} is {} {word} {} (difference {} to {}).",
                d.to,
                number(estimate.abs(), digits),
                d.from,
                number(lower, digits),
                number(upper, digits)
            )
        })
    }

    /// The two shares behind a ratio of odds, in percent.
    fn in_points(&self, t: f64) -> String {
        let at = |name: &str| {
            let curve = self.findings.curves.iter().find(|c| c.group == name)?;
            let points = &curve.at_visits;
            points.response_mean[points.time.iter().position(|&x| x == t)?]
        };
        match (at(&self.difference.to), at(&self.difference.from)) {
            (Some(to), Some(from)) => {
                let points = number(100.0 * (to - from), 0);
                let [to, from] = [to, from].map(|share| number(100.0 * share, 0));
                format!(" That is {to} % against {from} %, {points} percentage points.")
            }
            _ => String::new(),
        }
    }

    /// When the band excludes zero and the margin.
    fn days(&self) -> String {
        let d = self.difference;
        let both_ways = d.stretches.windows(2).any(|w| w[0].direction != w[1].direction);
        let list = |runs: &[Stretch]| {
            let spans: Vec<String> = (runs.iter())
                .map(|s| match s.direction {
                    Some(Direction::Above) if both_ways => format!("{} (above)", self.span(s)),
                    Some(Direction::Below) if both_ways => format!("{} (below)", self.span(s)),
                    _ => self.span(s),
                })
                .collect();
            joined(&spans)
        };
        let mut parts = vec![format!("shown apart {}", list(&d.stretches))];
        if !d.beyond.is_empty() {
            parts.push(format!("shown beyond {} {}", self.margin(), list(&d.beyond)));
        }
        let many = &self.findings.plan.words.subjects;
        let text = parts.join(", and ");
        let text = capital(&text);
        let times = |s: &Stretch| usize::from(!s.open_start) + usize::from(!s.open_end);
        let tail = match d.stretches.iter().chain(&d.beyond).map(times).sum::<usize>() {
            0 => return format!("{text}."),
            1 => "this time depends",
            _ => "these times depend",
        };
        format!("{text}; {tail} on the number of {many}.")
    }

    /// The day the gap passes the margin for good: a property of the curve, with its interval.
    fn onset(&self) -> Option<String> {
        let effects = self.findings.pair_effects.get(self.index)?;
        let onset = effects.onset.as_ref()?;
        let word = &self.findings.scale.time_word;
        let value = onset.estimate?;
        let low = match (onset.lower, onset.at_or_before_start) {
            (Some(_), true) => "the first visit or before".to_string(),
            (Some(t), false) => self.bare(t),
            (None, _) => return None,
        };
        let high = onset.upper.map_or("not reached by the last visit".to_string(), |t| self.bare(t));
        let around = self.around(onset.lower?, onset.upper);
        let visits = &self.findings.visits;
        let follow_up = visits[visits.len() - 1] - visits[0];
        let width = onset.upper.unwrap_or(visits[visits.len() - 1]) - onset.lower?;
        let margin = self.margin();
        Some(if width > 0.25 * follow_up {
            format!(
                "The {word} the gap passes {margin} for good is uncertain, {low} to {high}{around}; best estimate {}.",
                self.bare(value)
            )
        } else {
            format!(
                "Best estimate of the {word} the gap passes {margin} for good: {} ({low} to {high}{around}).",
                self.bare(value)
            )
        })
    }

    /// The visits around an uncertain span, where few enough to be named.
    fn around(&self, low: f64, high: Option<f64>) -> String {
        let visits = &self.difference.at_visits.time;
        let high = high.unwrap_or(f64::INFINITY);
        let first = visits.partition_point(|&t| t <= low).saturating_sub(1);
        let last = visits.partition_point(|&t| t < high).min(visits.len().saturating_sub(1));
        let named: Vec<String> = visits.get(first..=last).unwrap_or(&[]).iter().map(|&t| plain(t)).collect();
        if named.is_empty() || named.len() > 5 {
            return String::new();
        }
        format!("; visits at {}", named.join(", "))
    }

    fn bare(&self, t: f64) -> String {
        let visits = &self.findings.visits;
        number(t, decimals((visits[visits.len() - 1] - visits[0]) / 5.0))
    }

    fn span(&self, s: &Stretch) -> String {
        match (s.open_start, s.open_end) {
            (true, true) => format!("over {}", self.whole()),
            (true, false) => format!("up to {}", self.edge(s.end)),
            (false, true) if self.ends_early() => {
                format!("from {} to {}, the last visit of both", self.edge(s.start), self.edge(s.end))
            }
            (false, true) => format!("from {} to the last visit", self.edge(s.start)),
            (false, false) => format!("from {} to {}", self.edge(s.start), self.edge(s.end)),
        }
    }

    /// True where one of the pair is not followed to the end of the table.
    fn ends_early(&self) -> bool {
        let last = self.findings.visits.last().copied();
        self.difference.support.is_some_and(|[_, high]| Some(high) != last)
    }

    /// The whole time that both were followed.
    fn whole(&self) -> String {
        match self.difference.support {
            Some([low, high]) if self.ends_early() || Some(&low) != self.findings.visits.first() => {
                format!("the time that both were followed, {} to {}", self.edge(low), self.bare(high))
            }
            _ => "the whole course".into(),
        }
    }

    /// What is neither apart nor inside the margin.
    fn rest(&self) -> Option<String> {
        let d = self.difference;
        let support = d.support?;
        let covered = covered(d.stretches.iter().chain(&d.inside));
        if covered >= 0.999 * (support[1] - support[0]) && support[1] > support[0] {
            return None;
        }
        let lead = if d.stretches.is_empty() && d.inside.is_empty() { "Undecided" } else { "Elsewhere undecided" };
        Some(if d.margin[1] > 0.0 {
            format!("{lead}: the data neither show nor rule out a gap over {}.", self.margin())
        } else {
            format!("{lead}: the data neither show a gap nor rule one out.")
        })
    }

    fn margin(&self) -> String {
        let c = &self.findings.plan.comparisons;
        match c.margin_unit {
            MarginUnit::Percent => format!("{} %", plain(c.margin)),
            MarginUnit::Response => plain(c.margin),
        }
    }

    /// A visit.
    fn when(&self, t: f64) -> String {
        format!("{} {}", self.findings.scale.time_word, plain(t))
    }

    /// A time on the continuous curve, rounded to a hundredth of the follow-up.
    fn edge(&self, t: f64) -> String {
        format!("{} {}", self.findings.scale.time_word, self.bare(t))
    }
}

/// A sentence where few are measured at the end, or a group ended earlier.
fn few_left(findings: &Findings) -> Option<Sentence> {
    let (first, last) = (*findings.visits.first()?, *findings.visits.last()?);
    // Where everybody's days differ, the end is the last twentieth of the follow-up.
    let end = last - 0.05 * (last - first);
    let (words, time) = (&findings.plan.words, &findings.scale.time_word);
    let (mut thin, mut over) = (Vec::new(), Vec::new());
    for group in &findings.groups {
        let left = group.last_times.iter().filter(|&&t| t >= end).count();
        let few = 2 * left < group.subjects || left < 5;
        match (left, group.last_times.last()) {
            (0, Some(&t)) => over.push(format!("{} is not measured after {time} {}", group.name, plain(t))),
            _ if few && left < group.subjects => thin.push(format!("{left} of {} in {}", group.subjects, group.name)),
            _ => {}
        }
    }
    let mut parts = Vec::new();
    if !thin.is_empty() {
        let from = plain(findings.visits.iter().copied().find(|&t| t >= end).unwrap_or(last));
        let many = joined(&thin);
        parts.push(format!("From {time} {from} on only {many} are measured: the end of the courses rests on them."));
    }
    if !over.is_empty() {
        parts.push(format!("{}.", joined(&over)));
    }
    let headline = if thin.is_empty() {
        "Follow-up differs between the groups.".to_string()
    } else {
        format!("Few {} are measured at the end.", words.subjects)
    };
    (!parts.is_empty()).then(|| Sentence {
        kind: "followed".into(),
        pair: None,
        headline,
        text: parts.join(" "),
        depends: format!("{} {}, {} measurements", findings.subjects, words.subjects, findings.rows),
    })
}

/// `a`, `a and b`, `a, b and c`.
pub(crate) fn joined(parts: &[String]) -> String {
    match parts {
        [] => String::new(),
        [one] => one.clone(),
        [first @ .., last] => format!("{} and {last}", first.join(", ")),
    }
}

/// First letter in upper case.
pub(crate) fn capital(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// `95 %`, `99.9 %`.
pub(crate) fn percent(level: f64) -> String {
    format!("{} %", plain((level * 1e6).round() / 1e4))
}

/// A ratio and its limits as percent with one precision; a limit that excludes 100 percent is not printed as that.
fn shares(estimate: f64, lower: f64, upper: f64) -> [String; 3] {
    let least = decimals(100.0 * (upper - lower)).min(2);
    let one =
        |digits: usize| [lower, upper].iter().any(|x| *x != 1.0 && number(100.0 * x, digits) == number(100.0, digits));
    let digits = (least..least + 4).find(|&digits| !one(digits)).unwrap_or(least);
    [estimate, lower, upper].map(|ratio| format!("{} %", number(100.0 * ratio, digits)))
}

/// Length of time that runs cover together; they may overlap.
fn covered<'a>(runs: impl Iterator<Item = &'a Stretch>) -> f64 {
    let mut all: Vec<(f64, f64)> = runs.map(|s| (s.start, s.end)).collect();
    all.sort_by(|a, b| a.0.total_cmp(&b.0));
    let (mut sum, mut reached) = (0.0, f64::NEG_INFINITY);
    for (start, end) in all {
        sum += (end - start.max(reached)).max(0.0);
        reached = reached.max(end);
    }
    sum
}

/// Decimals that give a quantity of this width two or three digits.
pub(crate) fn decimals(width: f64) -> usize {
    if !(width > 0.0) || !width.is_finite() {
        return 2;
    }
    let exponent = libm::floor(libm::log10(width));
    (1.0 - exponent).clamp(0.0, 12.0) as usize
}

/// A number with a true minus sign.
pub(crate) fn number(value: f64, digits: usize) -> String {
    let text = format!("{value:.digits$}");
    let zero = text.trim_start_matches('-').chars().all(|c| c == '0' || c == '.');
    match text.strip_prefix('-') {
        Some(rest) if zero => rest.to_string(),
        Some(rest) => format!("\u{2212}{rest}"),
        None => text,
    }
}

/// A number as short as it was given.
pub(crate) fn plain(value: f64) -> String {
    let rounded = (value * 1e6).round() / 1e6;
    let text = format!("{rounded}");
    text.strip_prefix('-').map_or(text.clone(), |rest| format!("\u{2212}{rest}"))
}
