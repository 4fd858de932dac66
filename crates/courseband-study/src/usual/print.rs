//! Numbers as printed: p-values as SAMPL asks (Lang & Altman 2013, Basic Statistical Reporting for Articles Published in
//! Biomedical Journals: two or three digits, "< 0.001" below that; from memory), estimates by their standard errors.

use super::findings::{NamedNumber, UsualCell, UsualRow};
use crate::sentences::{decimals, number, plain};

/// `0.23`, `0.034`, `< 0.001`, `> 0.99`.
pub(super) fn p_value(p: f64) -> String {
    if p < 0.001 {
        "< 0.001".into()
    } else if p > 0.99 {
        "> 0.99".into()
    } else if p < 0.0995 {
        format!("{p:.3}")
    } else {
        format!("{p:.2}")
    }
}

/// `p = 0.034`, `p < 0.001`.
pub(super) fn p_said(p: f64) -> String {
    let text = p_value(p);
    if text.starts_with(['<', '>']) { format!("p {text}") } else { format!("p = {text}") }
}

/// Degrees of freedom: whole, or with one decimal.
pub(super) fn degrees(df: f64) -> String {
    if !df.is_finite() {
        return "infinite".into();
    }
    if (df - df.round()).abs() < 1e-3 || df >= 1000.0 { format!("{:.0}", df.round()) } else { format!("{df:.1}") }
}

/// `F(2, 24) = 3.10, p = 0.063`.
pub(super) fn f_said(f: f64, df: f64, df_error: f64, p: f64) -> String {
    format!("F({}, {}) = {}, {}", degrees(df), degrees(df_error), number(f, 2), p_said(p))
}

/// `t(22.1) = -2.40, p = 0.025`.
pub(super) fn t_said(t: f64, df: f64, p: f64) -> String {
    format!("t({}) = {}, {}", degrees(df), number(t, 2), p_said(p))
}

pub(super) fn cell(value: f64, text: String) -> UsualCell {
    UsualCell { value: Some(value), text }
}

pub(super) fn no_cell() -> UsualCell {
    UsualCell { value: None, text: "\u{2013}".into() }
}

pub(super) fn p_cell(p: f64) -> UsualCell {
    cell(p, p_value(p))
}

pub(super) fn df_cell(df: f64) -> UsualCell {
    if df.is_finite() { cell(df, degrees(df)) } else { UsualCell { value: None, text: degrees(df) } }
}

/// With so many decimals.
pub(super) fn fixed(value: f64, digits: usize) -> UsualCell {
    if value.is_finite() { cell(value, number(value, digits)) } else { no_cell() }
}

/// With the decimals that a spread of `width` calls for.
pub(super) fn by_width(value: f64, width: f64) -> UsualCell {
    fixed(value, decimals(width))
}

pub(super) fn maybe(value: Option<f64>, print: impl Fn(f64) -> UsualCell) -> UsualCell {
    value.map_or_else(no_cell, print)
}

pub(super) fn row(labels: &[&str], cells: Vec<UsualCell>) -> UsualRow {
    UsualRow { labels: labels.iter().map(|label| (*label).to_string()).collect(), cells }
}

pub(super) fn heads(names: &[&str]) -> Vec<String> {
    names.iter().map(|name| (*name).to_string()).collect()
}

pub(super) fn named(name: &str, cell: UsualCell) -> NamedNumber {
    NamedNumber { name: name.into(), value: cell.value, text: cell.text }
}

/// `1 mouse`, `3 mice`.
pub(super) fn counted(count: usize, one: &str, many: &str) -> String {
    format!("{count} {}", if count == 1 { one } else { many })
}

/// `day 7`, `day 7 and 9`, `day 7, 9 and 11`; beyond eight the first and last are named.
pub(super) fn days(word: &str, times: &[f64]) -> String {
    let named: Vec<String> = times.iter().map(|&t| plain(t)).collect();
    match named.as_slice() {
        [first, .., last] if named.len() > 8 => {
            format!("{} visits between {word} {first} and {last}", named.len())
        }
        _ => format!("{word} {}", crate::sentences::joined(&named)),
    }
}

/// A share as whole percent.
pub(super) fn share(part: usize, whole: usize) -> String {
    format!("{} %", number(100.0 * part as f64 / whole.max(1) as f64, 0))
}

/// A number between 0 and 1, such as Mauchly's W.
pub(super) fn small(value: f64) -> String {
    if value < 0.001 { "< 0.001".into() } else { number(value, 3) }
}

/// The unit of a rate: `day`, or `unit of time` where the unit is not known.
pub(super) fn unit(time_word: &str) -> &str {
    const KNOWN: [&str; 8] = ["second", "minute", "hour", "day", "week", "month", "quarter", "year"];
    if KNOWN.contains(&time_word) { time_word } else { "unit of time" }
}
