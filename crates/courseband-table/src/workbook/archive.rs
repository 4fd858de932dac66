//! Packed files: the directory at the end, and unpacking of one entry.
//!
//! The layout is that of PKWARE's APPNOTE 6.3 (from memory): an end record, a central directory, and before
//! each entry's bytes a local header. Entries are stored or deflated; each carries a CRC-32.

use super::damaged;
use crate::error::TableError;
use miniz_oxide::inflate::decompress_to_vec_with_limit;

/// No entry may unpack to more than this: a small file could else fill the memory.
const MAX_UNPACKED: usize = 1 << 29;

/// A packed file.
#[derive(Debug, Clone)]
pub(super) struct Archive {
    bytes: Vec<u8>,
    entries: Vec<Entry>,
}

#[derive(Debug, Clone)]
struct Entry {
    name: String,
    is_locked: bool,
    method: u16,
    check: u32,
    packed: usize,
    unpacked: usize,
    /// Where the local header begins.
    start: usize,
}

const END: &[u8] = b"PK\x05\x06";

impl Archive {
    /// Reads the directory.
    pub(super) fn open(bytes: &[u8]) -> Result<Archive, TableError> {
        let cut = || damaged("its end is missing, as after a copy that was broken off");
        let from = bytes.len().saturating_sub(22 + 65_535);
        let end = bytes[from..].windows(4).rposition(|window| window == END).map(|at| from + at).ok_or_else(cut)?;
        let count = short(bytes, end + 10).ok_or_else(cut)?;
        let mut at = word(bytes, end + 16).ok_or_else(cut)? as usize;
        let mut entries = Vec::new();
        for _ in 0..count {
            let (entry, next) = Entry::read(bytes, at).ok_or_else(|| damaged("its list of parts cannot be read"))?;
            entries.push(entry);
            at = next;
        }
        Ok(Archive { bytes: bytes.to_vec(), entries })
    }

    pub(super) fn has(&self, name: &str) -> bool {
        self.find(name).is_some()
    }

    fn find(&self, name: &str) -> Option<&Entry> {
        self.entries.iter().find(|entry| entry.name.eq_ignore_ascii_case(name))
    }

    /// The text of an entry; `None` where it is not there.
    pub(super) fn text(&self, name: &str) -> Result<Option<String>, TableError> {
        let Some(entry) = self.find(name) else { return Ok(None) };
        if entry.is_locked {
            return Err(TableError::LockedWorkbook);
        }
        let bytes = self.unpacked(entry)?;
        let text = match bytes.as_slice() {
            [0xFF, 0xFE, ..] | [0xFE, 0xFF, ..] => encoding_rs::UTF_8.decode(&bytes).0.into_owned(),
            _ => String::from_utf8(bytes).map_err(|_| damaged(&format!("its part {name} is no text")))?,
        };
        Ok(Some(text))
    }

    fn unpacked(&self, entry: &Entry) -> Result<Vec<u8>, TableError> {
        let broken = || damaged(&format!("its part {} cannot be unpacked", entry.name));
        if entry.unpacked > MAX_UNPACKED {
            return Err(TableError::TooLarge { what: format!("it unpacks to over {} megabytes", MAX_UNPACKED >> 20) });
        }
        let name = short(&self.bytes, entry.start + 26).ok_or_else(broken)?;
        let extra = short(&self.bytes, entry.start + 28).ok_or_else(broken)?;
        let from = entry.start + 30 + name + extra;
        let packed = self.bytes.get(from..from.saturating_add(entry.packed)).ok_or_else(broken)?;
        let bytes = match entry.method {
            0 => packed.to_vec(),
            8 => decompress_to_vec_with_limit(packed, entry.unpacked.max(1)).map_err(|_| broken())?,
            _ => return Err(damaged(&format!("its part {} is packed in an unusual way", entry.name))),
        };
        match bytes.len() == entry.unpacked && crc(&bytes) == entry.check {
            true => Ok(bytes),
            false => Err(broken()),
        }
    }
}

impl Entry {
    /// An entry of the directory, and where the next begins.
    fn read(bytes: &[u8], at: usize) -> Option<(Entry, usize)> {
        if bytes.get(at..at + 4)? != b"PK\x01\x02" {
            return None;
        }
        let flags = short(bytes, at + 8)?;
        let (name, extra, comment) = (short(bytes, at + 28)?, short(bytes, at + 30)?, short(bytes, at + 32)?);
        let extras = bytes.get(at + 46 + name..at + 46 + name + extra)?;
        let mut sizes = [word(bytes, at + 24)?, word(bytes, at + 20)?, word(bytes, at + 42)?].map(u64::from);
        long_sizes(&mut sizes, extras);
        let entry = Entry {
            name: String::from_utf8_lossy(bytes.get(at + 46..at + 46 + name)?).into_owned(),
            is_locked: flags & 1 == 1,
            method: short(bytes, at + 10)? as u16,
            check: word(bytes, at + 16)?,
            unpacked: usize::try_from(sizes[0]).ok()?,
            packed: usize::try_from(sizes[1]).ok()?,
            start: usize::try_from(sizes[2]).ok()?,
        };
        Some((entry, at + 46 + name + extra + comment))
    }
}

/// Sizes that did not fit stand in a field of their own (kind 1), in the same order.
fn long_sizes(sizes: &mut [u64; 3], mut extras: &[u8]) {
    while let (Some(kind), Some(length)) = (short(extras, 0), short(extras, 2)) {
        let Some(field) = extras.get(4..4 + length) else { return };
        if kind == 1 {
            let mut values = field.chunks_exact(8);
            for size in sizes.iter_mut().filter(|size| **size == u64::from(u32::MAX)) {
                let Some(value) = values.next() else { return };
                *size = value.iter().rev().fold(0, |sum, &byte| sum << 8 | u64::from(byte));
            }
        }
        extras = &extras[4 + length..];
    }
}

fn short(bytes: &[u8], at: usize) -> Option<usize> {
    let [a, b] = *bytes.get(at..at.checked_add(2)?)? else { return None };
    Some(usize::from(u16::from_le_bytes([a, b])))
}

fn word(bytes: &[u8], at: usize) -> Option<u32> {
    let [a, b, c, d] = *bytes.get(at..at.checked_add(4)?)? else { return None };
    Some(u32::from_le_bytes([a, b, c, d]))
}

/// CRC-32 with the polynomial of ISO 3309, bits reversed.
pub(super) fn crc(bytes: &[u8]) -> u32 {
    let table: [u32; 256] = std::array::from_fn(|index| {
        (0..8).fold(index as u32, |value, _| if value & 1 == 1 { 0xEDB8_8320 ^ (value >> 1) } else { value >> 1 })
    });
    !bytes.iter().fold(!0, |sum, &byte| table[usize::from(sum as u8 ^ byte)] ^ (sum >> 8))
}
