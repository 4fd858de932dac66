//! The command keeps its contract: keys, refusals, exits, shapes.

use serde_json::{Value, json};
use std::io::Write;
use std::process::{Command, Output, Stdio};

const TABLE: &str = "subject,time,group,y\n";

/// Six subjects in two groups, six times; `b` rises faster.
fn table() -> String {
    let mut text = String::from(TABLE);
    for s in 0..6 {
        for t in 0..6 {
            let group = if s % 2 == 0 { "a" } else { "b" };
            let wave = ((s * 7 + t * 3) % 5) as f64 * 0.1;
            let y = 10.0 + f64::from(t) * if s % 2 == 0 { 0.2 } else { 0.9 } + f64::from(s) * 0.15 + wave;
            text += &format!("s{s},{t},{group},{y:.3}\n");
        }
    }
    text
}

fn call(arguments: &[&str], input: &str) -> Output {
    let mut child = Command::new(env!("CARGO_BIN_EXE_courseband"))
        .args(arguments)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    // A command that refuses its arguments does not read its input.
    let _ = child.stdin.take().unwrap().write_all(input.as_bytes());
    child.wait_with_output().unwrap()
}

struct File(std::path::PathBuf);

impl File {
    fn new(name: &str, text: &str) -> File {
        let path = std::env::temp_dir().join(format!("courseband-{}-{name}-{:p}.json", std::process::id(), &name));
        std::fs::write(&path, text).unwrap();
        File(path)
    }
}

impl Drop for File {
    fn drop(&mut self) {
        let _ = std::fs::remove_file(&self.0);
    }
}

fn found(text: &str, plan: Value) -> Value {
    let file = File::new("plan", &plan.to_string());
    let output = call(&["-", "--plan", file.0.to_str().unwrap()], text);
    let words = String::from_utf8_lossy(&output.stderr).into_owned();
    assert_eq!(output.status.code(), Some(0), "{words}");
    serde_json::from_slice(&output.stdout).unwrap()
}

fn refused(text: &str, plan: Value) -> String {
    let file = File::new("bad", &plan.to_string());
    let output = call(&["-", "--plan", file.0.to_str().unwrap()], text);
    let words = String::from_utf8_lossy(&output.stderr).into_owned();
    assert_eq!(output.status.code(), Some(2), "{plan}: {words}");
    assert!(output.stdout.is_empty(), "{plan}");
    assert_eq!(words.trim_end().lines().count(), 1, "{words}");
    words
}

#[test]
fn findings_have_the_keys_of_the_contract() {
    let f = found(&table(), json!({ "grid": { "count": 11 } }));
    for key in ["rows", "subjects", "columns", "problems", "fit", "curves", "differences", "notes"] {
        assert!(f.get(key).is_some(), "{key}");
    }
    assert_eq!((f["rows"].as_u64(), f["subjects"].as_u64()), (Some(36), Some(6)));
    for key in ["status", "log_reml", "residual_sd", "subject_covariance", "serial_correlation", "effective_df"] {
        assert!(f["fit"].get(key).is_some(), "fit.{key}");
    }
    let grid: Vec<f64> = (0..11).map(|k| f64::from(k) * 0.5).collect();
    let numbers = |v: &Value| v.as_array().unwrap().iter().map(|x| x.as_f64().unwrap()).collect::<Vec<_>>();
    for curve in f["curves"].as_array().unwrap() {
        assert_eq!(numbers(&curve["time"]), grid);
        for key in ["mean", "se", "lower", "upper"] {
            assert_eq!(numbers(&curve[key]).len(), 11, "{key}");
        }
    }
    let d = &f["differences"][0];
    assert_eq!((d["from"].as_str(), d["to"].as_str()), (Some("a"), Some("b")));
    let (a, b) = (numbers(&f["curves"][0]["mean"]), numbers(&f["curves"][1]["mean"]));
    for (k, e) in numbers(&d["estimate"]).iter().enumerate() {
        assert!((e - (b[k] - a[k])).abs() < 1e-9);
    }
    assert_eq!(numbers(&d["support"]), [0.0, 5.0]);
    for key in ["stretches", "beyond", "inside", "critical", "lower", "upper", "se"] {
        assert!(d.get(key).is_some(), "{key}");
    }
    assert_eq!(d["stretches"][0]["direction"], "above");
    assert_eq!(d["stretches"][0]["open_end"], true);
}

#[test]
fn plug_in_gives_one_critical_value_for_all_pairs() {
    let three = table().replace("s4,0,a", "s4,0,c");
    let three: String = three
        .lines()
        .map(|l| if l.starts_with("s4,") { l.replace(",a,", ",c,") + "\n" } else { format!("{l}\n") })
        .collect();
    let f = found(&three, json!({ "comparisons": { "small_sample": "none" }, "subjects": "none" }));
    let criticals: Vec<&Value> = f["differences"].as_array().unwrap().iter().map(|d| &d["critical"]).collect();
    assert_eq!(criticals.len(), 3);
    assert!(criticals.iter().all(|c| c.is_number() && *c == criticals[0]));
}

#[test]
fn control_is_from() {
    let f = found(&table(), json!({ "comparisons": { "control": "b" } }));
    assert_eq!(f["differences"][0]["from"], "b");
}

#[test]
fn unknown_keys_are_refused_by_name_at_every_level() {
    for (key, plan) in [
        ("colour", json!({ "colour": 1 })),
        ("subjekt", json!({ "columns": { "subjekt": "id" } })),
        ("why", json!({ "exclusions": [{ "row": 2, "reason": "x", "why": "y" }] })),
        ("link", json!({ "response": { "link": "log" } })),
        ("knots", json!({ "curves": { "knots": 5 } })),
        ("rho", json!({ "errors": { "rho": 0.5 } })),
        ("alpha", json!({ "comparisons": { "alpha": 0.05 } })),
        ("step", json!({ "grid": { "step": 1 } })),
    ] {
        let words = refused(&table(), plan);
        assert!(words.contains(key), "{key}: {words}");
    }
}

#[test]
fn what_cannot_be_used_is_refused_with_what_to_do() {
    let with = |line: &str| table() + line;
    for (expected, text, plan) in [
        ("control", table(), json!({ "comparisons": { "control": "placebo" } })),
        ("control", table(), json!({ "comparisons": { "pairs": "against-control" } })),
        ("percent", table(), json!({ "comparisons": { "margin": 10, "margin_unit": "percent" } })),
        ("level", table(), json!({ "comparisons": { "level": 95 } })),
        ("nothere", table(), json!({ "columns": { "response": "nothere" } })),
        ("row 38", with("s9,soon,a,3\n"), json!({})),
        ("38", with(",3,a,3\n"), json!({})),
        ("nugget", with("s0,5,a,3\n"), json!({ "errors": { "serial": "ar1" } })),
        ("38", with("s0,9,b,3\n"), json!({})),
        ("38", with("s0,9,a,-1\n"), json!({ "response": { "transform": "log" } })),
        ("400", table(), json!({ "exclusions": [{ "row": 400, "reason": "no such row" }] })),
        ("curve", table(), json!({ "subjects": "curve", "errors": { "serial": "ar1" } })),
        ("unstructured", table(), json!({ "errors": { "serial": "unstructured" } })),
        ("grid", table(), json!({ "grid": { "start": 5, "end": 1 } })),
        ("dimension", table(), json!({ "curves": { "dimension": 1 } })),
    ] {
        let words = refused(&text, plan.clone());
        assert!(words.contains(expected), "{plan}: {words}");
    }
    assert!(refused("", json!({})).contains("empty"));
}

#[test]
fn excluded_rows_and_dropped_values_are_listed() {
    let text = table() + "s0,9,a,6O\ns1,9,b,\n";
    let f = found(&text, json!({ "exclusions": [{ "row": 2, "reason": "spilled" }] }));
    assert_eq!(f["rows"], 35);
    let rows: Vec<u64> = f["problems"].as_array().unwrap().iter().map(|p| p["row"].as_u64().unwrap()).collect();
    assert!(rows.contains(&38) && rows.contains(&39), "{rows:?}");
}

#[test]
fn a_fit_that_failed_says_so_and_exits_zero() {
    let text = String::from(TABLE) + "s1,0,a,5\ns1,1,a,5\ns2,0,b,5\ns2,1,b,5\ns3,0,a,5\ns4,1,b,5\n";
    let f = found(&text, json!({}));
    assert_eq!(f["fit"]["status"], "failed");
    assert_eq!(f["curves"].as_array().unwrap().len() + f["differences"].as_array().unwrap().len(), 0);
    assert!(f["notes"].as_array().unwrap().iter().any(|n| n["about"] == "fit"));
}

#[test]
fn the_same_again_gives_the_same_bytes() {
    let plan = File::new("same", "{}");
    let once = || call(&["-", "--plan", plan.0.to_str().unwrap()], &table()).stdout;
    assert_eq!(once(), once());
}

#[test]
fn row_order_names_and_units_do_not_matter() {
    let base = found(&table(), json!({}));
    let estimates = |f: &Value| -> Vec<f64> {
        f["differences"][0]["estimate"].as_array().unwrap().iter().map(|x| x.as_f64().unwrap()).collect()
    };
    let close = |got: &[f64], scale: f64| {
        estimates(&base).iter().zip(got).all(|(a, b)| (a * scale - b).abs() < 1e-6 * (1.0 + b.abs()))
    };
    let mut lines: Vec<String> = table().lines().skip(1).map(String::from).collect();
    lines.sort_by_key(|line| line.chars().rev().collect::<String>());
    lines.sort_by_key(|line| !line.starts_with("s0"));
    let shuffled = String::from(TABLE) + &lines.join("\n") + "\n";
    assert!(close(&estimates(&found(&shuffled, json!({ "comparisons": { "control": "a" } }))), 1.0));
    let renamed = table().replace(",a,", ",zeta,").replace(",b,", ",alpha,");
    assert!(close(&estimates(&found(&renamed, json!({}))), 1.0));
    let scaled: String = (table().lines().enumerate())
        .map(|(k, line)| match line.rsplit_once(',') {
            Some((head, y)) if k > 0 => format!("{head},{:.6}\n", y.parse::<f64>().unwrap() * 1000.0),
            _ => format!("{line}\n"),
        })
        .collect();
    assert!(close(&estimates(&found(&scaled, json!({}))), 1000.0));
}

#[test]
fn wrong_words_exit_two_and_help_exits_zero() {
    for words in [&["nothere.csv"][..], &["--nonsense"], &[], &["a", "b"]] {
        let output = call(words, "");
        assert_eq!(output.status.code(), Some(2), "{words:?}");
        assert!(output.stdout.is_empty() && !output.stderr.is_empty());
    }
    assert_eq!(call(&["--help"], "").status.code(), Some(0));
    let checked = call(&["check", "-"], &table());
    assert_eq!(checked.status.code(), Some(0));
    assert!(String::from_utf8_lossy(&checked.stdout).contains("Usable rows: 36"));
}
