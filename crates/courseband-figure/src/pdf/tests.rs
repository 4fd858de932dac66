//! The file's parts, and what it refuses.

use super::*;
use crate::build::describe;
use crate::fixture;
use crate::text::Measure;
use crate::view::{Theme, View};

fn pdf(view: &View) -> Result<String, String> {
    let source = fixture::source(3);
    let figure = describe(&source, &fixture::traces(&source, 8), view);
    to_pdf(&figure, "A title – β").map(|bytes| String::from_utf8(bytes).unwrap())
}

#[test]
fn places_and_lengths_are_right_and_the_same_figure_gives_the_same_bytes() {
    let view = View { width: 640.0, theme: Theme::Print, ..View::default() };
    let text = pdf(&view).unwrap();
    assert_eq!(text, pdf(&view).unwrap());
    let start: usize = text.split("startxref\n").nth(1).unwrap().lines().next().unwrap().parse().unwrap();
    assert!(text[start..].starts_with("xref\n0 9\n"));
    for (k, line) in text[start..].lines().skip(3).take(8).enumerate() {
        let place: usize = line[..10].parse().unwrap();
        assert!(text[place..].starts_with(&format!("{} 0 obj", k + 1)), "object {}", k + 1);
    }
    let length: usize = text.split("/Length ").nth(1).unwrap().split(' ').next().unwrap().parse().unwrap();
    let content = text.split_once("stream\n").unwrap().1.split_once("endstream").unwrap().0;
    assert_eq!(content.len(), length);
    assert!(text.contains("/MediaBox [0 0 480.00 "), "640 px are 480 points");
    assert_eq!(content.matches("BT ").count(), content.matches("ET\n").count());
    assert!(!text.contains("/Image"));
}

#[test]
fn letters_that_no_reader_has_are_refused_by_name() {
    let named = |name: &str| View { names: vec![name.into()], ..View::default() };
    let refusal = pdf(&named("水")).unwrap_err();
    assert!(refusal.contains("‘水’") && refusal.contains("SVG"), "{refusal}");
    assert!(pdf(&named("β-block été ≤ 5 µg")).is_ok());
}

#[test]
fn widths_are_those_of_the_fonts() {
    // Adobe's metrics: H 722, e 556, l 222, o 556; the minus of Symbol 549.
    assert!((Helvetica.width("Hello", 1000.0, false) - 2278.0).abs() < 1e-9);
    assert!((Helvetica.width("−é", 1000.0, false) - 1105.0).abs() < 1e-9);
    assert!(Helvetica.width("Hello", 10.0, true) > Helvetica.width("Hello", 10.0, false));
}
