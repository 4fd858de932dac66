//! Small tables and what is read from them: one file per case in `tests/cases`.
//!
//! A case has a table, perhaps a request, and the reading. After a change that
//! is meant, `UPDATE_EXPECT=1 cargo test -p courseband-table` writes the
//! readings anew; look at the difference before keeping it.

use crate::common;
use std::path::Path;

struct Case {
    about: String,
    table: String,
    request: Option<String>,
    reading: String,
}

fn parse(text: &str) -> Case {
    let (about, rest) = text.split_once("== table\n").expect("a table");
    let (before, reading) = rest.split_once("== reading\n").expect("a reading");
    let (table, request) = match before.split_once("== request\n") {
        Some((table, request)) => (table, Some(request.to_string())),
        None => (before, None),
    };
    Case { about: about.to_string(), table: table.to_string(), request, reading: reading.to_string() }
}

fn written(case: &Case, reading: &str) -> String {
    let request = case.request.as_ref().map_or(String::new(), |request| format!("== request\n{request}"));
    format!("{}== table\n{}{request}== reading\n{reading}", case.about, case.table)
}

#[test]
fn every_case_reads_as_written() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases");
    let mut paths: Vec<_> =
        std::fs::read_dir(folder).expect("cases").map(|entry| entry.expect("a case").path()).collect();
    paths.sort();
    assert!(paths.len() > 40, "only {} cases", paths.len());
    let mut wrong = String::new();
    for path in paths {
        let text = std::fs::read_to_string(&path).expect("a case");
        let case = parse(&text);
        let reading = common::told(case.table.as_bytes(), &common::request(case.request.as_deref().unwrap_or("")));
        if reading == case.reading {
            continue;
        }
        if std::env::var_os("UPDATE_EXPECT").is_some() {
            std::fs::write(&path, written(&case, &reading)).expect("a case to write");
        } else {
            wrong.push_str(&format!("== {}\nexpected:\n{}read:\n{reading}\n", path.display(), case.reading));
        }
    }
    assert!(wrong.is_empty(), "{wrong}");
}
