//! Encodings, and tables that nobody should have made. Nothing here may panic.

use crate::common;
use courseband_table::{ColumnRequest, LISTED_PER_KIND, Layout, ProblemKind, Request, Table, TableError, read_bytes};
use std::path::Path;

const PLAIN: &str = "subject,time,group,y\n1,0,Grün,5\n1,7,Grün,4\n2,0,Rot,5.5\n2,7,Rot,2\n";

fn told(bytes: &[u8]) -> String {
    common::told(bytes, &Request::default())
}

fn utf16(text: &str, big: bool, mark: bool) -> Vec<u8> {
    let mark = if mark { "\u{feff}" } else { "" };
    let units = format!("{mark}{text}");
    units.encode_utf16().flat_map(|unit| if big { unit.to_be_bytes() } else { unit.to_le_bytes() }).collect()
}

#[test]
fn encodings_and_line_ends_make_no_difference() {
    let expected = told(PLAIN.as_bytes());
    assert!(expected.contains("[Grün]: 0=5@2 7=4@3"), "{expected}");
    for text in [
        PLAIN.replace('\n', "\r\n"),
        PLAIN.replace('\n', "\r"),
        format!("\u{feff}{PLAIN}"),
        PLAIN.trim_end().to_string(),
    ] {
        assert_eq!(told(text.as_bytes()), expected, "{text:?}");
    }
    for (big, mark) in [(false, true), (true, true), (false, false), (true, false)] {
        assert_eq!(told(&utf16(PLAIN, big, mark)), expected, "big {big}, mark {mark}");
    }
    for text in [PLAIN.replace(',', ";"), PLAIN.replace(',', "\t")] {
        assert_eq!(told(text.as_bytes()), expected, "{text:?}");
    }
    let older: Vec<u8> = PLAIN.chars().map(|c| if c == 'ü' { 0xFC } else { c as u8 }).collect();
    let note = "- The table is not in UTF-8; it was read as Windows-1252.\n";
    assert_eq!(told(&older), format!("{expected}{note}"));
}

#[test]
fn lines_are_those_of_the_file_under_every_line_end() {
    let text = "t\n\n\nsubject,time,group,y\n\n1,0,\"a\nb\",x\n \n1,7,\"a\nb\",y\n1,8,\"a\nb\",3\n";
    for end in ["\n", "\r\n", "\r"] {
        let table = Table::read(text.replace('\n', end).as_bytes()).expect("a table");
        let lines: Vec<usize> = table.rows(0, 9).iter().map(|row| row.line).collect();
        assert_eq!(lines, [6, 9, 11], "{end:?}");
    }
}

#[test]
fn files_that_are_no_tables_are_named() {
    for workbook in [&b"PK\x03\x04rest"[..], b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1rest"] {
        let error = read_bytes(workbook).expect_err("no workbook that can be read");
        assert!(error.to_string().contains("select the cells there, copy, and paste here"), "{error}");
    }
    for (bytes, part) in [
        (&b""[..], "empty"),
        (b" \n\t\r\n ", "empty"),
        (b"\xEF\xBB\xBF", "empty"),
        (b"\xFF\xFE", "empty"),
        (b"%PDF-1.7", "a PDF"),
        (b"\x89PNG\r\n", "a picture"),
        (b"a,b\n1,\x002\n", "a binary file"),
        (b"a,b\n\x01\x02\x03\x04\x05", "a binary file"),
        (b"<!DOCTYPE html><table>", "a web page"),
    ] {
        let error = read_bytes(bytes).expect_err("no table").to_string();
        assert!(error.contains(part), "{bytes:?}: {error}");
    }
}

/// A small generator of numbers, for bytes that follow no plan.
struct Numbers(u64);

impl Numbers {
    fn below(&mut self, limit: usize) -> usize {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 33) as usize % limit
    }
}

fn try_all(bytes: &[u8]) {
    if let Ok(table) = Table::read(bytes) {
        let _ = table.preview(5);
        for layout in [None, Some(Layout::Long), Some(Layout::WideByTime), Some(Layout::WideBySubject)] {
            let _ = table.observe(&Request { layout, ..Request::default() });
        }
    }
}

#[test]
fn damaged_tables_do_not_panic() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases");
    let mut paths: Vec<_> =
        std::fs::read_dir(folder).expect("cases").map(|entry| entry.expect("a case").path()).collect();
    paths.sort();
    let mut numbers = Numbers(20_260);
    let pieces: [&[u8]; 14] = [
        b",",
        b"\n",
        b"\"",
        b";",
        b"\t",
        b"-",
        b"1e999",
        b"\xC3",
        b"NaN",
        b"day 7",
        b"2024-02-30",
        b"Mean",
        b"\xE2\x88\x92",
        b"<",
    ];
    for path in paths {
        let text = std::fs::read(&path).expect("a case");
        let start = text.windows(9).position(|window| window == b"== table\n").expect("a table") + 9;
        let end = text.windows(5).skip(start).position(|window| window == b"\n== r").expect("an end") + start;
        let table = &text[start..=end];
        for cut in (0..table.len()).step_by(7) {
            try_all(&table[..cut]);
        }
        for _ in 0..60 {
            let mut bytes = table.to_vec();
            for _ in 0..=numbers.below(4) {
                let at = numbers.below(bytes.len());
                let to = (at + numbers.below(6)).min(bytes.len());
                bytes.splice(at..to, pieces[numbers.below(pieces.len())].iter().copied());
            }
            try_all(&bytes);
        }
    }
}

#[test]
fn random_bytes_do_not_panic() {
    let mut numbers = Numbers(7);
    for _ in 0..500 {
        let length = numbers.below(300);
        let bytes: Vec<u8> = (0..length).map(|_| numbers.below(256) as u8).collect();
        try_all(&bytes);
        let printable: Vec<u8> = (0..length).map(|_| b"0123456789.,;\t\n\n\"ab -day"[numbers.below(24)]).collect();
        try_all(&printable);
    }
}

#[test]
fn five_hundred_columns_and_enormous_cells() {
    let header: Vec<String> = (0..500).map(|column| format!("c{column}")).collect();
    let row: Vec<String> = (0..500).map(|column| column.to_string()).collect();
    let table = format!("{}\n{}\n{}\n", header.join(","), row.join(","), row.join(","));
    try_all(table.as_bytes());
    let asked = Request {
        subject: ColumnRequest::Named("c0".into()),
        time: ColumnRequest::Named("c1".into()),
        group: ColumnRequest::Absent,
        response: ColumnRequest::Named("c499".into()),
        layout: Some(Layout::Long),
        ..Request::default()
    };
    let reading = common::read(table.as_bytes(), &asked).expect("a reading");
    assert_eq!(reading.observations.response, [499.0, 499.0]);

    let cell = "x".repeat(3_000_000);
    let text = PLAIN.replace("5.5", &cell);
    let reading = common::read(text.as_bytes(), &Request::default()).expect("a reading");
    let problem = &reading.problems[0];
    assert_eq!((problem.row, problem.kind), (4, ProblemKind::NotANumber));
    assert!(problem.value.chars().count() < 100);
    try_all("9".repeat(200_000).as_bytes());
    try_all(format!("{PLAIN}1,{},A,3\n", "9".repeat(200_000)).as_bytes());
    try_all(",".repeat(4_000).as_bytes());
    let error = read_bytes(",".repeat(60_000).as_bytes()).expect_err("too wide");
    assert!(matches!(error, TableError::TooLarge { .. }), "{error}");
}

#[test]
fn a_flood_of_problems_is_counted_not_listed() {
    let mut text = PLAIN.to_string();
    for row in 0..3000 {
        text.push_str(&format!("{},{},Rot,oops\n", row % 50, row));
    }
    let reading = common::read(text.as_bytes(), &Request::default()).expect("a reading");
    let listed = reading.problems.iter().filter(|problem| problem.kind == ProblemKind::NotANumber).count();
    assert_eq!(listed, LISTED_PER_KIND);
    assert!(reading.problem_counts.contains(&(ProblemKind::NotANumber, 3000)));
    assert!(
        reading.notes.iter().any(|note| note.contains("3000 responses that are not numbers")),
        "{:?}",
        reading.notes
    );
}

#[test]
fn the_same_bytes_give_the_same_reading() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases");
    for entry in std::fs::read_dir(folder).expect("cases") {
        let text = std::fs::read(entry.expect("a case").path()).expect("a case");
        assert_eq!(told(&text), told(&text));
    }
}
