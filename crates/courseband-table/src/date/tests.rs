//! Reading of date: cases in memory.

use super::*;

#[test]
fn days_since_1970() {
    // Checked against Python's datetime.date.toordinal (3.11).
    for (year, month, day, expected) in [
        (1970, 1, 1, 0),
        (2000, 2, 29, 11_016),
        (2024, 3, 5, 19_787),
        (1900, 3, 1, -25_508),
        (2100, 3, 1, 47_541),
        (1, 1, 1, -719_162),
    ] {
        assert_eq!(days_from_civil(year, month, day), Some(expected), "{year}-{month}-{day}");
    }
    for (year, month, day) in [(2023, 2, 29), (1900, 2, 29), (2024, 4, 31), (2024, 13, 1), (2024, 0, 1), (2024, 1, 0)] {
        assert_eq!(days_from_civil(year, month, day), None, "{year}-{month}-{day}");
    }
}

#[test]
fn dates_as_people_write_them() {
    for cell in [
        "2024-03-05",
        "2024/3/5",
        "2024.03.05",
        "5.3.2024",
        "05.03.24",
        "5 Mar 2024",
        "05-Mar-24",
        "March 5, 2024",
        "5th March 2024",
        "2024-03-05T00:00",
        "2024-03-05 00:00:00",
        "2024-03-05 12:00 AM",
    ] {
        assert_eq!(read_date(cell), Some(WrittenDate::Known(19_787.0)), "{cell}");
    }
    assert_eq!(read_date("2024-03-05 18:00"), Some(WrittenDate::Known(19_787.75)));
    assert_eq!(read_date("2024-03-05 6:00 pm"), Some(WrittenDate::Known(19_787.75)));
    for cell in [
        "",
        "2024",
        "2024-03",
        "2024-02-30",
        "5.13.2024",
        "32/1/2024",
        "13/13/2024",
        "1.2.3",
        "2024-03-05 25:00",
        "12:30",
        "day 7 of 9",
    ] {
        assert_eq!(read_date(cell), None, "{cell}");
    }
}

#[test]
fn day_and_month_first() {
    let date = read_date("3/4/2024").expect("a date");
    assert_eq!(date.days(DateOrder::DayFirst), Some(19_816.0));
    assert_eq!(date.days(DateOrder::MonthFirst), Some(19_786.0));
    let only_day = read_date("25/4/2024").expect("a date");
    assert_eq!(only_day.days(DateOrder::MonthFirst), None);
}
