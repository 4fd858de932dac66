//! Numbers as they are written in a figure.

/// A number with a fixed count of decimals, a true minus sign and thin spaces between thousands.
pub(crate) fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", value.abs());
    let (whole, rest) = text.split_at(text.find('.').unwrap_or(text.len()));
    let is_zero = text.bytes().all(|b| b == b'0' || b == b'.');
    let mut grouped = String::new();
    for (k, digit) in whole.chars().enumerate() {
        if k > 0 && whole.len() > 4 && (whole.len() - k) % 3 == 0 {
            grouped.push('\u{2009}');
        }
        grouped.push(digit);
    }
    let sign = if value < 0.0 && !is_zero { "\u{2212}" } else { "" };
    format!("{sign}{grouped}{rest}")
}

/// A number as short as it can be written, to nine digits.
pub(crate) fn plain(value: f64) -> String {
    let size = value.abs();
    if size != 0.0 && !(1e-4..1e7).contains(&size) {
        return powered(value);
    }
    let text = format!("{size:.9}");
    let decimals = text.trim_end_matches('0').rsplit('.').next().map_or(0, str::len);
    let whole_digits = libm::log10(size.max(1.0)) as usize + 1;
    fixed(value, decimals.min(9_usize.saturating_sub(whole_digits)))
}

/// Decimals that tell apart values one `step` from each other.
pub(crate) fn decimals_of(step: f64) -> usize {
    if step <= 0.0 || !step.is_finite() {
        return 0;
    }
    let mut decimals = 0;
    let mut scaled = step;
    while decimals < 9 && (scaled - scaled.round()).abs() > 1e-6 * scaled.max(1.0) {
        scaled *= 10.0;
        decimals += 1;
    }
    decimals
}

/// Decimals for a time on a continuous curve: a hundredth of the follow-up or finer.
pub(crate) fn decimals_for_span(span: f64) -> usize {
    if span <= 0.0 || !span.is_finite() {
        return 1;
    }
    (1.0 - libm::floor(libm::log10(span / 5.0))).clamp(0.0, 9.0) as usize
}

/// `2.5×10⁶`.
fn powered(value: f64) -> String {
    let exponent = libm::floor(libm::log10(value.abs())) as i32;
    let mantissa = value / libm::pow(10.0, f64::from(exponent));
    let mut text = plain((mantissa * 1e4).round() / 1e4);
    text.push_str("×10");
    for digit in exponent.to_string().chars() {
        text.push(match digit {
            '-' => '\u{207b}',
            '1' => '\u{b9}',
            '2' => '\u{b2}',
            '3' => '\u{b3}',
            other => char::from_u32(0x2070 + other.to_digit(10).unwrap_or(0)).unwrap_or('?'),
        });
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_written_for_people() {
        let cases = [
            (plain(0.0), "0"),
            (plain(7.5), "7.5"),
            (plain(-3.0), "\u{2212}3"),
            (plain(1234.0), "1234"),
            (plain(12345.0), "12\u{2009}345"),
            (plain(0.1 + 0.2), "0.3"),
            (plain(2.5e7), "2.5×10\u{2077}"),
            (plain(3e-6), "3×10\u{207b}\u{2076}"),
            (fixed(-0.001, 1), "0.0"),
            (fixed(7.04, 1), "7.0"),
        ];
        for (got, expected) in cases {
            assert_eq!(got, expected);
        }
    }

    #[test]
    fn decimals_follow_the_step() {
        assert_eq!([2.0, 0.5, 0.25, 0.02].map(decimals_of), [0, 1, 2, 2]);
        assert_eq!([21.0, 100.0, 3.0].map(decimals_for_span), [1, 0, 2]);
    }
}
