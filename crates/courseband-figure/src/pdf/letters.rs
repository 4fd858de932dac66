//! The letters of Helvetica and Symbol: their codes and widths, from Adobe's metrics of the standard fonts (from memory).

use crate::text::Measure;

/// Widths in thousandths of the size, from space to tilde.
#[rustfmt::skip]
const REGULAR: [u16; 95] = [
    278, 278, 355, 556, 556, 889, 667, 191, 333, 333, 389, 584, 278, 333, 278, 278, 556, 556, 556, 556, 556, 556, 556, 556,
    556, 556, 278, 278, 584, 584, 584, 556, 1015, 667, 667, 722, 722, 667, 611, 778, 722, 278, 500, 667, 556, 833, 722, 778,
    667, 778, 722, 667, 611, 722, 667, 944, 667, 667, 611, 278, 278, 278, 469, 556, 333, 556, 556, 500, 556, 556, 278, 556,
    556, 222, 222, 500, 222, 833, 556, 556, 556, 556, 333, 500, 278, 556, 500, 722, 500, 500, 500, 334, 260, 334, 584,
];
#[rustfmt::skip]
const BOLD: [u16; 95] = [
    278, 333, 474, 556, 556, 889, 722, 238, 333, 333, 389, 584, 278, 333, 278, 278, 556, 556, 556, 556, 556, 556, 556, 556,
    556, 556, 333, 333, 584, 584, 584, 611, 975, 722, 722, 722, 722, 667, 611, 778, 722, 278, 556, 722, 611, 833, 722, 778,
    667, 778, 722, 667, 611, 722, 667, 944, 667, 667, 611, 333, 278, 333, 584, 556, 333, 556, 611, 556, 611, 556, 333, 611,
    611, 278, 278, 556, 278, 889, 611, 611, 611, 611, 389, 556, 333, 611, 556, 778, 556, 556, 500, 389, 280, 389, 584,
];
/// Letters of the fonts' Latin encoding (WinAnsi) from 0x80 on; a full stop where there is none.
const UPPER: &str = "€.‚ƒ„…†‡ˆ‰Š‹Œ.Ž..‘’“”•–—˜™š›œ.žŸ";
/// Letters of which those from 0xC0 on are marked forms.
const BASES: &str = "AAAAAAACEEEEIIIIDNOOOOO+OUUUUYPsaaaaaaaceeeeiiiidnooooo+ouuuuypy";
/// Letters of Symbol with their codes and widths.
#[rustfmt::skip]
const SYMBOL: [(char, u8, u16); 36] = [
    ('−', 0x2d, 549), ('≤', 0xa3, 549), ('≥', 0xb3, 549), ('≈', 0xbb, 549), ('≠', 0xb9, 549), ('→', 0xae, 987),
    ('←', 0xac, 987), ('↑', 0xad, 603), ('↓', 0xaf, 603), ('∞', 0xa5, 713), ('Δ', 0x44, 612), ('Σ', 0x53, 592),
    ('Ω', 0x57, 768), ('Φ', 0x46, 763), ('Γ', 0x47, 603), ('α', 0x61, 631), ('β', 0x62, 549), ('γ', 0x67, 411),
    ('δ', 0x64, 494), ('ε', 0x65, 439), ('ζ', 0x7a, 494), ('η', 0x68, 603), ('θ', 0x71, 521), ('ι', 0x69, 329),
    ('κ', 0x6b, 549), ('λ', 0x6c, 549), ('μ', 0x6d, 576), ('ν', 0x6e, 521), ('ξ', 0x78, 493), ('π', 0x70, 549),
    ('ρ', 0x72, 549), ('σ', 0x73, 603), ('τ', 0x74, 439), ('φ', 0x66, 521), ('χ', 0x63, 549), ('ψ', 0x79, 686),
];

/// A letter as the file writes it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Letter {
    pub(super) symbol: bool,
    pub(super) code: u8,
    /// Thousandths of the size.
    pub(super) width: u16,
}

/// Code and width of a letter; `None` where neither font has it.
pub(super) fn letter(c: char, bold: bool) -> Option<Letter> {
    let plain = |code: u8, width: u16| Some(Letter { symbol: false, code, width });
    let table = if bold { &BOLD } else { &REGULAR };
    match c {
        ' '..='~' => plain(c as u8, table[c as usize - 32]),
        '\u{a0}' | '\u{2009}' | '\u{202f}' => plain(b' ', table[0]),
        '\u{2011}' => plain(b'-', table[13]),
        '\u{a1}'..='\u{ff}' => plain(c as u32 as u8, upper_width(c, bold)),
        _ => match UPPER.chars().position(|other| other == c && other != '.') {
            Some(at) => plain(0x80 + at as u8, high_width(c, bold)),
            None => {
                let found = SYMBOL.iter().find(|(other, ..)| *other == c);
                found.map(|&(_, code, width)| Letter { symbol: true, code, width })
            }
        },
    }
}

fn upper_width(c: char, bold: bool) -> u16 {
    let table = if bold { &BOLD } else { &REGULAR };
    if let Some(base) = (c as usize).checked_sub(0xc0).and_then(|at| BASES.chars().nth(at)) {
        return match c {
            'Æ' => 1000,
            'æ' => 889,
            'ß' | 'ø' => 611,
            _ => table[base as usize - 32],
        };
    }
    match c {
        '·' => 278,
        '°' => 400,
        '±' | '¬' => 584,
        '²' | '³' | '¹' | '\u{ad}' | '¨' | '¯' | '´' | '¸' => 333,
        '¼'..='¾' => 834,
        'µ' if bold => 611,
        '©' | '®' => 737,
        _ => 556,
    }
}

fn high_width(c: char, bold: bool) -> u16 {
    match c {
        '…' | '—' | '‰' | '™' | 'Œ' => 1000,
        '‘' | '’' | '‚' => [222, 278][usize::from(bold)],
        '“' | '”' | '„' => [333, 500][usize::from(bold)],
        'Š' | 'Ÿ' => 667,
        'Ž' => 611,
        'š' | 'ž' => 500,
        '•' => 350,
        'œ' => 944,
        _ => 556,
    }
}

/// Measures text as the file will show it.
pub(super) struct Helvetica;

impl Measure for Helvetica {
    fn width(&self, text: &str, size: f64, bold: bool) -> f64 {
        let widths = text.chars().map(|c| letter(c, bold).map_or(556.0, |letter| f64::from(letter.width)));
        widths.sum::<f64>() * size / 1000.0
    }
}
