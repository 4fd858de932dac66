//! Workbooks in OpenDocument (`.ods`).

use super::archive::Archive;
use super::damaged;
use super::grid::Grid;
use super::values::number_text;
use super::xml::{Stream, Tag, Token};
use crate::error::TableError;
use crate::sheet::MAX_COLUMNS;

/// A filled row is repeated at most so often: no table repeats its rows, but a fill may.
const MAX_REPEATS: usize = 100_000;

/// A workbook: the part with all sheets.
#[derive(Debug, Clone)]
pub(super) struct Ods {
    content: String,
}

/// A cell as read, and in how many columns it stands.
struct Cell {
    text: String,
    columns: usize,
}

impl Ods {
    /// Opens the workbook; gives the names of its sheets too.
    pub(super) fn open(archive: &Archive) -> Result<(Ods, Vec<String>), TableError> {
        // The parts of a protected workbook are named in the manifest.
        let manifest = archive.text("META-INF/manifest.xml")?.unwrap_or_default();
        if manifest.contains("encryption-data") {
            return Err(TableError::LockedWorkbook);
        }
        let content = archive.text("content.xml")?.ok_or_else(|| damaged("it has no content"))?;
        let mut names = Vec::new();
        let mut stream = Stream::new(&content, "content.xml");
        let mut is_spreadsheet = false;
        let mut depth = 0;
        loop {
            match stream.next()? {
                Token::Open(tag) => match tag.name().as_str() {
                    "spreadsheet" => is_spreadsheet = true,
                    "table" => {
                        if depth == 0 {
                            names.push(tag.attribute("name").unwrap_or_default());
                        }
                        depth += 1;
                    }
                    _ => {}
                },
                Token::Close(name) if name == "table" => depth -= 1,
                Token::End => break,
                _ => {}
            }
        }
        match is_spreadsheet {
            true => Ok((Ods { content }, names)),
            false => Err(TableError::NotText { seems: "a document or slides" }),
        }
    }

    /// Puts the cells of a sheet into the grid.
    pub(super) fn fill(&self, at: usize, grid: &mut Grid) -> Result<(), TableError> {
        let mut stream = Stream::new(&self.content, "content.xml");
        let (mut seen, mut depth) = (0, 0);
        loop {
            match stream.next()? {
                Token::Open(tag) if tag.name() == "table" => {
                    depth += 1;
                    if depth == 1 && seen == at {
                        return fill_table(&mut stream, grid);
                    }
                    seen += usize::from(depth == 1);
                }
                Token::Close(name) if name == "table" => depth -= 1,
                Token::End => return Err(stream.broken()),
                _ => {}
            }
        }
    }
}

fn fill_table(stream: &mut Stream<'_>, grid: &mut Grid) -> Result<(), TableError> {
    let mut row: usize = 0;
    loop {
        match stream.next()? {
            Token::Open(tag) => match tag.name().as_str() {
                "table-row" => {
                    if grid.is_past(row) {
                        return Ok(());
                    }
                    row = row.saturating_add(fill_row(stream, &tag, row, grid)?);
                }
                // Drawings and notes beside the cells.
                "shapes" | "forms" => skip(stream, &tag.name())?,
                _ => {}
            },
            Token::Close(name) if name == "table" => return Ok(()),
            Token::End => return Err(stream.broken()),
            Token::Close(_) | Token::Text(_) => {}
        }
    }
}

/// Fills one row; returns how many rows it stands for.
fn fill_row(stream: &mut Stream<'_>, tag: &Tag<'_>, row: usize, grid: &mut Grid) -> Result<usize, TableError> {
    let repeats = tag.count("number-rows-repeated").unwrap_or(1).max(1);
    let hidden = tag.attribute("visibility").is_some_and(|word| word != "visible");
    grid.start(row);
    let mut column: usize = 0;
    loop {
        match stream.next()? {
            Token::Open(tag) => match tag.name().as_str() {
                "table-cell" | "covered-table-cell" => {
                    let cell = cell(stream, &tag, grid)?;
                    // What is blank may go on to the last column there can be.
                    let filled = if cell.text.is_empty() { 0 } else { cell.columns };
                    for at in 0..filled.min(MAX_COLUMNS + 1) {
                        grid.put(column.saturating_add(at), cell.text.clone())?;
                    }
                    column = column.saturating_add(cell.columns);
                }
                other => skip(stream, other)?,
            },
            Token::Close(name) if name == "table-row" => break,
            Token::End => return Err(stream.broken()),
            Token::Close(_) | Token::Text(_) => {}
        }
    }
    let filled = grid.end_row()?;
    grid.hidden += usize::from(filled && hidden);
    if filled {
        if repeats > MAX_REPEATS {
            return Err(TableError::TooLarge { what: format!("row {} is repeated {repeats} times", row + 1) });
        }
        for more in 1..repeats {
            grid.repeat(row.saturating_add(more))?;
        }
    }
    Ok(repeats)
}

fn cell(stream: &mut Stream<'_>, tag: &Tag<'_>, grid: &mut Grid) -> Result<Cell, TableError> {
    let name = tag.name();
    let columns = tag.count("number-columns-repeated").unwrap_or(1).max(1);
    let kind = tag.attribute("value-type").unwrap_or_default();
    let value = match kind.as_str() {
        "float" | "percentage" | "currency" => tag.attribute("value").map(|text| match text.trim().parse::<f64>() {
            Ok(number) => number_text(number),
            Err(_) => text,
        }),
        "date" => tag.attribute("date-value").map(|text| text.trim_end_matches("T00:00:00").replace('T', " ")),
        "time" => tag.attribute("time-value").map(|text| clock(&text)),
        "boolean" => tag.attribute("boolean-value").map(|text| text.to_ascii_uppercase()),
        _ => tag.attribute("string-value"),
    };
    let has_formula = tag.attribute("formula").is_some();
    let mut text = String::new();
    let mut paragraphs = 0;
    let mut inside = 0;
    loop {
        match stream.next()? {
            Token::Open(tag) => match tag.name().as_str() {
                "p" => {
                    if paragraphs > 0 {
                        text.push('\n');
                    }
                    paragraphs += 1;
                    inside += 1;
                }
                "s" => text.push_str(&" ".repeat(tag.count("c").unwrap_or(1).min(1000))),
                "tab" | "line-break" => text.push(' '),
                // A note on the cell is no part of it.
                "annotation" => skip(stream, "annotation")?,
                _ => {}
            },
            Token::Text(more) if inside > 0 => text.push_str(&more),
            Token::Text(_) => {}
            Token::Close(closed) if closed == "p" => inside -= 1,
            Token::Close(closed) if closed == name => break,
            Token::Close(_) => {}
            Token::End => return Err(stream.broken()),
        }
    }
    grid.unstored += usize::from(has_formula && value.is_none() && text.is_empty() && kind.is_empty());
    Ok(Cell { text: value.unwrap_or(text), columns })
}

/// `PT06H30M00S` as `06:30`.
fn clock(text: &str) -> String {
    let parts: Vec<&str> = text.trim_start_matches("PT").split(['H', 'M', 'S']).collect();
    match parts.as_slice() {
        [hours, minutes, seconds, ..] if text.starts_with("PT") && !hours.is_empty() => {
            let rest = seconds.trim_start_matches('0');
            if rest.is_empty() { format!("{hours}:{minutes}") } else { format!("{hours}:{minutes}:{seconds}") }
        }
        _ => text.to_string(),
    }
}

/// Passes over an element that is open, and those of its name inside it.
fn skip(stream: &mut Stream<'_>, name: &str) -> Result<(), TableError> {
    let mut depth = 1;
    while depth > 0 {
        match stream.next()? {
            Token::Open(tag) if tag.name() == name => depth += 1,
            Token::Close(closed) if closed == name => depth -= 1,
            Token::End => return Err(stream.broken()),
            _ => {}
        }
    }
    Ok(())
}
