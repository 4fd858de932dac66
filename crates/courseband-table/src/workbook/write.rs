//! A workbook written: sheets of text and number cells, as ECMA-376 (Office Open XML) has them, from memory.
//!
//! There are no formulas: a text stays text whatever it begins with. Entries are stored, not deflated, without
//! dates, so that the same cells give the same bytes.

use super::archive::crc;

/// Most letters of a cell and of a sheet's name.
const MOST_LETTERS: usize = 32_767;
const MOST_OF_NAME: usize = 31;
/// Styles: plain text, text that is kept text when it is edited, heads, then numbers by their decimals.
const KEPT: usize = 1;
const HEAD: usize = 2;
const FIRST_NUMBER: usize = 3;
const MOST_DECIMALS: usize = 12;

/// A sheet: its first row are heads, and stays in sight.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct WrittenSheet {
    /// Name; shortened and told apart where needed.
    pub name: String,
    /// Heads of the columns.
    pub heads: Vec<String>,
    /// Rows of cells as printed. A plain number becomes a number with the decimals it is printed with, in all columns
    /// but those of `labels`.
    pub rows: Vec<Vec<String>>,
    /// Columns that are names: a group called `2` stays a text.
    pub labels: Vec<usize>,
}

/// The bytes of an `.xlsx` file.
#[must_use]
pub fn write_workbook(sheets: &[WrittenSheet]) -> Vec<u8> {
    let mut names: Vec<String> = Vec::new();
    for sheet in sheets {
        names.push(free_name(&sheet.name, &names));
    }
    let mut parts = vec![
        ("[Content_Types].xml".to_string(), content_types(sheets.len())),
        ("_rels/.rels".to_string(), relations(&[("officeDocument", "xl/workbook.xml".into())])),
        ("xl/workbook.xml".to_string(), book(&names)),
        ("xl/_rels/workbook.xml.rels".to_string(), book_relations(sheets.len())),
        ("xl/styles.xml".to_string(), styles()),
    ];
    for (k, sheet) in sheets.iter().enumerate() {
        parts.push((format!("xl/worksheets/sheet{}.xml", k + 1), sheet_text(sheet)));
    }
    let parts: Vec<(String, Vec<u8>)> = parts.into_iter().map(|(name, text)| (name, text.into_bytes())).collect();
    packed(&parts)
}

pub(super) const START: &str = "<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n";
const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
const OFFICE: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const PACKAGE: &str = "http://schemas.openxmlformats.org/package/2006";

fn content_types(sheets: usize) -> String {
    let kind = "application/vnd.openxmlformats-officedocument.spreadsheetml";
    let mut text = format!(
        "{START}<Types xmlns=\"{PACKAGE}/content-types\">\
         <Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/>\
         <Default Extension=\"xml\" ContentType=\"application/xml\"/>\
         <Override PartName=\"/xl/workbook.xml\" ContentType=\"{kind}.sheet.main+xml\"/>\
         <Override PartName=\"/xl/styles.xml\" ContentType=\"{kind}.styles+xml\"/>"
    );
    for k in 1..=sheets {
        text += &format!("<Override PartName=\"/xl/worksheets/sheet{k}.xml\" ContentType=\"{kind}.worksheet+xml\"/>");
    }
    text + "</Types>"
}

fn relations(list: &[(&str, String)]) -> String {
    let mut text = format!("{START}<Relationships xmlns=\"{PACKAGE}/relationships\">");
    for (k, (kind, target)) in list.iter().enumerate() {
        text += &format!("<Relationship Id=\"rId{}\" Type=\"{OFFICE}/{kind}\" Target=\"{target}\"/>", k + 1);
    }
    text + "</Relationships>"
}

fn book_relations(sheets: usize) -> String {
    let mut list: Vec<(&str, String)> =
        (1..=sheets).map(|k| ("worksheet", format!("worksheets/sheet{k}.xml"))).collect();
    list.push(("styles", "styles.xml".into()));
    relations(&list)
}

fn book(names: &[String]) -> String {
    let mut text = format!("{START}<workbook xmlns=\"{MAIN}\" xmlns:r=\"{OFFICE}\"><sheets>");
    for (k, name) in names.iter().enumerate() {
        text += &format!("<sheet name=\"{}\" sheetId=\"{1}\" r:id=\"rId{1}\"/>", escaped(name), k + 1);
    }
    text + "</sheets></workbook>"
}

fn styles() -> String {
    let mut formats = String::new();
    let mut cells = String::from(
        "<xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\" xfId=\"0\"/>\
         <xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\" xfId=\"0\" quotePrefix=\"1\"/>\
         <xf numFmtId=\"0\" fontId=\"1\" fillId=\"0\" borderId=\"0\" xfId=\"0\" applyFont=\"1\"/>",
    );
    for decimals in 0..=MOST_DECIMALS {
        let id = 164 + decimals;
        let point = if decimals > 0 { "." } else { "" };
        formats += &format!("<numFmt numFmtId=\"{id}\" formatCode=\"0{point}{}\"/>", "0".repeat(decimals));
        cells += &format!(
            "<xf numFmtId=\"{id}\" fontId=\"0\" fillId=\"0\" borderId=\"0\" xfId=\"0\" applyNumberFormat=\"1\"/>"
        );
    }
    let count = MOST_DECIMALS + 1;
    let font = "<sz val=\"11\"/><name val=\"Calibri\"/><family val=\"2\"/>";
    format!(
        "{START}<styleSheet xmlns=\"{MAIN}\"><numFmts count=\"{count}\">{formats}</numFmts>\
         <fonts count=\"2\"><font>{font}</font><font><b/>{font}</font></fonts>\
         <fills count=\"2\"><fill><patternFill patternType=\"none\"/></fill><fill><patternFill patternType=\"gray125\"/></fill></fills>\
         <borders count=\"1\"><border><left/><right/><top/><bottom/><diagonal/></border></borders>\
         <cellStyleXfs count=\"1\"><xf numFmtId=\"0\" fontId=\"0\" fillId=\"0\" borderId=\"0\"/></cellStyleXfs>\
         <cellXfs count=\"{}\">{cells}</cellXfs>\
         <cellStyles count=\"1\"><cellStyle name=\"Normal\" xfId=\"0\" builtinId=\"0\"/></cellStyles></styleSheet>",
        FIRST_NUMBER + count
    )
}

fn sheet_text(sheet: &WrittenSheet) -> String {
    let mut text = format!(
        "{START}<worksheet xmlns=\"{MAIN}\"><sheetViews><sheetView workbookViewId=\"0\">\
         <pane ySplit=\"1\" topLeftCell=\"A2\" activePane=\"bottomLeft\" state=\"frozen\"/></sheetView></sheetViews><cols>"
    );
    for column in 0..sheet.heads.len() {
        let cells = sheet.rows.iter().filter_map(|row| row.get(column)).chain([&sheet.heads[column]]);
        let width = cells.map(|cell| cell.chars().count()).max().unwrap_or(0).clamp(6, 70) + 2;
        text += &format!("<col min=\"{0}\" max=\"{0}\" width=\"{width}\" customWidth=\"1\"/>", column + 1);
    }
    text += "</cols><sheetData>";
    row_text(&mut text, 1, sheet.heads.iter().map(|head| text_cell(head, HEAD)));
    for (k, row) in sheet.rows.iter().enumerate() {
        let cell = |(column, cell): (usize, &String)| match number_of(cell) {
            Some((value, decimals)) if !sheet.labels.contains(&column) => {
                (format!(" s=\"{}\"", FIRST_NUMBER + decimals), format!("<v>{value}</v>"))
            }
            _ => text_cell(cell, usize::from(cell.starts_with(['=', '+', '-', '@', '\t', '\r'])) * KEPT),
        };
        row_text(&mut text, k + 2, row.iter().enumerate().map(cell));
    }
    text + "</sheetData></worksheet>"
}

fn row_text(text: &mut String, row: usize, cells: impl Iterator<Item = (String, String)>) {
    *text += &format!("<row r=\"{row}\">");
    for (column, (attributes, content)) in cells.enumerate() {
        *text += &format!("<c r=\"{}{row}\"{attributes}>{content}</c>", letters(column));
    }
    *text += "</row>";
}

/// Attributes and content of a cell that is text.
fn text_cell(cell: &str, style: usize) -> (String, String) {
    let content = format!("<is><t xml:space=\"preserve\">{}</t></is>", escaped(cell));
    (format!(" s=\"{style}\" t=\"inlineStr\""), content)
}

/// A plain number as printed, with its decimals; no number for what merely looks like one, such as `007`.
fn number_of(cell: &str) -> Option<(String, usize)> {
    let (sign, rest) = match cell.strip_prefix(['-', '\u{2212}']) {
        Some(rest) => ("-", rest),
        None => ("", cell),
    };
    let (whole, part) = rest.split_once('.').map_or((rest, None), |(whole, part)| (whole, Some(part)));
    let digits = |text: &str| !text.is_empty() && text.bytes().all(|byte| byte.is_ascii_digit());
    let fits = digits(whole) && (whole == "0" || !whole.starts_with('0')) && part.is_none_or(digits);
    let decimals = part.map_or(0, str::len);
    (fits && whole.len() + decimals <= 15 && decimals <= MOST_DECIMALS).then(|| (format!("{sign}{rest}"), decimals))
}

/// A, B ... Z, AA ...
fn letters(column: usize) -> String {
    let last = char::from(b'A' + (column % 26) as u8);
    if column < 26 { last.to_string() } else { format!("{}{last}", letters(column / 26 - 1)) }
}

/// A name that a sheet may have and no other has.
fn free_name(wanted: &str, taken: &[String]) -> String {
    let allowed = |c: char| if "[]:*?/\\'".contains(c) || c.is_control() { ' ' } else { c };
    let plain: String = wanted.chars().map(allowed).collect();
    let plain = if plain.trim().is_empty() { "Sheet" } else { plain.trim() };
    for k in 1.. {
        let end = if k == 1 { String::new() } else { format!(" {k}") };
        let name: String = plain.chars().take(MOST_OF_NAME - end.len()).chain(end.chars()).collect();
        if !taken.iter().any(|other| other.to_lowercase() == name.to_lowercase()) {
            return name;
        }
    }
    plain.into()
}

/// As XML writes it; letters that XML cannot hold are shown as missing.
pub(super) fn escaped(text: &str) -> String {
    let mut out = String::new();
    for letter in text.chars().take(MOST_LETTERS) {
        match letter {
            '&' => out += "&amp;",
            '<' => out += "&lt;",
            '>' => out += "&gt;",
            '"' => out += "&quot;",
            '\t' | '\n' => out.push(letter),
            '\r' => out += "&#13;",
            '\u{fffe}' | '\u{ffff}' => out.push('\u{fffd}'),
            control if control.is_ascii_control() => out.push('\u{fffd}'),
            other => out.push(other),
        }
    }
    out
}

/// A packed file with its entries stored. The layout is that of PKWARE's APPNOTE 6.3 (from memory).
pub(super) fn packed(parts: &[(String, Vec<u8>)]) -> Vec<u8> {
    let (mut bytes, mut list) = (Vec::new(), Vec::new());
    for (name, part) in parts {
        let start = bytes.len() as u32;
        let size = (part.len() as u32).to_le_bytes();
        let check = crc(part).to_le_bytes();
        let length = (name.len() as u16).to_le_bytes();
        // Version 2.0, names in UTF-8, stored, midnight of 1 January 1980.
        let middle = [&[20, 0, 0, 8, 0, 0, 0, 0, 33, 0][..], &check, &size, &size, &length, &[0, 0]].concat();
        bytes.extend([b"PK\x03\x04", &middle[..], name.as_bytes(), part].concat());
        list.extend([b"PK\x01\x02", &[20, 0][..], &middle, &[0; 10], &start.to_le_bytes(), name.as_bytes()].concat());
    }
    let (count, at) = ((parts.len() as u16).to_le_bytes(), (bytes.len() as u32).to_le_bytes());
    let size = (list.len() as u32).to_le_bytes();
    bytes.extend(list);
    bytes.extend([b"PK\x05\x06", &[0, 0, 0, 0][..], &count, &count, &size, &at, &[0, 0]].concat());
    bytes
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::workbook::Workbook;

    fn sheet(name: &str, rows: &[[&str; 3]]) -> WrittenSheet {
        let own = |row: &[&str; 3]| row.iter().map(|cell| (*cell).to_string()).collect();
        WrittenSheet {
            name: name.into(),
            heads: own(&["group", "x", "note"]),
            rows: rows.iter().map(own).collect(),
            labels: vec![0],
        }
    }

    #[test]
    fn what_is_written_is_read_back() {
        let rows = [["1", "\u{2212}3.20", "=1+1"], ["a & <b>", "12", "007"], ["@x \"y\"", "\u{2013}", "\u{1}z"]];
        let bytes = write_workbook(&[sheet("One: first", &rows), sheet("one  first", &rows[..1])]);
        assert_eq!(bytes, write_workbook(&[sheet("One: first", &rows), sheet("one  first", &rows[..1])]));
        let book = Workbook::open(&bytes).unwrap().unwrap();
        assert_eq!(book.sheets(), ["One  first", "one  first 2"]);
        let back = book.read(Some("One  first"), None).unwrap();
        let line = |k: usize| back.cells(k).map(str::to_string).collect::<Vec<_>>();
        assert_eq!(line(0), ["group", "x", "note"]);
        assert_eq!(line(1), ["1", "-3.2", "=1+1"]);
        assert_eq!(line(2), ["a & <b>", "12", "007"]);
        assert_eq!(line(3), ["@x \"y\"", "\u{2013}", "\u{fffd}z"]);
    }

    #[test]
    fn no_cell_is_a_formula_and_only_plain_numbers_are_numbers() {
        let text = sheet_text(&sheet("s", &[["1", "0.50", "=cmd()"], ["2", "1e5", "-x"]]));
        assert!(!text.contains("<f"), "{text}");
        assert!(text.contains("<c r=\"A2\" s=\"0\" t=\"inlineStr\">"), "a name stays text: {text}");
        assert!(text.contains(&format!("<c r=\"B2\" s=\"{}\"><v>0.50</v></c>", FIRST_NUMBER + 2)), "{text}");
        assert!(text.contains("<c r=\"C2\" s=\"1\" t=\"inlineStr\">"), "kept text when edited: {text}");
        assert_eq!(number_of("1e5"), None);
        assert_eq!(number_of("00.5"), None);
        assert_eq!(number_of("-"), None);
        assert_eq!(number_of("1234567890123456"), None);
        assert_eq!(letters(27), "AB");
    }
}
