//! Reading of time: cases in memory.

use super::*;

fn told(cell: &str) -> String {
    match read_time(cell, Decimal::Point) {
        Some(WrittenTime::Number(value)) => format!("{value}"),
        Some(WrittenTime::WithUnit(value, unit)) => format!("{value} {}", unit.word()),
        Some(WrittenTime::Dashed(value, unit)) => format!("dash {value} {}", unit.word()),
        Some(WrittenTime::Date(_)) => "date".to_string(),
        None => "none".to_string(),
    }
}

#[test]
fn times_as_people_write_them() {
    for (cell, expected) in [
        ("7", "7"),
        ("-1.5", "-1.5"),
        ("day 7", "7 day"),
        ("Day7", "7 day"),
        ("D 7", "7 day"),
        ("day -1", "-1 day"),
        ("d-1", "dash 1 day"),
        ("day_7", "7 day"),
        ("week 2.5", "2.5 week"),
        ("7 d", "7 day"),
        ("24h", "24 hour"),
        ("3 months", "3 month"),
        ("visit 3", "3 visit"),
        ("t0", "0"),
        ("T 12", "12"),
        ("Baseline", "0"),
        ("2024-03-05", "date"),
        ("seven", "none"),
        ("dose 7", "none"),
        ("7 mg", "none"),
        ("", "none"),
        ("NA", "none"),
        ("inf", "none"),
    ] {
        assert_eq!(told(cell), expected, "{cell:?}");
    }
}

fn column(cells: &[&str], unit: Option<Unit>) -> Result<Times, TableError> {
    let cells = cells.iter().enumerate().map(|(at, text)| TimeCell { text, line: at + 2 });
    read_times(cells, "when", Decimal::Point, unit, None)
}

#[test]
fn units_of_one_column_are_converted() {
    let times = column(&["hour 12", "day 1", "week 1"], None).expect("times");
    assert_eq!((times.values, times.unit), (vec![12.0, 24.0, 168.0], Some(Unit::Hour)));
    assert!(times.note.is_some());
    let times = column(&["0", "day 7", "14"], Some(Unit::Day)).expect("times");
    assert_eq!(times.values, [0.0, 7.0, 14.0]);
    let times = column(&["day-0", "day-7"], None).expect("times");
    assert_eq!(times.values, [0.0, 7.0]);
    let times = column(&["day-7", "day 0", "day 7"], None).expect("times");
    assert_eq!(times.values, [-7.0, 0.0, 7.0]);
}

#[test]
fn what_cannot_be_converted_is_refused() {
    assert!(matches!(column(&["day 1", "7"], None), Err(TableError::MixedUnits { .. })));
    assert!(matches!(column(&["day 1", "month 1"], None), Err(TableError::MixedUnits { .. })));
    match column(&["1", "2", "soon"], None) {
        Err(TableError::Cell { row, value, .. }) => assert_eq!((row, value.as_str()), (4, "soon")),
        other => panic!("{other:?}"),
    }
}
