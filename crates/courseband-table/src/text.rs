//! Small helpers for text shown to people.

/// Longest cell quoted in a message or listed as a value, in characters.
const SHOWN: usize = 80;

/// The text, cut to a length that can be shown.
pub(crate) fn shortened(text: &str) -> String {
    match text.char_indices().nth(SHOWN) {
        None => text.to_string(),
        Some((end, _)) => format!("{}…", &text[..end]),
    }
}

/// The text in quotation marks, shortened, on one line.
pub(crate) fn quoted(text: &str) -> String {
    let line: String = text.chars().map(|c| if c.is_control() { ' ' } else { c }).collect();
    format!("‘{}’", shortened(&line))
}

/// Names in quotation marks, separated by commas, at most twelve.
pub(crate) fn listed(names: &[String]) -> String {
    let mut text = names.iter().take(12).map(|name| quoted(name)).collect::<Vec<_>>().join(", ");
    if names.len() > 12 {
        text.push_str(&format!(" and {} more", names.len() - 12));
    }
    text
}

/// A number with its noun: `1 row`, `3 rows`.
pub(crate) fn counted(count: usize, noun: &str) -> String {
    if count == 1 { format!("1 {noun}") } else { format!("{count} {noun}s") }
}

/// Case and white space folded, so that `"Saline "` and `"saline"` are equal.
pub(crate) fn folded(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for word in text.split_whitespace() {
        if !out.is_empty() {
            out.push(' ');
        }
        out.extend(word.chars().flat_map(char::to_lowercase));
    }
    out
}
