//! The plain table in every dress that a file can have: the findings stay what they are.

use crate::corpus::{Case, HEAD, Outcome, case, changed, plain, rows};

fn utf16(text: &str, big: bool) -> Vec<u8> {
    text.encode_utf16().flat_map(|unit| if big { unit.to_be_bytes() } else { unit.to_le_bytes() }).collect()
}

fn by_time(mark: &str) -> String {
    let rows = rows();
    let days = [0, 2, 5, 9, 14].map(|day| format!("{mark}{day}")).join(",");
    let mut text = format!("subject,group,{days}\n");
    for subject in rows.chunks(5) {
        let values: Vec<&str> = subject.iter().map(|row| row[3].as_str()).collect();
        text += &format!("{},{},{}\n", subject[0][0], subject[0][1], values.join(","));
    }
    text
}

fn by_subject() -> String {
    let rows = rows();
    let subjects: Vec<_> = rows.chunks(5).collect();
    let across = |column: usize| subjects.iter().map(|own| own[0][column].clone()).collect::<Vec<_>>().join(",");
    let mut text = format!("group,{}\nday,{}\n", across(1), across(0));
    for visit in 0..5 {
        let values: Vec<&str> = subjects.iter().map(|own| own[visit][3].as_str()).collect();
        text += &format!("{},{}\n", subjects[0][visit][2], values.join(","));
    }
    text
}

fn merged() -> String {
    let mut last = (String::new(), String::new());
    changed(|rows| {
        for row in rows {
            let now = (row[0].clone(), row[1].clone());
            if now == last {
                (row[0], row[1]) = (String::new(), String::new());
            }
            last = now;
        }
    })
}

/// All of them.
pub(crate) fn cases() -> Vec<Case> {
    let plain = plain();
    let older: Vec<u8> = plain.chars().map(|c| if c == 'ü' { 0xFC } else { c as u8 }).collect();
    let lines: Vec<&str> = plain.lines().collect();
    let quoted: String =
        lines.iter().map(|line| format!("\"{}\"\n", line.split(',').collect::<Vec<_>>().join("\",\""))).collect();
    let semicolons = plain.replace(',', ";").replace('.', ",");
    let backwards: String =
        lines.iter().map(|line| line.split(',').rev().collect::<Vec<_>>().join(",") + "\n").collect();
    let numbered: String = lines
        .iter()
        .enumerate()
        .map(|(at, line)| if at == 0 { format!("row,{line}\n") } else { format!("{at},{line}\n") })
        .collect();
    let extra: String = (lines.iter().enumerate())
        .map(|(at, line)| {
            format!("{line},{}\n", if at == 0 { "remarks".to_string() } else { format!("seen {}", at * at) })
        })
        .collect();
    let many: String = (lines.iter().enumerate())
        .map(|(at, line)| {
            let more: Vec<String> =
                (0..500).map(|c| if at == 0 { format!("note {}", letters(c)) } else { "-".to_string() }).collect();
            format!("{line},{}\n", more.join(","))
        })
        .collect();
    let body = plain.trim_start_matches(HEAD).trim_start();
    let same = |name: &str, table: Vec<u8>| case(name, table, Outcome::AsPlain);
    let text = |name: &str, table: String| case(name, table, Outcome::AsPlain);
    vec![
        same("byte-order mark", [b"\xEF\xBB\xBF", plain.as_bytes()].concat()),
        same("utf-16 little, marked", [&[0xFF, 0xFE][..], &utf16(&plain, false)].concat()),
        same("utf-16 big, marked", [&[0xFE, 0xFF][..], &utf16(&plain, true)].concat()),
        same("utf-16 little", utf16(&plain, false)),
        same("utf-16 big", utf16(&plain, true)),
        same("older code page", older),
        text("carriage returns and line feeds", plain.replace('\n', "\r\n")),
        text("carriage returns", plain.replace('\n', "\r")),
        text("no last line end", plain.trim_end().to_string()),
        text("tabs", plain.replace(',', "\t")),
        text("semicolons", plain.replace(',', ";")),
        text("decimal commas", semicolons.clone()),
        text("separator named in the first line", format!("sep=;\n{semicolons}")),
        text("everything quoted", quoted),
        text("white space around cells", plain.replace(',', " ,  ")),
        text("blank lines between", plain.replace('\n', "\n\n")),
        text("blank lines at the foot", format!("{plain}\n\n ,,,\n\n")),
        text("lines that end in separators", plain.replace('\n', ",,\n")),
        text("a title above", format!("Second run\n\n{plain}")),
        text("units below the head", plain.replacen('\n', "\n,,(d),(mm)\n", 1)),
        text("the head again half way", plain.replace("s5,Grün,0", &format!("{HEAD}\ns5,Grün,0"))),
        text("mean and SEM at the foot", format!("{plain}Mean,,,17.4\nSEM,,,0.4\n")),
        text("columns the other way round", backwards),
        text("rows numbered", numbered),
        text("a column of remarks", extra),
        text("five hundred columns of dashes", many),
        text("capital heads", format!("SUBJECT,GROUP,DAY,Y\n{body}")),
        text("heads over two lines", format!("\"subject\",\"group\",\"day\",\"y\n\"\n{body}")),
        text("labels once per block", merged()),
        text(
            "groups in several spellings",
            changed(|rows| (rows[1][1], rows[2][1]) = ("plain ".into(), " PLAIN".into())),
        ),
        text("plus signs", changed(|rows| rows.iter_mut().for_each(|row| row[3] = format!("+{}", row[3])))),
        text(
            "powers of ten",
            changed(|rows| {
                rows.iter_mut().for_each(|row| row[3] = format!("{:e}", row[3].parse::<f64>().expect("a number")));
            }),
        ),
        text("trailing zeros", changed(|rows| rows.iter_mut().for_each(|row| row[3] += "0000000000000000000"))),
        text("days in words", changed(|rows| rows.iter_mut().for_each(|row| row[2] = format!("day {}", row[2])))),
        text("hours", changed(|rows| rows.iter_mut().for_each(|row| row[2] = format!("d{}", row[2])))),
        text(
            "dates",
            changed(|rows| {
                rows.iter_mut()
                    .for_each(|row| row[2] = format!("2024-03-{:02}", 4 + row[2].parse::<u32>().expect("a day")));
            }),
        ),
        text(
            "dates with points",
            changed(|rows| {
                rows.iter_mut()
                    .for_each(|row| row[2] = format!("{}.2.2024", 4 + row[2].parse::<u32>().expect("a day")));
            }),
        ),
        text("a column per day", by_time("day ")),
        text("a column per day, bare numbers", by_time("")),
        text("a column per subject", by_subject()),
    ]
}

/// Letters only, so that no name looks like a time.
fn letters(mut number: usize) -> String {
    let mut text = String::new();
    for _ in 0..3 {
        text.push(char::from(b'a' + (number % 26) as u8));
        number /= 26;
    }
    text
}
