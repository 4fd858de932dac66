//! Names that a careless program would run, show as markup, or trip over; and files that are no tables.

use crate::corpus::Outcome::{AsPlain, Groups, Refused};
use crate::corpus::{Case, HEAD, case, changed, plain, planned, rows};
use serde_json::json;

/// The plain table with a group and a subject called so, each quoted.
fn called(name: &str) -> String {
    let cell = format!("\"{}\"", name.replace('"', "\"\""));
    changed(|rows| {
        rows.iter_mut().filter(|row| row[1] == "Grün").for_each(|row| row[1].clone_from(&cell));
        rows[..5].iter_mut().for_each(|row| row[0].clone_from(&cell));
    })
}

const NAMES: [(&str, &str); 20] = [
    ("a formula", "=2+5+cmd|' /C calc'!A0"),
    ("an at sign", "@SUM(1+1)*cmd"),
    ("a plus sign", "+1+1"),
    ("a minus sign", "-2+3"),
    ("a hyperlink", "=HYPERLINK(\"http://x.invalid\",\"open\")"),
    ("a script", "<script>alert(1)</script>"),
    ("an image", "<img src=x onerror=alert(1)>"),
    ("an entity", "&lt;b&gt; &amp; &#x3c;"),
    ("an end of data", "]]> --> */ </style></svg>"),
    ("a template", "${alert(1)} {{7*7}} %s %n"),
    ("a path", "../../../../etc/passwd"),
    ("a query", "'; DROP TABLE mice; --"),
    ("right to left", "\u{202e}desrever\u{202c} עברית"),
    ("zero width", "a\u{200b}\u{feff}b"),
    ("accents in heaps", "Z\u{301}\u{302}\u{303}\u{304}\u{305}\u{306}\u{307}algo"),
    ("pictures", "🐭🧀 group 👩‍👩‍👧‍👦"),
    ("a key of every object", "__proto__"),
    ("another key", "constructor"),
    ("quotes", "say \"so\", 'and' `so`"),
    ("a backslash at the end", "group\\"),
];

fn names() -> Vec<Case> {
    let mut cases: Vec<Case> = NAMES.iter().map(|(name, text)| case(name, called(text), Groups(2))).collect();
    cases.extend([
        case("a line end in a name", called("first\nsecond"), Groups(2)),
        case("a tab in a name", called("first\tsecond"), Groups(2)),
        case("a bell in a name", called("ring\u{7}"), Refused("binary")),
        case("a name of ten thousand letters", called(&"long ".repeat(2_000)), Groups(2)),
        case(
            "groups called true and null",
            changed(|rows| {
                rows.iter_mut().for_each(|row| row[1] = if row[1] == "Plain" { "true" } else { "null" }.into());
            }),
            Groups(1),
        ),
        case(
            "groups called by numbers",
            changed(|rows| {
                rows.iter_mut().for_each(|row| row[1] = if row[1] == "Plain" { "1" } else { "02" }.into());
            }),
            Groups(2),
        ),
        case(
            "groups called + and -",
            changed(|rows| {
                rows.iter_mut().for_each(|row| row[1] = if row[1] == "Plain" { "-" } else { "+" }.into());
            }),
            Groups(2),
        ),
        case(
            "columns with markup",
            plain().replace(HEAD, "<b>subject</b>,\"group, =1+1\",day,\"y<script>\""),
            Groups(2),
        ),
        planned("columns without names", plain().replace(HEAD, ",,,"), json!({}), Refused("")),
        case("columns of one name", plain().replace(HEAD, "y,y,y,y"), Refused("")),
        case("columns named like keys", plain().replace(HEAD, "subject,__proto__,day,constructor"), AsPlain),
        case(
            "a long column name",
            plain().replace(HEAD, &format!("subject,group,day,y {}", "of it ".repeat(3_000))),
            AsPlain,
        ),
    ]);
    cases
}

fn ragged() -> Vec<Case> {
    let plain = plain();
    let with = |from: &str, to: &str| plain.replacen(from, to, 1);
    vec![
        case("a short row", with("\ns2,Plain,5,", "\ns2,Plain,5\nx,"), Refused("")),
        case("a row cut before its response", with("s2,Plain,5,", "s2,Plain,5\n#"), Refused("")),
        case("a row of more cells", with("s2,Plain,5,", "s2,Plain,5,9,8,7,"), Groups(2)),
        case(
            "a row of five thousand cells",
            with("s2,Plain,5,", &format!("s2,Plain,5,1{},", ",".repeat(4_900))),
            Groups(2),
        ),
        case(
            "a row of ten thousand cells",
            with("s2,Plain,5,", &format!("s2,Plain,5,1{},", ",".repeat(10_000))),
            Refused("limit"),
        ),
        case("an open quotation mark", with("s2,Plain,5,", "s2,\"Plain,5,"), Refused("quotation mark")),
        case("a quotation mark in a cell", with("s2,Plain,5,", "s2,Pl\"ain,5,"), Groups(3)),
        case("separators mixed", with("s2,Plain,5,", "s2;Plain;5;"), Refused("")),
        case("head only", HEAD, Refused("no rows")),
        case("head and blank lines", format!("{HEAD}\n\n,,,\n\n"), Refused("no rows")),
        case("one column", "y\n1\n2\n3\n", Refused("one column")),
        case("words only", "the quick brown fox\njumps over the lazy dog\n", Refused("")),
        case("numbers only", "1,2,3,4\n5,6,7,8\n9,1,2,3\n", Refused("")),
        case("no head", plain.trim_start_matches(HEAD).trim_start().to_string(), Refused("")),
        case("only separators", ",".repeat(4_000), Refused("")),
        case("only line ends", "\n".repeat(100_000), Refused("empty")),
        case("one line of two megabytes", "9".repeat(2_000_000), Refused("")),
        case("a hundred thousand blank rows", format!("{plain}{}", ",,,\n".repeat(100_000)), AsPlain),
    ]
}

fn files() -> Vec<Case> {
    let noise: Vec<u8> = (0..4000u32).map(|at| (at.wrapping_mul(2_654_435_761) >> 13) as u8).collect();
    let zeros = [plain().as_bytes(), &[0, 0, 0, 0]].concat();
    let bytes = |name: &str, bytes: &[u8], words: &'static str| case(name, bytes, Refused(words));
    vec![
        bytes("nothing", b"", "empty"),
        bytes("white space", b" \t\r\n \n", "empty"),
        bytes("a mark and nothing", b"\xEF\xBB\xBF", "empty"),
        bytes("half a mark", b"\xFF", ""),
        bytes("noise", &noise, ""),
        bytes("zeros at the end", &zeros, "binary"),
        bytes("a picture", b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "picture"),
        bytes("a document", b"%PDF-1.7\n%\xE2\xE3\xCF\xD3\n1 0 obj\n", "PDF"),
        bytes("a letter", b"{\\rtf1\\ansi a table}", "word processor"),
        bytes("a page", b"<!DOCTYPE html><html><table><tr><td>1</td></tr></table></html>", "web page"),
        bytes("an older workbook", b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1\0\0\0\0", ".xls"),
        bytes("half a workbook", b"PK\x03\x04\x14\0\0\0\x08\0", "damaged"),
        bytes("an empty package", b"PK\x05\x06\0\0\0\0\0\0\0\0\0\0\0\0\0\0\0\0\0\0", "compressed"),
        bytes("a compressed file", b"\x1F\x8B\x08\0\0\0\0\0", "compressed"),
        bytes("structured text", b"{\"rows\": [{\"subject\": 1, \"day\": 2}, {\"subject\": 2}]}", ""),
        bytes("control characters", b"a,b,c\n\x01\x02,\x03\x04,\x05\x06\n", "binary"),
    ]
}

fn plans() -> Vec<Case> {
    let plain = plain();
    let under = |name: &str, plan: serde_json::Value, outcome| planned(name, plain.clone(), plan, outcome);
    let low = changed(|rows| rows[8][3] = "0".into());
    let all: Vec<_> = (2..52).map(|row| json!({"row": row, "reason": "test"})).collect();
    vec![
        under("log scale", json!({"response": {"transform": "log"}}), Groups(2)),
        planned("log of zero", low, json!({"response": {"transform": "log"}}), Refused("row 10")),
        under("a mean per time", json!({"curves": {"shape": "by-time"}}), Groups(2)),
        under("straight", json!({"curves": {"shape": "straight"}}), Groups(2)),
        under("all knots", json!({"curves": {"dimension": "full"}}), Groups(2)),
        under("a million knots", json!({"curves": {"dimension": 1_000_000}}), Groups(2)),
        under(
            "own trends and serial correlation",
            json!({"subjects": "slope", "errors": {"serial": "ar1"}}),
            Groups(2),
        ),
        under(
            "everything by group",
            json!({"subjects": "slope", "subjects_spread": "by-group",
            "errors": {"spread": "by-group", "serial": "ar1", "nugget": true}}),
            Groups(2),
        ),
        under("an unknown key", json!({"curve": {}}), Refused("curve")),
        under("a column that is not there", json!({"columns": {"time": "week"}}), Refused("week")),
        under("one column twice", json!({"columns": {"time": "y", "response": "y"}}), Refused("both")),
        under("a level of one", json!({"comparisons": {"level": 1.0}}), Refused("level")),
        under("a negative margin", json!({"comparisons": {"margin": -1.0}}), Refused("margin")),
        under(
            "a control that is not there",
            json!({"comparisons": {"pairs": "against-control", "control": "Saline"}}),
            Refused("Saline"),
        ),
        under("an endless grid", json!({"grid": {"count": 1_000_000_000}}), Refused("grid")),
        under("a grid far outside", json!({"grid": {"start": -1e6, "end": 1e6, "count": 5}}), Groups(2)),
        under(
            "a row twice out",
            json!({"exclusions": [{"row": 3, "reason": "a"}, {"row": 3, "reason": "b"}]}),
            Groups(2),
        ),
        under("a row beyond the end out", json!({"exclusions": [{"row": 900, "reason": "a"}]}), Refused("900")),
        under("all rows out", json!({"exclusions": all}), Refused("")),
        under("a sheet of a text", json!({"reading": {"sheet": "Data"}}), Refused("workbook")),
        under("cells that are none", json!({"reading": {"cells": "everything"}}), Refused("")),
        under(
            "a circle of spellings",
            json!({"reading": {"merges": [{"from": "Plain", "into": "Grün"}, {"from": "Grün", "into": "Plain"}]}}),
            Groups(2),
        ),
        under("the largest seed", json!({"seed": u64::MAX}), Groups(2)),
        under("day zero of each", json!({"reading": {"day_zero": "per-subject"}}), Groups(2)),
    ]
}

/// All of them.
pub(crate) fn cases() -> Vec<Case> {
    debug_assert_eq!(rows().len(), 50);
    [names(), ragged(), files(), plans()].concat()
}
