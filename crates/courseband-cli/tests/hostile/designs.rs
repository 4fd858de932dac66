//! Designs with hardly anything in them, and values at the edge of what numbers can be.

use crate::corpus::Outcome::{Groups, Refused};
use crate::corpus::{Case, HEAD, Outcome, case, changed, plain, planned, rows, table, with_times, with_y};
use serde_json::json;

/// Rows of a design: subjects per group, and times.
fn design(groups: &[(&str, usize)], times: &[f64]) -> String {
    let mut text = format!("{HEAD}\n");
    let mut subject = 0;
    for (g, (name, count)) in groups.iter().enumerate() {
        for _ in 0..*count {
            for (visit, time) in times.iter().enumerate() {
                let y = 10.0
                    + subject as f64 * 0.4
                    + time * (0.2 + g as f64 * 0.3)
                    + ((subject * 5 + visit * 3) % 7) as f64 * 0.1;
                text += &format!("p{subject},{name},{time},{y}\n");
            }
            subject += 1;
        }
    }
    text
}

fn sizes() -> Vec<Case> {
    let days = [0.0, 1.0, 2.0, 3.0, 4.0, 5.0];
    let many: Vec<(String, usize)> = (0..60).map(|g| (format!("group {}", word(g)), 2)).collect();
    let many: Vec<(&str, usize)> = many.iter().map(|(name, count)| (name.as_str(), *count)).collect();
    let thousand: String = (0..2000).map(|s| format!("s{s},g{},0,1\ns{s},g{},1,2\n", s % 1000, s % 1000)).collect();
    let long: Vec<f64> = (0..3000).map(f64::from).collect();
    let once: String = (0..12).map(|s| format!("s{s},{},{},{}\n", ["a", "b"][s % 2], s / 2, s * s % 7)).collect();
    let none = Refused;
    vec![
        case("one subject", design(&[("a", 1)], &days), Groups(1)),
        case("one subject in each group", design(&[("a", 1), ("b", 1)], &days), Groups(2)),
        case("one against many", design(&[("a", 1), ("b", 9)], &days), Groups(2)),
        case("two subjects in each group", design(&[("a", 2), ("b", 2)], &days), Groups(2)),
        case("one group", design(&[("a", 8)], &days), Groups(1)),
        case("one time", design(&[("a", 6), ("b", 6)], &[3.0]), Groups(2)),
        case("two times", design(&[("a", 6), ("b", 6)], &[0.0, 1.0]), Groups(2)),
        case("three times", design(&[("a", 6), ("b", 6)], &[0.0, 1.0, 5.0]), Groups(2)),
        case("one row", "subject,group,day,y\na,b,0,1\n", none("")),
        case("two rows", "subject,group,day,y\na,b,0,1\na,b,1,2\n", Groups(1)),
        case("two subjects, two times", design(&[("a", 1), ("b", 1)], &[0.0, 1.0]), Groups(2)),
        case("every subject once", format!("{HEAD}\n{once}"), Groups(2)),
        case("sixty groups", design(&many, &[0.0, 1.0, 2.0]), none("1770 pairs")),
        case("twelve groups", design(&many[..12], &[0.0, 1.0, 2.0]), Groups(12)),
        planned(
            "thirty groups against one",
            design(&many[..30], &[0.0, 1.0, 2.0]),
            json!({"comparisons": {"pairs": "against-control", "control": "group aa"}}),
            Groups(30),
        ),
        case("a thousand groups", format!("{HEAD}\n{thousand}"), none("at most 60")),
        case("three thousand times", design(&[("a", 2), ("b", 2)], &long), Groups(2)),
        case(
            "groups that never meet",
            changed(|rows| {
                rows.iter_mut()
                    .filter(|row| row[1] == "Grün")
                    .for_each(|row| row[2] = format!("{}", 100 + row[2].len()));
            }),
            Groups(2),
        ),
        case(
            "a group that ends early",
            changed(|rows| rows.retain(|row| row[1] == "Plain" || row[2].len() == 1)),
            Groups(2),
        ),
        case(
            "a group with one row",
            changed(|rows| rows.retain(|row| row[1] == "Plain" || (row[0] == "s1" && row[2] == "5"))),
            Groups(2),
        ),
        case(
            "every second row missing",
            changed(|rows| {
                let mut at = 0;
                rows.retain(|_| {
                    at += 1;
                    at % 2 == 0
                });
            }),
            Groups(2),
        ),
        case("no two subjects at one time", with_times(|s, v| format!("{}", v * 3 + s)), Groups(2)),
    ]
}

/// Words for numbers, so that names do not look like numbers.
fn word(number: usize) -> String {
    format!("{}{}", char::from(b'a' + (number / 26) as u8), char::from(b'a' + (number % 26) as u8))
}

fn responses() -> Vec<Case> {
    let times = |factor: f64| with_y(move |_, _, y| format!("{:e}", y * factor));
    let none = Refused;
    vec![
        case("constant", with_y(|_, _, _| "7".into()), Groups(2)),
        case("constant zero", with_y(|_, _, _| "0".into()), Groups(2)),
        case("constant in each group", with_y(|s, _, _| format!("{}", s % 2)), Groups(2)),
        case("constant in each subject", with_y(|s, _, _| format!("{}", s * s % 7)), Groups(2)),
        case("constant but for one", with_y(|s, v, _| if (s, v) == (3, 2) { "8" } else { "7" }.into()), Groups(2)),
        case("a straight line without error", with_y(|s, v, _| format!("{}", v * (1 + s % 2))), Groups(2)),
        case("only zeros and ones", with_y(|s, v, _| format!("{}", (s * 3 + v) % 2)), Groups(2)),
        case("in 1e300", times(1e300), none("too large to compute with")),
        case("in 1e150", times(1e150), none("too large")),
        case("in 1e140", times(1e140), Groups(2)),
        case("in 1e-140", times(1e-140), Groups(2)),
        case("in 1e-300", times(1e-300), none("tiny")),
        case("in the smallest numbers", times(1e-322), none("tiny")),
        case(
            "huge beside tiny",
            with_y(|s, v, y| format!("{:e}", y * if (s + v) % 2 == 0 { 1e300 } else { 1e-300 })),
            none("too large"),
        ),
        case(
            "huge of both signs",
            with_y(|s, v, _| if (s + v) % 2 == 0 { "1.7e308" } else { "-1.7e308" }.into()),
            none("too large"),
        ),
        case("a large level", with_y(|_, _, y| format!("{:.3}", y + 1e12)), Groups(2)),
        case("a level beyond the digits", with_y(|_, _, y| format!("{:.1}", y + 1e17)), Groups(2)),
        case(
            "one enormous value",
            with_y(|s, v, y| if (s, v) == (1, 1) { "1e200".into() } else { y.to_string() }),
            none("Row 8"),
        ),
        case("all missing", with_y(|_, _, _| String::new()), none("no cell holds a value in ‘y’")),
        case("all NA", with_y(|_, _, _| "NA".into()), none("no cell holds a value in ‘y’")),
        case("all words", with_y(|_, _, _| "high".into()), none("")),
        case("all infinite", with_y(|_, _, _| "inf".into()), none("")),
        case("all too large", with_y(|_, _, _| "1e999".into()), none("")),
        case(
            "some infinite",
            with_y(|s, v, y| if (s + v) % 5 == 0 { "-Infinity".into() } else { y.to_string() }),
            Groups(2),
        ),
        case("one value only", with_y(|s, v, _| if s + v == 0 { "3".into() } else { String::new() }), Groups(1)),
        case("one group missing", with_y(|s, _, y| if s % 2 == 0 { y.to_string() } else { String::new() }), Groups(1)),
        case(
            "one time missing throughout",
            with_y(|_, v, y| if v == 2 { "n/a".into() } else { y.to_string() }),
            Groups(2),
        ),
        case(
            "all but one subject missing",
            with_y(|s, _, y| if s == 1 { y.to_string() } else { "-".into() }),
            Groups(1),
        ),
        case(
            "a word among numbers",
            with_y(|s, v, y| if (s, v) == (4, 4) { "6,1O".into() } else { y.to_string() }),
            Groups(2),
        ),
        case("a bad zero", with_y(|s, v, y| if (s, v) == (4, 2) { "0".into() } else { y.to_string() }), Groups(2)),
        case("units in cells", with_y(|_, _, y| format!("{y} mm")), Groups(2)),
        case("percent signs", with_y(|_, _, y| format!("{y}%")), Groups(2)),
        case(
            "digits of another script",
            with_y(|s, v, y| if s + v == 0 { "٣".into() } else { y.to_string() }),
            Groups(2),
        ),
        case(
            "a number of 200 000 digits",
            with_y(|s, v, y| if s + v == 3 { "9".repeat(200_000) } else { y.to_string() }),
            Groups(2),
        ),
        case(
            "a cell of three megabytes",
            with_y(|s, v, y| if s + v == 3 { "x".repeat(3_000_000) } else { y.to_string() }),
            Groups(2),
        ),
    ]
}

fn times() -> Vec<Case> {
    let none = Refused;
    vec![
        case("negative times", with_times(|_, v| format!("{}", v as i32 * 3 - 9)), Groups(2)),
        case("times in 1e15", with_times(|_, v| format!("{v}e15")), Groups(2)),
        case("times in 1e-15", with_times(|_, v| format!("{v}e-15")), Groups(2)),
        case("times in 1e300", with_times(|_, v| format!("{v}e300")), Groups(2)),
        case("times in 1e-300", with_times(|_, v| format!("{v}e-300")), Groups(2)),
        case(
            "times that differ in the last digit",
            with_times(|s, v| format!("{}", v as f64 + s as f64 * 1e-15)),
            Groups(2),
        ),
        case(
            "times at 1e15, apart by one",
            with_times(|_, v| format!("{}", 1_000_000_000_000_000u64 + v as u64)),
            Groups(2),
        ),
        case("one far time", with_times(|_, v| if v == 4 { "1e9".into() } else { v.to_string() }), Groups(2)),
        case("all at one time but one", with_times(|s, v| if s + v == 0 { "1" } else { "0" }.into()), Groups(2)),
        case("infinite time", with_times(|s, v| if s + v == 3 { "inf".into() } else { v.to_string() }), none("finite")),
        case("time too large", with_times(|s, v| if s + v == 3 { "1e999".into() } else { v.to_string() }), none("")),
        case("time missing", with_times(|s, v| if s + v == 3 { String::new() } else { v.to_string() }), none("row")),
        case(
            "a word for a time",
            with_times(|s, v| if s + v == 3 { "soon".into() } else { v.to_string() }),
            none("soon"),
        ),
        case(
            "dates in both orders",
            with_times(|_, v| format!("{}/{}/2024", v + 1, v + 2)),
            none("day first or month first"),
        ),
        case(
            "a day that is none",
            with_times(|s, v| format!("2024-02-{:02}", if s == 2 && v == 4 { 30 } else { v + 1 })),
            none("2024-02-30"),
        ),
        case(
            "a date among numbers",
            with_times(|s, v| if s + v == 3 { "2024-03-05".into() } else { v.to_string() }),
            none("date"),
        ),
        case(
            "dates far apart",
            with_times(|_, v| ["0001-01-01", "1900-01-01", "2024-02-29", "2100-01-01", "9999-12-31"][v].into()),
            Groups(2),
        ),
        case(
            "units that do not convert",
            with_times(|_, v| if v == 1 { "month 1".into() } else { format!("day {v}") }),
            none("converted"),
        ),
        case("hours and days", with_times(|_, v| if v == 1 { "6 h".into() } else { format!("{v} d") }), Groups(2)),
        case("visits", with_times(|_, v| format!("visit {v}")), Groups(2)),
        case("replicates", with_times(|_, v| format!("{}", v / 2)), Groups(2)),
        case(
            "the same row thrice",
            format!("{0}{1}{1}", plain(), plain().trim_start_matches(HEAD).trim_start()),
            Groups(2),
        ),
    ]
}

fn subjects() -> Vec<Case> {
    let none = Refused;
    vec![
        case("an id missing", changed(|rows| rows[7][0].clear()), none("row 9")),
        case("a group missing once", changed(|rows| rows[7][1].clear()), Outcome::AsPlain),
        case(
            "a group missing throughout",
            changed(|rows| rows[..5].iter_mut().for_each(|row| row[1].clear())),
            Groups(2),
        ),
        case("all groups missing", changed(|rows| rows.iter_mut().for_each(|row| row[1].clear())), Groups(1)),
        case(
            "ids under both groups",
            changed(|rows| {
                rows.iter_mut()
                    .for_each(|row| row[0] = format!("s{}", row[0][1..].parse::<usize>().expect("a number") / 2));
            }),
            Groups(2),
        ),
        case(
            "a subject that changes its group",
            changed(|rows| rows[3..5].iter_mut().for_each(|row| row[1] = "Grün".into())),
            none("later in group"),
        ),
        case("a subject in both groups at once", changed(|rows| rows[2][1] = "Grün".into()), Groups(2)),
        case(
            "a group of one letter's difference",
            changed(|rows| rows[..5].iter_mut().for_each(|row| row[1] = "Plein".into())),
            Groups(3),
        ),
        planned(
            "said to be one subject",
            changed(|rows| {
                rows.iter_mut()
                    .for_each(|row| row[0] = format!("s{}", row[0][1..].parse::<usize>().expect("a number") / 2));
            }),
            json!({"reading": {"shared_ids": "same"}}),
            none("crossover"),
        ),
        planned(
            "said to be a mistake",
            changed(|rows| {
                rows.iter_mut()
                    .for_each(|row| row[0] = format!("s{}", row[0][1..].parse::<usize>().expect("a number") / 2));
            }),
            json!({"reading": {"shared_ids": "mistake"}}),
            none("by mistake"),
        ),
        case(
            "ids that differ by case",
            changed(|rows| rows[..2].iter_mut().for_each(|row| row[0] = "S0".into())),
            Groups(2),
        ),
        case(
            "ten thousand subjects of two rows",
            {
                let row = |s: usize, t: usize| format!("s{s},{},{t},{}\n", ["a", "b"][s % 2], (s * 37 + t * 11) % 101);
                let body: String = (0..10_000).flat_map(|s| (0..2).map(move |t| row(s, t))).collect();
                format!("{HEAD}\n{body}")
            },
            Groups(2),
        ),
        case(
            "rows in no order",
            table(&{
                let mut rows = rows();
                rows.sort_by_key(|row| row[3].chars().rev().collect::<String>());
                rows
            }),
            Groups(2),
        ),
    ]
}

/// All of them.
pub(crate) fn cases() -> Vec<Case> {
    [sizes(), responses(), times(), subjects()].concat()
}
