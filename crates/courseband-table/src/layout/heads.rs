//! Column heads that are times: `day 7`, `d7`, `7`, `weight_d7`, `2024-03-05`.

use crate::number::Decimal;
use crate::time::{Unit, WrittenTime, read_time};

/// A time in a column head.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct TimeHead {
    /// What is measured, where the head says it: `weight` of `weight_d7`.
    pub(super) stem: String,
    /// The time as written: `d7`.
    pub(super) text: String,
    pub(super) value: f64,
    /// True where a unit, a date or nothing but the number stands there; false for `size_7`.
    pub(super) clear: bool,
    pub(super) unit: Option<Unit>,
}

const SEPARATORS: [char; 5] = ['_', ' ', '.', '-', ':'];

/// Reads a column head as a time.
pub(super) fn read_head(name: &str) -> Option<TimeHead> {
    if name.is_empty()
        || name.len() > 80
        || !name.contains(|c: char| c.is_ascii_digit()) && !name.eq_ignore_ascii_case("baseline")
    {
        return None;
    }
    whole(name).or_else(|| after_stem(name)).or_else(|| before_stem(name))
}

fn head(stem: &str, text: &str, time: WrittenTime) -> Option<TimeHead> {
    let (value, unit) = match time {
        WrittenTime::Number(value) => (value, None),
        WrittenTime::WithUnit(value, unit) | WrittenTime::Dashed(value, unit) => (value, Some(unit)),
        WrittenTime::Date(date) => {
            (date.days(crate::request::DateOrder::DayFirst).unwrap_or(f64::NAN), Some(Unit::Day))
        }
    };
    // `s1` and `y1` are samples and responses more often than seconds and years.
    let letter = text.chars().next().is_some_and(|c| matches!(c, 's' | 'S' | 'y' | 'Y'))
        && text.chars().nth(1).is_some_and(|c| c.is_ascii_digit());
    let clear = stem.is_empty() || unit.is_some();
    (!letter).then(|| TimeHead { stem: stem.to_string(), text: text.to_string(), value, clear, unit })
}

fn whole(name: &str) -> Option<TimeHead> {
    head("", name, read_time(name, Decimal::Point)?)
}

/// `weight_day_7`, `weight d7`, `size.7`, `BW (day 7)`.
fn after_stem(name: &str) -> Option<TimeHead> {
    let name = name.trim_end_matches([')', ']']);
    let cuts = name.char_indices().filter(|(_, c)| SEPARATORS.contains(c) || matches!(c, '(' | '['));
    for (at, _) in cuts {
        let stem = name[..at].trim_matches(|c: char| SEPARATORS.contains(&c) || matches!(c, '(' | '['));
        let text = name[at + 1..].trim_matches([' ', '_']);
        if stem.is_empty() || text.starts_with('.') || !stem.contains(char::is_alphabetic) {
            continue;
        }
        if let Some(time) =
            read_time(text, Decimal::Point).filter(|time| !matches!(time, WrittenTime::Date(_)) || text.len() >= 8)
        {
            return head(stem, text, time);
        }
    }
    // `weight7`, `x7`: letters, then digits.
    let at = name.find(|c: char| c.is_ascii_digit())?;
    let (stem, text) = name.split_at(at);
    let digits = text.bytes().all(|byte| byte.is_ascii_digit());
    match digits && !stem.is_empty() && stem.chars().all(char::is_alphabetic) {
        true => head(stem, text, WrittenTime::Number(text.parse().ok()?)),
        false => None,
    }
}

/// `day7_weight`, `d7 weight`.
fn before_stem(name: &str) -> Option<TimeHead> {
    let cuts = name.char_indices().filter(|(_, c)| SEPARATORS.contains(c));
    for (at, _) in cuts {
        let (text, stem) = (&name[..at], name[at + 1..].trim_matches(SEPARATORS));
        if let Some(time @ (WrittenTime::WithUnit(..) | WrittenTime::Dashed(..))) = read_time(text, Decimal::Point)
            && stem.starts_with(char::is_alphabetic)
        {
            return head(stem, text, time);
        }
    }
    None
}

#[cfg(test)]
mod tests;
