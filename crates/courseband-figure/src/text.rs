//! How wide a text is.

/// Measures text. The page measures with its own canvas, a file with [`Estimate`].
pub trait Measure {
    /// Width in CSS pixels of `text` at a size in CSS pixels.
    fn width(&self, text: &str, size: f64, bold: bool) -> f64;
}

/// Widths of the fonts that files name first, a little on the generous side.
#[derive(Debug, Clone, Copy, Default)]
pub struct Estimate;

impl Measure for Estimate {
    fn width(&self, text: &str, size: f64, bold: bool) -> f64 {
        let ems: f64 = text.chars().map(ems).sum();
        ems * size * if bold { 1.09 } else { 1.03 }
    }
}

/// Width of a character in ems, as in common sans-serif fonts (from memory).
fn ems(c: char) -> f64 {
    match c {
        '\'' | '|' | 'i' | 'j' | 'l' => 0.24,
        ' ' | '\u{a0}' | '.' | ',' | ':' | ';' | '!' | '/' | 'f' | 't' | 'I' | '[' | ']' | '\\' => 0.28,
        '\u{2009}' => 0.17,
        'r' | '(' | ')' | '-' | '·' | '"' | '\u{b9}' | '\u{b2}' | '\u{b3}' => 0.34,
        'c' | 'k' | 's' | 'v' | 'x' | 'y' | 'z' | 'J' => 0.5,
        'M' | 'm' => 0.84,
        'W' | '%' | '@' | '\u{2026}' => 0.95,
        'w' | 'C' | 'D' | 'H' | 'N' | 'R' | 'U' => 0.73,
        'G' | 'O' | 'Q' => 0.78,
        'F' | 'T' | 'Z' => 0.61,
        'A'..='Z' => 0.67,
        '×' | '\u{2212}' | '=' | '+' | '<' | '>' => 0.59,
        c if c > '\u{2e7f}' => 1.05,
        _ => 0.56,
    }
}

/// A name in at most two lines of 18 characters, the rest cut with a mark.
pub(crate) fn two_lines(name: &str) -> Vec<String> {
    const LINE: usize = 18;
    let letters: Vec<char> = name.trim().chars().collect();
    if letters.len() <= LINE {
        return vec![letters.into_iter().collect()];
    }
    let space = letters[..=LINE.min(letters.len() - 1)].iter().rposition(|c| *c == ' ').filter(|&at| at > 0);
    let (end, next) = space.map_or((LINE, LINE), |at| (at, at + 1));
    let first: String = letters[..end].iter().collect();
    let rest: String = letters[next..].iter().collect();
    vec![first, shortened(rest.trim_start(), LINE)]
}

/// A text of at most `most` characters, the rest cut with a mark.
pub(crate) fn shortened(text: &str, most: usize) -> String {
    if text.chars().count() <= most {
        return text.to_string();
    }
    let kept: String = text.chars().take(most.saturating_sub(1)).collect();
    format!("{}\u{2026}", kept.trim_end())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_take_two_lines_at_most() {
        assert_eq!(two_lines("Saline"), ["Saline"]);
        assert_eq!(two_lines("Silver-coated foam dressing"), ["Silver-coated foam", "dressing"]);
        assert_eq!(
            two_lines("Hydrogel with a very long addition here"),
            ["Hydrogel with a", "very long additio\u{2026}"]
        );
        assert_eq!(two_lines("Abcdefghijklmnopqrstuvwxyz"), ["Abcdefghijklmnopqr", "stuvwxyz"]);
        for name in ["", " ", "äöü äöü äöü äöü äöü äöü äöü äöü äöü äöü äöü"] {
            assert!(two_lines(name).iter().all(|line| line.chars().count() <= 18), "{name}");
        }
    }
}
