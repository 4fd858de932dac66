//! Reading of number: cases in memory.

use super::*;

fn told(cell: &str, decimal: Decimal) -> String {
    match number(cell, decimal) {
        Ok(value) => value.to_string(),
        Err(other) => format!("{other:?}"),
    }
}

#[test]
fn cells_under_a_decimal_point() {
    for (cell, expected) in [
        ("5", "5"),
        ("-5.25", "-5.25"),
        (" 5.25 ", "5.25"),
        ("+3", "3"),
        ("−2", "-2"),
        (".5", "0.5"),
        ("5.", "5"),
        ("1e3", "1000"),
        ("1E-2", "0.01"),
        ("1,234", "1234"),
        ("1,234.5", "1234.5"),
        ("1 234", "1234"),
        ("1\u{a0}234.5", "1234.5"),
        ("1'234'567", "1234567"),
        ("12,34", "OtherMark"),
        ("1.2.3", "Text"),
        ("--5", "Text"),
        ("5-3", "Text"),
        ("1e", "Unit(1.0, \"e\")"),
        ("1e400", "Infinite"),
        ("-∞", "Infinite"),
        ("inf", "Infinite"),
        ("nan", "Missing"),
        ("", "Missing"),
        ("Died", "Missing"),
        ("n.d.", "Text"),
        ("<0.5", "Below"),
        ("≤ 0.5", "Below"),
        (">= 500", "Above"),
        ("<low", "Text"),
        ("5 mm", "Unit(5.0, \"mm\")"),
        ("5%", "Unit(5.0, \"%\")"),
        ("3 mm²", "Unit(3.0, \"mm²\")"),
        ("6.1O", "Text"),
        ("5.1*", "Text"),
        ("0x10", "Text"),
        ("5 about", "Unit(5.0, \"about\")"),
        ("5 (about)", "Text"),
        ("1_000", "Text"),
    ] {
        assert_eq!(told(cell, Decimal::Point), expected, "{cell:?}");
    }
}

#[test]
fn cells_under_a_decimal_comma() {
    for (cell, expected) in [
        ("5", "5"),
        ("5,25", "5.25"),
        ("-0,5", "-0.5"),
        ("1.234,5", "1234.5"),
        ("1 234,5", "1234.5"),
        ("5.25", "OtherMark"),
        // 1234 or 1.234: not decided silently.
        ("1.234", "OtherMark"),
        ("1,2,3", "Text"),
        ("<0,5", "Below"),
        ("6,1 mm", "Unit(6.1, \"mm\")"),
    ] {
        assert_eq!(told(cell, Decimal::Comma), expected, "{cell:?}");
    }
}

#[test]
fn a_column_decides_its_decimal_mark() {
    let decide = |cells: &[&str], delimiter: char| {
        let mut marks = MarkEvidence::default();
        cells.iter().for_each(|cell| marks.add(cell));
        marks.decide(&marks, delimiter)
    };
    assert_eq!(decide(&["5", "6"], ';'), Decimal::Point);
    assert_eq!(decide(&["5,1", "6,2", "7.3"], ';'), Decimal::Comma);
    assert_eq!(decide(&["5.1", "6.2", "7,3"], ';'), Decimal::Point);
    assert_eq!(decide(&["1,234", "2,345"], ';'), Decimal::Comma);
    assert_eq!(decide(&["1,234", "2,345"], ','), Decimal::Point);
    assert_eq!(decide(&["0,234", "0,345"], ','), Decimal::Comma);
    assert_eq!(decide(&["1,234.5", "2,345"], ','), Decimal::Point);
    assert_eq!(decide(&["1.234,5", "2.345,6"], ','), Decimal::Comma);
}
