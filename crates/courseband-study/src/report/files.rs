//! The report's tables as a workbook, and the report as a text document.

use super::ReportTable;
use courseband_table::{Block, WrittenSheet, write_document, write_workbook};
use serde::Deserialize;

/// The bytes of an `.xlsx` file: a sheet that says what the others hold, then one sheet per table. `about` are
/// lines for the first sheet, such as that data are invented.
#[must_use]
pub fn tables_workbook(tables: &[ReportTable], about: &[String]) -> Vec<u8> {
    let row = |a: &str, b: &str| vec![a.to_string(), b.to_string()];
    let mut first = WrittenSheet {
        name: "About".into(),
        heads: row("Sheet", "What it holds"),
        rows: tables.iter().map(|table| row(&sheet_name(table), &table.title)).collect(),
        labels: vec![0, 1],
    };
    first.rows.extend(about.iter().map(|line| row("", line)));
    let sheet = |table: &ReportTable| WrittenSheet {
        name: sheet_name(table),
        heads: table.heads.clone(),
        rows: table.rows.clone(),
        labels: (0..table.heads.len()).filter(|&k| is_name(&table.heads[k])).collect(),
    };
    let sheets: Vec<WrittenSheet> = [first].into_iter().chain(tables.iter().map(sheet)).collect();
    write_workbook(&sheets)
}

fn sheet_name(table: &ReportTable) -> String {
    let mut letters = table.key.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// Columns of names, which may look like numbers.
fn is_name(head: &str) -> bool {
    matches!(head, "Group" | "Compared with" | "Subject" | "Response")
}

/// A report as it is given out, with the author's own paragraphs in place.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct GivenReport {
    /// Its title.
    pub title: String,
    /// A line under the title, such as that data are invented; may be empty.
    pub mark: String,
    /// Titles with their paragraphs, those before the figure.
    pub sections: Vec<(String, Vec<String>)>,
    /// Title of the figure, and its size in millimetres.
    pub figure: (String, f64, f64),
    /// Tables.
    pub tables: Vec<ReportTable>,
    /// Titles with their paragraphs, those after the tables.
    pub after: Vec<(String, Vec<String>)>,
    /// A last table with its title and heads, such as what reporting standards ask.
    pub items: (String, Vec<String>, Vec<Vec<String>>),
}

/// The bytes of a `.docx` file; `picture`: the figure as a PNG, or nothing.
#[must_use]
pub fn report_document(report: &GivenReport, picture: &[u8]) -> Vec<u8> {
    let mut blocks = vec![Block::Title(report.title.clone())];
    if !report.mark.is_empty() {
        blocks.push(Block::Text(report.mark.clone()));
    }
    let section = |blocks: &mut Vec<Block>, (title, paragraphs): &(String, Vec<String>)| {
        blocks.push(Block::Heading(1, title.clone()));
        blocks.extend(paragraphs.iter().cloned().map(Block::Text));
    };
    report.sections.iter().for_each(|one| section(&mut blocks, one));
    let (title, width, height) = &report.figure;
    blocks.push(Block::Heading(1, title.clone()));
    // As wide as the page allows, in proportion.
    let share = (170.0 / width).min(235.0 / height).min(1.0);
    blocks.push(Block::Picture(width * share, height * share));
    for table in &report.tables {
        blocks.push(Block::Heading(2, table.title.clone()));
        blocks.push(Block::Table(table.heads.clone(), table.rows.clone()));
    }
    report.after.iter().for_each(|one| section(&mut blocks, one));
    let (title, heads, rows) = &report.items;
    blocks.push(Block::Heading(1, title.clone()));
    blocks.push(Block::Table(heads.clone(), rows.clone()));
    write_document(&blocks, picture)
}

#[cfg(test)]
mod tests {
    use super::*;
    use courseband_table::Workbook;

    #[test]
    fn names_stay_text_and_numbers_become_numbers() {
        let table = ReportTable {
            key: "gaps".into(),
            title: "Gaps".into(),
            heads: vec!["Group".into(), "Lower".into()],
            rows: vec![vec!["7".into(), "\u{2212}0.50".into()]],
        };
        let bytes = tables_workbook(&[table], &["Invented.".into()]);
        let book = Workbook::open(&bytes).unwrap().unwrap();
        assert_eq!(book.sheets(), ["About", "Gaps"]);
        let about = book.read(Some("About"), None).unwrap();
        assert_eq!(about.cells(2).collect::<Vec<_>>(), ["", "Invented."]);
        let gaps = book.read(Some("Gaps"), None).unwrap();
        assert_eq!(gaps.cells(1).collect::<Vec<_>>(), ["7", "-0.5"]);
    }
}
