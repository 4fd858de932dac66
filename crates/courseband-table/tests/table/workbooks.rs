//! Workbooks as libraries write them (`tests/workbooks/make.py`), read like the same table as text.

use crate::common::dump;
use courseband_table::{Request, Table, Workbook};
use std::path::Path;

fn file(name: &str) -> Vec<u8> {
    std::fs::read(Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/workbooks").join(name)).expect("a workbook")
}

fn subjects(table: &Table) -> String {
    let reading = table.observe(&Request::default()).expect("a reading");
    dump(&reading).lines().filter(|line| line.starts_with("  ")).collect::<Vec<_>>().join("\n")
}

const TEXT: &str = "plant,sowing,date,height (cm)\n";

/// The table that the generator writes, as text.
fn text() -> String {
    let mut text = TEXT.to_string();
    for plant in 0..6 {
        for week in 0..4 {
            let (sowing, growth) = if plant % 2 == 1 { ("late", 1.5) } else { ("early", 2.25) };
            let height =
                10.0 + f64::from(plant) * 0.5 + f64::from(week) * growth + f64::from((plant * 7 + week * 3) % 5) * 0.1;
            let date = ["2024-03-04", "2024-03-11", "2024-03-18", "2024-03-25"][week as usize];
            text.push_str(&format!("p{plant},{sowing},{date},{:.2}\n", height));
        }
    }
    text
}

#[test]
fn both_kinds_give_what_the_text_gives() {
    let expected = subjects(&Table::read(text().as_bytes()).expect("a table"));
    assert!(expected.contains("p5 [late]: 0=12.5@22 7=14.3@23"), "{expected}");
    for name in ["plants.xlsx", "plants.ods"] {
        let table = Table::read(&file(name)).expect("a table");
        assert_eq!(subjects(&table), expected, "{name}");
        assert_eq!(table.sheet().place(), Some(("Long & plain", "A1 to D25")), "{name}");
    }
}

#[test]
fn merged_heads_of_a_named_sheet_are_read_as_in_text() {
    let book = Workbook::open(&file("plants.xlsx")).expect("opens").expect("a workbook");
    assert_eq!(book.sheets(), ["About", "Long & plain", "Wide"]);
    let table = book.table(Some("Wide"), Some("A1:G6")).expect("a table");
    let told = subjects(&table);
    assert!(told.contains("p2 [early]: 0=11.4@3 1=13.45@4") && told.contains("p5 [late]: 0=12.5@3"), "{told}");
    let whole = book.table(Some("Wide"), None).expect("a table");
    let notes = whole.observe(&Request::default()).map(|reading| reading.notes.join(" ")).unwrap_or_default();
    assert!(notes.contains("1 formula has no stored value"), "{notes}");
}
