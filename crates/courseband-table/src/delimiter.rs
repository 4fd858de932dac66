//! Which character separates the cells.

/// Lines looked at.
const LINES: usize = 200;

/// Characters looked at: a single enormous line must not be read twice.
const CHARACTERS: usize = 200_000;

/// The delimiter that occurs most evenly from line to line.
///
/// Ties go to the tab, then the semicolon: where these occur at all, commas
/// are decimal marks or part of a text.
pub(crate) fn sniff(text: &str) -> u8 {
    if let Some(named) = named_in_first_line(text) {
        return named;
    }
    let counts = counts_by_line(text);
    let mut best = (b',', 0.0);
    for (delimiter, column, weight) in [(b'\t', 0, 1.2), (b';', 1, 1.1), (b',', 2, 1.0)] {
        let score = weight * evenness(counts.iter().map(|line| line[column]));
        if score > best.1 {
            best = (delimiter, score);
        }
    }
    best.0
}

/// A first line such as `sep=;`, which some programs write.
fn named_in_first_line(text: &str) -> Option<u8> {
    let line = text.lines().next()?.trim_matches('"');
    match line.strip_prefix("sep=")?.as_bytes() {
        [delimiter @ (b',' | b';' | b'\t')] => Some(*delimiter),
        _ => None,
    }
}

/// Tabs, semicolons and commas outside quotes, per line that is not blank.
fn counts_by_line(text: &str) -> Vec<[usize; 3]> {
    let mut lines = Vec::new();
    let (mut counts, mut blank, mut inside) = ([0; 3], true, false);
    for byte in text.bytes().take(CHARACTERS) {
        blank &= byte.is_ascii_whitespace();
        match byte {
            b'"' => inside = !inside,
            b'\n' if !inside => {
                if !blank {
                    lines.push(counts);
                }
                (counts, blank) = ([0; 3], true);
                if lines.len() == LINES {
                    return lines;
                }
            }
            b'\t' if !inside => counts[0] += 1,
            b';' if !inside => counts[1] += 1,
            b',' if !inside => counts[2] += 1,
            _ => {}
        }
    }
    if !blank {
        lines.push(counts);
    }
    lines
}

/// Mean of the share of lines with the character and the share with its most frequent count.
fn evenness(counts: impl Iterator<Item = usize>) -> f64 {
    let mut counts: Vec<usize> = counts.collect();
    let total = counts.len() as f64;
    counts.retain(|&count| count > 0);
    counts.sort_unstable();
    let mode = counts.chunk_by(|a, b| a == b).map(<[usize]>::len).max().unwrap_or(0);
    if total == 0.0 { 0.0 } else { (counts.len() as f64 + mode as f64) / (2.0 * total) }
}
