//! The descriptive table, the preview, and what a page needs to offer.

use crate::common;
use courseband_table::{Merge, Request, Role, Table, Topic, describe};

const TABLE: &str = "Trial one,,,\nsubject,time (d),group,size\n,,,mm\n1,0,A,5\n2,0,A,6\n3,0,A,10\n4,0,A,NA\n1,7,A,2\n5,0,B,1.5\n5,7,B,\n6,0,B,2.5\n";

#[test]
fn describes_each_group_at_each_time() {
    let reading = common::read(TABLE.as_bytes(), &Request::default()).expect("a reading");
    let rows = describe(&reading.observations);
    let keys: Vec<(u32, f64, usize)> = rows.iter().map(|row| (row.group, row.time, row.n)).collect();
    assert_eq!(keys, [(0, 0.0, 3), (0, 7.0, 1), (1, 0.0, 2)]);
    // 5, 6, 10: by hand, mean 7, variance (4 + 1 + 9) / 2 = 7.
    let first = &rows[0];
    assert_eq!((first.mean, first.median, first.min, first.max), (7.0, 6.0, 5.0, 10.0));
    assert!((first.sd.expect("a spread") - 7.0_f64.sqrt()).abs() < 1e-15);
    assert_eq!(rows[1].sd, None);
    assert_eq!((rows[2].mean, rows[2].median), (2.0, 2.0));
}

#[test]
fn previews_the_table_as_it_stands() {
    let table = Table::read(TABLE.as_bytes()).expect("a table");
    let preview = table.preview(2);
    assert_eq!(preview.total_rows, 8);
    let names: Vec<&str> = preview.columns.iter().map(|column| column.name.as_str()).collect();
    assert_eq!(names, ["subject", "time (d)", "group", "size"]);
    let size = &preview.columns[3];
    assert_eq!((size.unit.as_deref(), size.missing, size.numbers), (Some("mm"), 2, 6));
    assert_eq!(size.samples, ["5", "6", "10", "2"]);
    assert_eq!(preview.columns[1].unit.as_deref(), Some("d"));
    let lines: Vec<usize> = preview.rows.iter().map(|row| row.line).collect();
    assert_eq!(lines, [4, 5]);
    assert_eq!(table.rows(7, 9)[0].cells, ["6", "0", "B", "2.5"]);
    assert!(preview.notes.iter().any(|note| note.contains("Trial one")));
}

#[test]
fn offers_to_unite_a_near_spelling() {
    let mut text = "subject,time,group,y\n".to_string();
    for (id, group) in ["Saline", "Saline", "Saline", "Salnie", "Drug", "Drug"].iter().enumerate() {
        text.push_str(&format!("{id},0,{group},{id}\n{id},1,{group},2\n"));
    }
    let reading = common::read(text.as_bytes(), &Request::default()).expect("a reading");
    assert_eq!(reading.near_spellings, [Merge { from: "Salnie".into(), into: "Saline".into() }]);
    let united = Request { merges: reading.near_spellings, ..Request::default() };
    let reading = common::read(text.as_bytes(), &united).expect("a reading");
    assert_eq!(reading.observations.groups, ["Saline", "Drug"]);
    assert!(reading.near_spellings.is_empty());
    // Masked: every spelling gets the name that the table does not have.
    let merge = |from: &str, into: &str| Merge { from: from.into(), into: into.into() };
    let masked = Request {
        merges: vec![merge("Salnie", "Saline"), merge("Saline", "Group B"), merge("Drug", "Group A")],
        ..Request::default()
    };
    let reading = common::read(text.as_bytes(), &masked).expect("a reading");
    assert_eq!(reading.observations.groups, ["Group B", "Group A"]);
}

#[test]
fn a_rival_is_one_question_with_the_columns_to_choose_from() {
    let text = "subject,time,group,weight,length\n1,0,a,1,2\n1,1,a,2,3\n2,0,b,3,4\n2,1,b,3,5\n";
    let reading = common::read(text.as_bytes(), &Request::default()).expect("a reading");
    let question = reading.open_question().expect("a question");
    assert_eq!(question.topic, Topic::Column(Role::Response));
    assert_eq!(question.choices, ["weight", "length"]);
    let refusal = question.refusal();
    assert!(refusal.contains("‘weight’, ‘length’") && refusal.contains("Name the response column"), "{refusal}");
    assert!(reading.observations.time.is_empty());
}

#[test]
fn subjects_are_sorted_by_time_then_line() {
    let text = "subject,time,group,y\nb,7,A,1\na,7,A,2\nb,0,A,3\na,0,A,4\nb,7,A,5\n";
    let observations = common::read(text.as_bytes(), &Request::default()).expect("a reading").observations;
    assert_eq!(observations.subject, [0, 0, 0, 1, 1]);
    assert_eq!(observations.subjects[0].name, "b");
    assert_eq!(observations.line, [4, 2, 6, 5, 3]);
}
