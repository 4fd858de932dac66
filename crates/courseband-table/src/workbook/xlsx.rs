//! Workbooks in Office Open XML (`.xlsx`, `.xlsm`).

use super::archive::Archive;
use super::damaged;
use super::grid::{Grid, column_number};
use super::values::{Look, built_in, day_text, look_of, number_text};
use super::xml::{Stream, Tag, Token};
use crate::error::TableError;
use std::collections::HashMap;

/// A workbook, unpacked sheet by sheet.
#[derive(Debug, Clone)]
pub(super) struct Xlsx {
    archive: Archive,
    /// Part of each sheet.
    parts: Vec<String>,
    shared: Vec<String>,
    /// What each cell style shows.
    looks: Vec<Look>,
    since_1904: bool,
}

/// Parts that one refers to: id, last word of the kind, place.
type Relations = Vec<(String, String, String)>;

impl Xlsx {
    /// Opens the workbook; gives the names of its sheets too.
    pub(super) fn open(archive: Archive) -> Result<(Xlsx, Vec<String>), TableError> {
        let top = relations(&archive, "")?;
        let book = top.iter().find(|(_, kind, _)| kind == "officeDocument").map(|(_, _, place)| place.clone());
        let book = book.unwrap_or_else(|| "xl/workbook.xml".to_string());
        let text = archive.text(&book)?.ok_or_else(|| damaged("it has no list of sheets"))?;
        let related = relations(&archive, &book)?;
        let mut xlsx = Xlsx { archive, parts: Vec::new(), shared: Vec::new(), looks: Vec::new(), since_1904: false };
        let mut names = Vec::new();
        let mut stream = Stream::new(&text, &book);
        loop {
            match stream.next()? {
                Token::Open(tag) if tag.name() == "sheet" => {
                    let id = tag.attribute("id").unwrap_or_default();
                    let part = related.iter().find(|(known, kind, _)| *known == id && kind == "worksheet");
                    if let Some((_, _, place)) = part {
                        xlsx.parts.push(place.clone());
                        names.push(tag.attribute("name").unwrap_or_default());
                    }
                }
                Token::Open(tag) if tag.name() == "workbookPr" => {
                    xlsx.since_1904 = tag.attribute("date1904").is_some_and(|flag| flag == "1" || flag == "true");
                }
                Token::End => break,
                _ => {}
            }
        }
        let part = |kind: &str| related.iter().find(|(_, known, _)| known == kind).map(|(_, _, place)| place.as_str());
        if let Some(text) = part("sharedStrings").map(|place| xlsx.archive.text(place)).transpose()?.flatten() {
            xlsx.shared = shared_strings(&text)?;
        }
        if let Some(text) = part("styles").map(|place| xlsx.archive.text(place)).transpose()?.flatten() {
            xlsx.looks = looks(&text)?;
        }
        Ok((xlsx, names))
    }

    /// Puts the cells of a sheet into the grid.
    pub(super) fn fill(&self, at: usize, grid: &mut Grid) -> Result<(), TableError> {
        let part = &self.parts[at];
        let text = self.archive.text(part)?.ok_or_else(|| damaged(&format!("its part {part} is missing")))?;
        let mut stream = Stream::new(&text, part);
        let (mut next_row, mut next_column, mut hidden) = (0usize, 0, false);
        loop {
            match stream.next()? {
                Token::Open(tag) if tag.name() == "row" => {
                    // Rows ascend; a number that does not is passed over.
                    let row = tag.count("r").and_then(|row| row.checked_sub(1)).unwrap_or(next_row).max(next_row);
                    if grid.is_past(row) {
                        return Ok(());
                    }
                    (next_row, next_column) = (row.saturating_add(1), 0);
                    hidden = tag.attribute("hidden").is_some_and(|flag| flag == "1" || flag == "true");
                    grid.start(row);
                }
                Token::Close(name) if name == "row" => {
                    grid.hidden += usize::from(grid.end_row()? && hidden);
                }
                Token::Open(tag) if tag.name() == "c" => {
                    let place = tag
                        .attribute("r")
                        .and_then(|place| column_number(place.trim_end_matches(|c: char| c.is_ascii_digit())));
                    let column = place.unwrap_or(next_column);
                    next_column = column + 1;
                    let value = self.cell(&mut stream, &tag, grid)?;
                    grid.put(column, value)?;
                }
                Token::End => return Ok(()),
                _ => {}
            }
        }
    }

    /// The value of a cell, as text.
    fn cell(&self, stream: &mut Stream<'_>, tag: &Tag<'_>, grid: &mut Grid) -> Result<String, TableError> {
        let kind = tag.attribute("t").unwrap_or_default();
        let look = tag.count("s").and_then(|style| self.looks.get(style)).copied().unwrap_or(Look::Number);
        let (mut value, mut inside, mut has_formula) = (String::new(), 0, false);
        loop {
            match stream.next()? {
                Token::Open(tag) => match tag.name().as_str() {
                    "v" | "t" => inside += 1,
                    "f" => has_formula = true,
                    // How a word is spoken.
                    "rPh" => skip(stream, "rPh")?,
                    _ => {}
                },
                Token::Text(text) if inside > 0 => value.push_str(&text),
                Token::Text(_) => {}
                Token::Close(name) if name == "v" || name == "t" => inside -= 1,
                Token::Close(name) if name == "c" => break,
                Token::Close(_) => {}
                Token::End => return Err(stream.broken()),
            }
        }
        // A formula whose stored value is an empty text says so.
        grid.unstored += usize::from(has_formula && value.is_empty() && kind != "str");
        Ok(match kind.as_str() {
            "s" => value.trim().parse().ok().and_then(|at: usize| self.shared.get(at).cloned()).unwrap_or_default(),
            "b" => if value.trim() == "1" { "TRUE" } else { "FALSE" }.to_string(),
            "d" => value.trim().trim_end_matches("T00:00:00").to_string(),
            "" | "n" => match value.trim().parse::<f64>() {
                Ok(number) => day_text(number, look, self.since_1904).unwrap_or_else(|| number_text(number)),
                Err(_) => value,
            },
            _ => value,
        })
    }
}

/// Passes over an element that is open.
fn skip(stream: &mut Stream<'_>, name: &str) -> Result<(), TableError> {
    loop {
        match stream.next()? {
            Token::Close(closed) if closed == name => return Ok(()),
            Token::End => return Err(stream.broken()),
            _ => {}
        }
    }
}

/// What a part refers to; the empty name stands for the whole file.
fn relations(archive: &Archive, part: &str) -> Result<Relations, TableError> {
    let (folder, file) = part.rsplit_once('/').map_or(("", part), |(folder, file)| (folder, file));
    let slash = if folder.is_empty() { "" } else { "/" };
    let place = format!("{folder}{slash}_rels/{file}.rels");
    let Some(text) = archive.text(&place)? else { return Ok(Vec::new()) };
    let mut found = Vec::new();
    let mut stream = Stream::new(&text, &place);
    loop {
        match stream.next()? {
            Token::Open(tag) if tag.name() == "Relationship" => {
                let (id, kind, target) = (tag.attribute("Id"), tag.attribute("Type"), tag.attribute("Target"));
                if let (Some(id), Some(kind), Some(target)) = (id, kind, target) {
                    let kind = kind.rsplit('/').next().unwrap_or_default().to_string();
                    found.push((id, kind, resolved(folder, &target)));
                }
            }
            Token::End => return Ok(found),
            _ => {}
        }
    }
}

/// A place given from a folder: `worksheets/sheet1.xml`, `../a.xml`, `/xl/a.xml`.
fn resolved(folder: &str, target: &str) -> String {
    let mut parts: Vec<&str> = match target.starts_with('/') {
        true => Vec::new(),
        false => folder.split('/').filter(|part| !part.is_empty()).collect(),
    };
    for part in target.split('/') {
        match part {
            "" | "." => {}
            ".." => {
                parts.pop();
            }
            part => parts.push(part),
        }
    }
    parts.join("/")
}

fn shared_strings(text: &str) -> Result<Vec<String>, TableError> {
    let mut stream = Stream::new(text, "of texts");
    let mut strings = Vec::new();
    let (mut current, mut inside) = (String::new(), false);
    loop {
        match stream.next()? {
            Token::Open(tag) => match tag.name().as_str() {
                "si" => current.clear(),
                "t" => inside = true,
                "rPh" => skip(&mut stream, "rPh")?,
                _ => {}
            },
            Token::Text(text) if inside => current.push_str(&text),
            Token::Text(_) => {}
            Token::Close(name) => match name.as_str() {
                "t" => inside = false,
                "si" => strings.push(std::mem::take(&mut current)),
                _ => {}
            },
            Token::End => return Ok(strings),
        }
    }
}

/// What each cell style shows.
fn looks(text: &str) -> Result<Vec<Look>, TableError> {
    let mut stream = Stream::new(text, "of styles");
    let mut formats: HashMap<usize, Look> = HashMap::new();
    let mut looks = Vec::new();
    let mut in_cells = false;
    loop {
        match stream.next()? {
            Token::Open(tag) => match tag.name().as_str() {
                "numFmt" => {
                    if let (Some(id), Some(code)) = (tag.count("numFmtId"), tag.attribute("formatCode")) {
                        formats.insert(id, look_of(&code));
                    }
                }
                "cellXfs" => in_cells = true,
                "xf" if in_cells => {
                    let id = tag.count("numFmtId").unwrap_or(0);
                    looks.push(formats.get(&id).copied().unwrap_or_else(|| built_in(id)));
                }
                _ => {}
            },
            Token::Close(name) if name == "cellXfs" => in_cells = false,
            Token::End => return Ok(looks),
            _ => {}
        }
    }
}
