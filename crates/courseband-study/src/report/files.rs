//! The report's tables as a workbook.

use super::ReportTable;
use courseband_table::{WrittenSheet, write_workbook};

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
