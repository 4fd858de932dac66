//! Reading of heads: cases in memory.

use super::*;

fn told(name: &str) -> String {
    match read_head(name) {
        Some(head) => format!("{}|{}|{}|{}", head.stem, head.text, head.value, head.clear),
        None => "none".to_string(),
    }
}

#[test]
fn heads_that_are_times() {
    for (name, expected) in [
        ("7", "|7|7|true"),
        ("day 7", "|day 7|7|true"),
        ("D7", "|D7|7|true"),
        ("Week 2", "|Week 2|2|true"),
        ("weight_d7", "weight|d7|7|true"),
        ("weight day 7", "weight|day 7|7|true"),
        ("body weight_day_7", "body weight|day_7|7|true"),
        ("BW (day 7)", "BW|day 7|7|true"),
        ("day7_weight", "weight|day7|7|true"),
        ("size.152", "size|152|152|false"),
        ("weight7", "weight|7|7|false"),
        ("x7", "x|7|7|false"),
        ("s1", "s|1|1|false"),
        ("weight", "none"),
        ("deg0NA", "none"),
        ("", "none"),
    ] {
        assert_eq!(told(name), expected, "{name:?}");
    }
    assert!(read_head("2024-03-05").is_some_and(|head| head.clear && head.stem.is_empty()));
}
