//! A panel with columns that differ, columns that do not, and columns that cannot be used.

use super::*;

/// Columns: `up` differs clearly, `same` and `still` do not, `words` is no number, `flat` never changes.
fn panel() -> String {
    let mut text = String::from("mouse,arm,day,up,same,still,flat,words\n");
    let mut state: u32 = 7;
    let mut noise = || {
        state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
        f64::from(state >> 8) / f64::from(1_u32 << 24) - 0.5
    };
    for s in 0..16 {
        for day in 0..6 {
            let gap = if s % 2 == 1 { 0.8 * f64::from(day) } else { 0.0 };
            let cells = [10.0 + gap + noise(), 5.0 + noise(), 7.0 + noise()].map(|v| format!("{v:.3}"));
            text += &format!("m{s},{},{day},{},1,x{day}\n", ["a", "b"][s % 2], cells.join(","));
        }
    }
    text
}

fn plan(column: &str) -> Plan {
    Plan::from_json(&format!("{{\"columns\": {{\"response\": \"{column}\"}}}}")).unwrap()
}

#[test]
fn columns_that_can_be_responses_are_offered() {
    let mut study = Study::open(panel().as_bytes()).unwrap();
    assert_eq!(study.marker_columns(&plan("up")).unwrap(), ["up", "same", "still"]);
}

#[test]
fn what_differs_is_found_and_what_fails_is_listed_as_failed() {
    let mut study = Study::open(panel().as_bytes()).unwrap();
    let names = ["still", "up", "same", "words", "missing"];
    let markers: Vec<Marker> = names.iter().map(|name| study.marker(&plan(name), name)).collect();
    let all = MarkersFindings::new(&markers, 0.05, 0.95);
    assert_eq!(all.found, ["up"]);
    assert_eq!(all.failed.iter().map(|f| f.0.as_str()).collect::<Vec<_>>(), ["words", "missing"]);
    assert!(all.failed.iter().all(|f| !f.1.is_empty()));
    assert!(all.sentence.contains("Of 5 response columns 3 could be tested"), "{}", all.sentence);
    let results: Vec<&str> = all.table.rows.iter().map(|row| row[1].as_str()).collect();
    assert_eq!((all.table.rows[0][0].as_str(), results[0]), ("up", "found"));
    assert!(results[3].starts_with("no result: ") && results[4].starts_with("no result: "));
    // The smallest p of three is multiplied by three at most, and never shrinks.
    let (p, q) = (markers[1].p.unwrap(), all.q[1].unwrap());
    assert!(q >= p && q <= 3.0 * p + 1e-12 && all.q[3].is_none());
    // What is sent to the page and back is the same.
    let json = serde_json::to_string(&markers).unwrap();
    let back: Vec<Marker> = serde_json::from_str(&json).unwrap();
    assert_eq!(MarkersFindings::new(&back, 0.05, 0.95), all);
}

#[test]
fn columns_that_fail_do_not_count_as_tests() {
    let marker = |name: &str, p: Option<f64>| Marker { p, ..failed(name, "no".into()) };
    let some = [marker("a", Some(0.01)), marker("b", Some(0.04)), marker("c", None)];
    let all = MarkersFindings::new(&some, 0.05, 0.95);
    assert_eq!(all.q, [Some(0.02), Some(0.04), None]);
    assert_eq!(all.found, ["a", "b"]);
    assert_eq!(MarkersFindings::new(&some[..2], 0.03, 0.95).found, ["a"]);
}
