//! Numbers and dates of cells, as text.

use crate::date::civil_from_days;

/// A number with the 15 digits that spreadsheets show, so that 0.1 + 0.2 and 0.3 are the same visit.
pub(super) fn number_text(value: f64) -> String {
    let shown: f64 = format!("{value:.14e}").parse().unwrap_or(value);
    match shown.abs() {
        size if size != 0.0 && !(1e-5..1e15).contains(&size) => format!("{shown:e}"),
        _ => format!("{shown}"),
    }
}

/// What a number format shows.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Look {
    Number,
    Date,
    /// A time of day or a duration, no date.
    Clock,
}

/// What the built-in formats show, by their number.
pub(super) fn built_in(format: usize) -> Look {
    match format {
        14..=17 | 22 | 27..=31 | 34..=36 | 50..=54 | 57..=58 => Look::Date,
        18..=21 | 32..=33 | 45..=47 | 55..=56 => Look::Clock,
        _ => Look::Number,
    }
}

/// What a format such as `dd/mm/yyyy` or `0.00 "mm"` shows.
pub(super) fn look_of(format: &str) -> Look {
    let (mut day, mut clock) = (false, false);
    let mut letters = format.chars().peekable();
    while let Some(letter) = letters.next() {
        match letter.to_ascii_lowercase() {
            '"' => while letters.next().is_some_and(|next| next != '"') {},
            '\\' | '_' | '*' => {
                letters.next();
            }
            '[' => {
                // [h] counts hours; [Red] and [$-409] are colours and places.
                let inner: String = letters.by_ref().take_while(|&next| next != ']').collect();
                clock |= !inner.is_empty() && inner.chars().all(|c| matches!(c.to_ascii_lowercase(), 'h' | 'm' | 's'));
            }
            'y' | 'd' => day = true,
            'h' | 's' => clock = true,
            // Only the first section, for positive numbers.
            ';' => break,
            'g' if format.to_ascii_lowercase().starts_with("general") => return Look::Number,
            'm' if !clock && !format.contains([':', '0', '#']) => day = true,
            _ => {}
        }
    }
    match (day, clock) {
        (true, _) => Look::Date,
        (false, true) => Look::Clock,
        (false, false) => Look::Number,
    }
}

/// A day number of a spreadsheet as `2024-03-05` or `2024-03-05 10:30`; a clock as `10:30`.
///
/// Day 1 is 1 January 1900 (with a 29 February that was not), or day 0 is 1 January 1904.
pub(super) fn day_text(value: f64, look: Look, since_1904: bool) -> Option<String> {
    if look == Look::Number || !(0.0..3_000_000.0).contains(&value) {
        return None;
    }
    let mut days = value.floor();
    let mut seconds = ((value - days) * 86_400.0).round();
    if seconds >= 86_400.0 {
        (days, seconds) = (days + 1.0, 0.0);
    }
    let clock = |hours: f64| {
        let (minutes, rest) = ((seconds / 60.0).floor() % 60.0, seconds % 60.0);
        let rest = if rest > 0.0 { format!(":{rest:02}") } else { String::new() };
        format!("{hours:02}:{minutes:02}{rest}")
    };
    if look == Look::Clock {
        return Some(clock(days * 24.0 + (seconds / 3600.0).floor()));
    }
    let offset = match since_1904 {
        true => -24_107,
        false if days < 60.0 => -25_568,
        false => -25_569,
    };
    let (year, month, day) = civil_from_days(days as i64 + offset);
    let date = format!("{year:04}-{month:02}-{day:02}");
    Some(if seconds > 0.0 { format!("{date} {}", clock((seconds / 3600.0).floor())) } else { date })
}
