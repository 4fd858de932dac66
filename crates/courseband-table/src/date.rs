//! Calendar dates as people write them, as days.

use crate::request::DateOrder;

/// A date whose order of day and month may be open.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum WrittenDate {
    /// Days since 1970-01-01, with the time of day as a fraction.
    Known(f64),
    /// `a/b/year`: day first or month first.
    Open { a: u32, b: u32, year: i64, fraction: f64 },
}

impl WrittenDate {
    /// Days since 1970-01-01 under an order; `None` where there is no such date.
    pub(crate) fn days(self, order: DateOrder) -> Option<f64> {
        match self {
            WrittenDate::Known(days) => Some(days),
            WrittenDate::Open { a, b, year, fraction } => {
                let (day, month) = if order == DateOrder::DayFirst { (a, b) } else { (b, a) };
                Some(days_from_civil(year, month, day)? as f64 + fraction)
            }
        }
    }
}

const MONTHS: [&str; 12] = ["jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec"];

/// Reads `2024-03-05`, `5.3.2024`, `5/3/2024`, `5 Mar 2024`, `Mar 5, 2024`, each with or without a time of day.
pub(crate) fn read_date(cell: &str) -> Option<WrittenDate> {
    let cell = cell.trim();
    if cell.len() < 6 || cell.len() > 40 || !cell.bytes().any(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let (date, fraction) = split_time_of_day(cell)?;
    let parts: Vec<&str> = date.split(['-', '/', '.', ' ', ',']).filter(|part| !part.is_empty()).collect();
    let [first, second, third] = parts.as_slice() else { return None };
    if let Some(month) = month_number(second) {
        return known(full_year(third)?, month, small(first)?, fraction);
    }
    if let Some(month) = month_number(first) {
        return known(full_year(third)?, month, small(second)?, fraction);
    }
    if first.len() == 4 {
        return known(first.parse().ok()?, small(second)?, small(third)?, fraction);
    }
    let (a, b, year) = (small(first)?, small(second)?, full_year(third)?);
    if date.contains('.') {
        return known(year, b, a, fraction);
    }
    (date.contains('/') || date.contains('-')).then_some(())?;
    let open = WrittenDate::Open { a, b, year, fraction };
    open.days(DateOrder::DayFirst).or(open.days(DateOrder::MonthFirst)).map(|_| open)
}

fn known(year: i64, month: u32, day: u32, fraction: f64) -> Option<WrittenDate> {
    Some(WrittenDate::Known(days_from_civil(year, month, day)? as f64 + fraction))
}

/// The date, and the time of day as a fraction of a day.
fn split_time_of_day(cell: &str) -> Option<(&str, f64)> {
    let Some(colon) = cell.find(':') else {
        return Some((cell, 0.0));
    };
    let start = cell[..colon].rfind(['T', ' '])?;
    let clock = cell[start + 1..].trim_end_matches('Z').trim();
    let (clock, half) = match clock.to_ascii_lowercase() {
        text if text.ends_with("pm") => (text.trim_end_matches("pm").trim().to_string(), Some(true)),
        text if text.ends_with("am") => (text.trim_end_matches("am").trim().to_string(), Some(false)),
        text => (text, None),
    };
    let parts: Vec<&str> = clock.split(':').collect();
    let hour: f64 = small(parts.first()?)?.into();
    let hour = match half {
        Some(true) if hour < 12.0 => hour + 12.0,
        Some(false) if hour == 12.0 => 0.0,
        _ => hour,
    };
    let minute: f64 = small(parts.get(1)?)?.into();
    let second: f64 = parts.get(2).map_or(Some(0.0), |text| text.parse().ok())?;
    let valid = parts.len() <= 3 && hour < 24.0 && minute < 60.0 && (0.0..60.0).contains(&second);
    valid.then(|| (cell[..start].trim(), (hour * 3600.0 + minute * 60.0 + second) / 86400.0))
}

/// One or two digits.
fn small(text: &str) -> Option<u32> {
    let text = text.trim_end_matches(|c: char| c.is_ascii_alphabetic());
    (1..=2).contains(&text.len()).then(|| text.parse().ok())?
}

/// Four digits, or two: 70 to 99 are 1970 to 1999, the rest 2000 to 2069.
fn full_year(text: &str) -> Option<i64> {
    let year: i64 = text.bytes().all(|byte| byte.is_ascii_digit()).then(|| text.parse().ok())??;
    match text.len() {
        4 => Some(year),
        2 if year >= 70 => Some(1900 + year),
        2 => Some(2000 + year),
        _ => None,
    }
}

fn month_number(text: &str) -> Option<u32> {
    let text = text.to_lowercase();
    let index = MONTHS.iter().position(|month| text.len() >= 3 && text.starts_with(month))?;
    text.bytes().all(|byte| byte.is_ascii_alphabetic()).then_some(index as u32 + 1)
}

/// Days since 1970-01-01 in the Gregorian calendar; `None` for a day that does not exist.
///
/// Counts whole 400-year eras of 146097 days from 1 March of year 0, so that
/// the leap day ends each year.
fn days_from_civil(year: i64, month: u32, day: u32) -> Option<i64> {
    let leap = (year % 4 == 0 && year % 100 != 0) || year % 400 == 0;
    let length = match month {
        1 | 3 | 5 | 7 | 8 | 10 | 12 => 31,
        4 | 6 | 9 | 11 => 30,
        2 if leap => 29,
        2 => 28,
        _ => return None,
    };
    if day < 1 || day > length || !(1..=9999).contains(&year) {
        return None;
    }
    let shifted = if month <= 2 { year - 1 } else { year };
    let era = shifted.div_euclid(400);
    let year_of_era = shifted.rem_euclid(400);
    let month_from_march = i64::from((month + 9) % 12);
    let day_of_year = (153 * month_from_march + 2) / 5 + i64::from(day) - 1;
    let day_of_era = year_of_era * 365 + year_of_era / 4 - year_of_era / 100 + day_of_year;
    Some(era * 146_097 + day_of_era - 719_468)
}

/// Year, month and day of a count of days since 1970-01-01: [`days_from_civil`] backwards.
pub(crate) fn civil_from_days(days: i64) -> (i64, u32, u32) {
    let shifted = days + 719_468;
    let era = shifted.div_euclid(146_097);
    let day_of_era = shifted.rem_euclid(146_097);
    let year_of_era = (day_of_era - day_of_era / 1460 + day_of_era / 36_524 - day_of_era / 146_096) / 365;
    let day_of_year = day_of_era - (365 * year_of_era + year_of_era / 4 - year_of_era / 100);
    let month_from_march = (5 * day_of_year + 2) / 153;
    let day = day_of_year - (153 * month_from_march + 2) / 5 + 1;
    let month = if month_from_march < 10 { month_from_march + 3 } else { month_from_march - 9 };
    (era * 400 + year_of_era + i64::from(month <= 2), month as u32, day as u32)
}

#[cfg(test)]
mod tests;
