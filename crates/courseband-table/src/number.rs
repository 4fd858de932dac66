//! Numbers and missing values as people write them.

/// The decimal mark of a column.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub(crate) enum Decimal {
    #[default]
    Point,
    Comma,
}

/// Why a cell is not a number.
#[derive(Debug, Clone, PartialEq)]
pub(crate) enum NotNumber {
    Missing,
    /// `<0.5`: below a limit.
    Below,
    /// `>500`: above a limit.
    Above,
    /// `5.1 mm`: the number and its unit.
    Unit(f64, String),
    /// Infinite, or too large to be held.
    Infinite,
    /// A number under the other decimal mark.
    OtherMark,
    Text,
}

/// Words for a missing response, lower case.
const MISSING: [&str; 45] = [
    "",
    "na",
    "n/a",
    "n.a.",
    "n.a",
    "n a",
    "#n/a",
    "#na",
    "nan",
    "null",
    "none",
    "nil",
    "missing",
    "miss",
    "mis",
    "-",
    "--",
    "---",
    "–",
    "—",
    ".",
    "..",
    "...",
    "…",
    "?",
    "*",
    "died",
    "dead",
    "death",
    "lost",
    "lost to follow-up",
    "dropout",
    "dropped out",
    "withdrawn",
    "culled",
    "euthanised",
    "euthanized",
    "sacrificed",
    "killed",
    "not done",
    "not measured",
    "no data",
    "absent",
    "empty",
    "blank",
];

/// Words for a missing group, subject or time, lower case. Shorter: `none` may be a group.
const MISSING_LABEL: [&str; 14] =
    ["", "na", "n/a", "n.a.", "n.a", "#n/a", "nan", "null", "missing", "-", "--", ".", "?", "–"];

/// True for the ways in which people write that a response is missing.
pub(crate) fn is_missing(cell: &str) -> bool {
    among(cell, &MISSING)
}

/// True for the ways in which people write that a label is missing.
pub(crate) fn is_missing_label(cell: &str) -> bool {
    among(cell, &MISSING_LABEL)
}

fn among(cell: &str, words: &[&str]) -> bool {
    let cell = cell.trim();
    words.iter().any(|word| word.eq_ignore_ascii_case(cell))
}

/// Reads a number.
///
/// # Errors
/// What the cell is instead.
pub(crate) fn number(cell: &str, decimal: Decimal) -> Result<f64, NotNumber> {
    match quick(cell, decimal) {
        Some(value) => Ok(value),
        None => slow(cell, decimal),
    }
}

/// Digits, the decimal mark and a sign: most cells, read without further ado.
fn quick(cell: &str, decimal: Decimal) -> Option<f64> {
    let mark = match decimal {
        Decimal::Point => b'.',
        Decimal::Comma => b',',
    };
    let simple = |byte: u8| byte.is_ascii_digit() || byte == b'-' || byte == mark;
    if cell.len() > 32 || !cell.bytes().all(simple) {
        return None;
    }
    if decimal == Decimal::Point {
        return cell.parse().ok();
    }
    let mut digits = [0; 32];
    digits[..cell.len()].copy_from_slice(cell.as_bytes());
    digits.iter_mut().filter(|byte| **byte == b',').for_each(|byte| *byte = b'.');
    std::str::from_utf8(&digits[..cell.len()]).ok()?.parse().ok()
}

/// The general case: white space, other minus signs, decimal commas, thousands.
fn slow(cell: &str, decimal: Decimal) -> Result<f64, NotNumber> {
    let trimmed = cell.trim();
    if let Some(value) = strict(trimmed, decimal) {
        return if value.is_finite() { Ok(value) } else { Err(NotNumber::Infinite) };
    }
    if is_missing(trimmed) {
        return Err(NotNumber::Missing);
    }
    let other = if decimal == Decimal::Point { Decimal::Comma } else { Decimal::Point };
    if strict(trimmed, other).is_some() {
        return Err(NotNumber::OtherMark);
    }
    Err(odd_kind(trimmed, decimal))
}

/// The limit of a cell such as `<0.5` (-1: below) or `>500` (1: above).
pub(crate) fn limit(cell: &str, decimal: Decimal) -> Option<(f64, i8)> {
    let cell = cell.trim();
    let bare = cell.trim_start_matches(['<', '>', '≤', '≥', '=', ' ']);
    let value = strict(bare, decimal).filter(|_| bare.len() < cell.len())?;
    Some((value, if cell.starts_with(['<', '≤']) { -1 } else { 1 }))
}

fn odd_kind(cell: &str, decimal: Decimal) -> NotNumber {
    let limit = cell.trim_start_matches(['<', '>', '≤', '≥', '=', ' ']);
    if limit.len() < cell.len() && strict(limit, decimal).is_some() {
        return if cell.starts_with(['<', '≤']) { NotNumber::Below } else { NotNumber::Above };
    }
    let bare = cell.trim_start_matches(['+', '-', '−']).to_lowercase();
    if matches!(bare.as_str(), "inf" | "infinity" | "∞") {
        return NotNumber::Infinite;
    }
    match with_unit(cell, decimal) {
        Some((value, unit)) => NotNumber::Unit(value, unit),
        None => NotNumber::Text,
    }
}

/// `5.1 mm`, `5.1mm`, `12 %`, `3 mm²`, `4 mg/ml`: a number, then a unit.
fn with_unit(cell: &str, decimal: Decimal) -> Option<(f64, String)> {
    let end = cell.find(|c: char| !(c.is_ascii_digit() || "+-−.,".contains(c)))?;
    let (head, unit) = (cell[..end].trim(), cell[end..].trim());
    let value = strict(head, decimal).filter(|value| value.is_finite())?;
    looks_like_unit(unit).then(|| (value, unit.to_string()))
}

/// Letters first, short; not a letter typed for a digit (`6O`, `5l`), not `x10`.
fn looks_like_unit(unit: &str) -> bool {
    let mut chars = unit.chars();
    let (first, second) = (chars.next(), chars.next());
    let typed_for_digit = matches!(unit, "O" | "o" | "l" | "I");
    let hexadecimal = matches!(first, Some('x' | 'X')) && second.is_some_and(|c| c.is_ascii_digit());
    let starts = first.is_some_and(|c| c.is_alphabetic() || "%/°µ".contains(c));
    let allowed = unit.chars().all(|c| c.is_alphanumeric() || "%/²³°·^-µ ".contains(c));
    starts && allowed && !typed_for_digit && !hexadecimal && unit.chars().count() <= 10
}

/// Digits with at most one decimal mark, grouped thousands and an exponent; nothing else.
///
/// The value may be infinite where the exponent is too large.
fn strict(cell: &str, decimal: Decimal) -> Option<f64> {
    let (mark, group) = match decimal {
        Decimal::Point => ('.', ','),
        Decimal::Comma => (',', '.'),
    };
    if cell.len() > 400 || !cell.bytes().any(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let unsigned = cell.strip_prefix(['-', '+', '−']).unwrap_or(cell);
    let negative = cell.starts_with(['-', '−']);
    let (mantissa, exponent) = match unsigned.find(['e', 'E']) {
        Some(at) => (&unsigned[..at], &unsigned[at + 1..]),
        None => (unsigned, "0"),
    };
    let (whole, fraction) = mantissa.split_once(mark).unwrap_or((mantissa, ""));
    if mantissa.is_empty() || !fraction.bytes().all(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let exponent_digits = exponent.strip_prefix(['-', '+']).unwrap_or(exponent);
    if exponent_digits.is_empty() || !exponent_digits.bytes().all(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let whole = without_groups(whole, group, decimal == Decimal::Comma && fraction.is_empty())?;
    let value: f64 = format!("{whole}.{fraction}e{exponent}").parse().ok()?;
    Some(if negative { -value } else { value })
}

/// Digits without their thousands marks. `no_marks`: the mark could be a decimal mark, so refuse it.
fn without_groups(whole: &str, mark: char, no_marks: bool) -> Option<String> {
    let is_mark =
        |c: char| c == mark && !no_marks || matches!(c, ' ' | '\u{a0}' | '\u{202f}' | '\u{2009}' | '\'' | '’');
    if whole.bytes().all(|byte| byte.is_ascii_digit()) {
        return Some(if whole.is_empty() { "0".to_string() } else { whole.to_string() });
    }
    let parts: Vec<&str> = whole.split(is_mark).collect();
    let digits = parts.iter().all(|part| part.bytes().all(|byte| byte.is_ascii_digit()));
    let grouped = (1..=3).contains(&parts[0].len()) && parts[1..].iter().all(|part| part.len() == 3);
    (digits && grouped).then(|| parts.concat())
}

/// What a column's cells say about its decimal mark.
#[derive(Debug, Clone, Copy, Default)]
pub(crate) struct MarkEvidence {
    /// Numbers with a decimal point.
    pub(crate) point: usize,
    /// Numbers that can only have a decimal comma.
    pub(crate) comma: usize,
    /// `1,234`: a decimal comma or a thousands mark.
    pub(crate) unclear: usize,
}

impl MarkEvidence {
    /// Counts one cell.
    pub(crate) fn add(&mut self, cell: &str) {
        let bytes = cell.as_bytes();
        let (point, comma) = (bytes.contains(&b'.'), bytes.contains(&b','));
        if !point && !comma {
            return;
        }
        if quick(cell, Decimal::Point).is_some() {
            self.point += 1;
            return;
        }
        // Three digits behind a comma may be thousands.
        let behind = bytes.iter().rev().take_while(|&&byte| byte != b',').count();
        if behind != 3 && quick(cell, Decimal::Comma).is_some() {
            self.comma += 1;
            return;
        }
        let cell = cell.trim();
        let as_point = strict(cell, Decimal::Point).is_some();
        let as_comma = strict(cell, Decimal::Comma).is_some();
        match (as_point, as_comma) {
            (true, true) if cell.trim_start_matches(['-', '+']).starts_with('0') => self.comma += 1,
            (true, true) => self.unclear += 1,
            (true, false) => self.point += 1,
            (false, true) => self.comma += 1,
            (false, false) => {}
        }
    }

    /// Adds another column's counts.
    pub(crate) fn join(&mut self, other: &MarkEvidence) {
        self.point += other.point;
        self.comma += other.comma;
        self.unclear += other.unclear;
    }

    /// The column's mark; `file` is the evidence of all columns, for a column that is unclear by itself.
    pub(crate) fn decide(&self, file: &MarkEvidence, delimiter: char) -> Decimal {
        if self.comma > self.point {
            return Decimal::Comma;
        }
        let unclear = self.comma == 0 && self.point == 0 && self.unclear > 0;
        let file_comma = file.comma > file.point || (file.comma == file.point && delimiter == ';');
        if unclear && file_comma { Decimal::Comma } else { Decimal::Point }
    }
}

#[cfg(test)]
mod tests;
