//! Bytes to text: signatures, encodings, line ends.

use crate::error::TableError;
use encoding_rs::{UTF_16BE, UTF_16LE, WINDOWS_1252};

/// Text with line feeds only, and how it was encoded.
pub(crate) struct Decoded {
    pub(crate) text: String,
    pub(crate) encoding: &'static str,
    /// Characters that could not be decoded were replaced.
    pub(crate) damaged: bool,
}

/// Offsets into the text are kept in 32 bits.
pub(crate) const MAX_BYTES: usize = u32::MAX as usize / 4;

/// First bytes of files that are no text, and what they are.
const SIGNATURES: [(&[u8], &str); 8] = [
    (b"%PDF", "a PDF document"),
    (b"\x89PNG", "a picture"),
    (b"\xFF\xD8\xFF", "a picture"),
    (b"GIF8", "a picture"),
    (b"{\\rtf", "a word processor's document"),
    (b"\x1F\x8B", "a compressed file"),
    (b"7z\xBC\xAF", "a compressed file"),
    (b"SQLite format", "a database"),
];

/// Decodes a table's bytes.
///
/// # Errors
/// Pictures and other binary files, and tables without any text.
pub(crate) fn decode(bytes: &[u8]) -> Result<Decoded, TableError> {
    refuse_signatures(bytes)?;
    if bytes.len() > MAX_BYTES {
        return Err(TableError::TooLarge { what: format!("over {} megabytes", MAX_BYTES >> 20) });
    }
    let (text, encoding, damaged) = to_text(bytes)?;
    let text = match text.as_bytes().contains(&b'\r') {
        true => with_line_feeds(&text),
        false => text,
    };
    if text.bytes().all(|byte| byte.is_ascii_whitespace()) {
        return Err(TableError::Empty);
    }
    refuse_controls(&text)?;
    refuse_markup(&text)?;
    Ok(Decoded { text, encoding, damaged })
}

fn refuse_signatures(bytes: &[u8]) -> Result<(), TableError> {
    match SIGNATURES.iter().find(|(signature, _)| bytes.starts_with(signature)) {
        Some((_, seems)) => Err(TableError::NotText { seems }),
        None => Ok(()),
    }
}

fn to_text(bytes: &[u8]) -> Result<(String, &'static str, bool), TableError> {
    if let Some(rest) = bytes.strip_prefix(b"\xEF\xBB\xBF") {
        return Ok(utf8_or_older(rest));
    }
    let wide = match bytes {
        [0xFF, 0xFE, ..] => Some((UTF_16LE, 2)),
        [0xFE, 0xFF, ..] => Some((UTF_16BE, 2)),
        _ => utf16_without_mark(bytes).map(|encoding| (encoding, 0)),
    };
    if let Some((encoding, skip)) = wide {
        let (text, damaged) = encoding.decode_without_bom_handling(&bytes[skip..]);
        return Ok((text.into_owned(), encoding.name(), damaged));
    }
    if bytes.contains(&0) {
        return Err(TableError::NotText { seems: "a binary file" });
    }
    Ok(utf8_or_older(bytes))
}

/// UTF-16 without a byte-order mark: every other byte of plain text is zero.
fn utf16_without_mark(bytes: &[u8]) -> Option<&'static encoding_rs::Encoding> {
    let start = &bytes[..bytes.len().min(4096) & !1];
    let pairs = start.len() / 2;
    if pairs < 2 || bytes.len() % 2 == 1 {
        return None;
    }
    let zeros = |offset: usize| start.iter().skip(offset).step_by(2).filter(|&&byte| byte == 0).count();
    let (even, odd) = (zeros(0), zeros(1));
    if odd * 10 >= pairs * 6 && even == 0 {
        Some(UTF_16LE)
    } else if even * 10 >= pairs * 6 && odd == 0 {
        Some(UTF_16BE)
    } else {
        None
    }
}

fn utf8_or_older(bytes: &[u8]) -> (String, &'static str, bool) {
    match std::str::from_utf8(bytes) {
        Ok(text) => (text.to_string(), "UTF-8", false),
        Err(_) => {
            let (text, damaged) = WINDOWS_1252.decode_without_bom_handling(bytes);
            (text.into_owned(), WINDOWS_1252.name(), damaged)
        }
    }
}

/// CR LF and lone CR become LF.
fn with_line_feeds(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    let mut rest = text;
    while let Some(at) = rest.find('\r') {
        out.push_str(&rest[..at]);
        out.push('\n');
        rest = &rest[at + 1..];
        rest = rest.strip_prefix('\n').unwrap_or(rest);
    }
    out.push_str(rest);
    out
}

fn refuse_controls(text: &str) -> Result<(), TableError> {
    let odd = |byte: &u8| *byte < 9 || (14..32).contains(byte);
    let count = text.as_bytes().iter().filter(|byte| odd(byte)).count();
    if text.as_bytes().contains(&0) || count * 50 > text.len() {
        return Err(TableError::NotText { seems: "a binary file" });
    }
    Ok(())
}

fn refuse_markup(text: &str) -> Result<(), TableError> {
    let start: String = text.trim_start().chars().take(14).collect::<String>().to_lowercase();
    if start.starts_with("<!doctype html") || start.starts_with("<html") || start.starts_with("<?xml") {
        return Err(TableError::NotText { seems: "a web page or marked-up document" });
    }
    Ok(())
}
