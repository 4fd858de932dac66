//! Hostile and degenerate tables through the command: right findings, or one clear message and exit 2.
//!
//! Never a panic, never a hang, never a number that is none. Every table is left in the target folder
//! (`tmp/hostile`), where the test of the wasm takes its sample.

mod corpus;
mod designs;
mod encodings;
mod names;

use corpus::{Case, Outcome};
use serde_json::Value;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

/// No case may take longer; the slowest takes a few seconds in a build that is not optimised.
const LONGEST: Duration = Duration::from_secs(40);

/// What the command did.
struct Done {
    code: Option<i32>,
    out: String,
    said: String,
}

fn folder() -> PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("hostile");
    std::fs::create_dir_all(&folder).expect("a folder");
    folder
}

fn file_name(at: usize, name: &str) -> String {
    let plain: String = name.chars().map(|c| if c.is_ascii_alphanumeric() { c } else { '-' }).collect();
    format!("{at:03}-{plain}")
}

fn run(at: usize, case: &Case) -> Result<Done, String> {
    let (folder, name) = (folder(), file_name(at, &case.name));
    let (table, plan) = (folder.join(format!("{name}.table")), folder.join(format!("{name}.plan.json")));
    std::fs::write(&table, &case.table).map_err(|error| error.to_string())?;
    std::fs::write(&plan, case.plan.to_string()).map_err(|error| error.to_string())?;
    let mut child = Command::new(env!("CARGO_BIN_EXE_courseband"))
        .arg(&table)
        .arg("--plan")
        .arg(&plan)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .map_err(|error| error.to_string())?;
    let (out, said) = (reader(child.stdout.take()), reader(child.stderr.take()));
    let code = ended(&mut child)?;
    Ok(Done { code, out: out.join().unwrap_or_default(), said: said.join().unwrap_or_default() })
}

fn reader(pipe: Option<impl Read + Send + 'static>) -> std::thread::JoinHandle<String> {
    std::thread::spawn(move || {
        let mut bytes = Vec::new();
        pipe.map(|mut pipe| pipe.read_to_end(&mut bytes));
        String::from_utf8_lossy(&bytes).into_owned()
    })
}

fn ended(child: &mut Child) -> Result<Option<i32>, String> {
    let began = Instant::now();
    loop {
        match child.try_wait() {
            Ok(Some(status)) => return Ok(status.code()),
            Ok(None) if began.elapsed() < LONGEST => std::thread::sleep(Duration::from_millis(2)),
            Ok(None) => {
                let _ = child.kill();
                let _ = child.wait();
                return Err(format!("still running after {} s", LONGEST.as_secs()));
            }
            Err(error) => return Err(error.to_string()),
        }
    }
}

/// What is wrong with a case, if anything.
fn fault(case: &Case, done: &Done, plain: &Value) -> Option<String> {
    match (&case.outcome, done.code) {
        (Outcome::Refused(words), Some(2)) => refusal_fault(done, words),
        (Outcome::Groups(_) | Outcome::AsPlain, Some(0)) => {
            let findings: Value = match serde_json::from_str(&done.out) {
                Ok(findings) => findings,
                Err(error) => return Some(format!("no JSON: {error}")),
            };
            findings_fault(&findings).or_else(|| match case.outcome {
                Outcome::AsPlain => difference(&findings, plain),
                Outcome::Groups(count) => {
                    let found = findings["groups"].as_array().map_or(0, Vec::len);
                    (found != count).then(|| format!("{found} groups, expected {count}"))
                }
                Outcome::Refused(_) => None,
            })
        }
        (expected, code) => {
            Some(format!("exit {code:?}, expected {expected:?}: {}", done.said.chars().take(300).collect::<String>()))
        }
    }
}

fn refusal_fault(done: &Done, words: &str) -> Option<String> {
    let said = done.said.trim_end_matches('\n');
    let odd = |c: char| c.is_control();
    if !done.out.is_empty() {
        return Some("a refusal with something on standard output".into());
    }
    if !(20..1200).contains(&said.chars().count()) || said.contains(odd) || said.contains("panicked") {
        return Some(format!("no clear message: {said:?}"));
    }
    (!said.contains(words)).then(|| format!("the message lacks {words:?}: {said}"))
}

/// Every number is one, limits hold their estimates, and a failed fit has nothing to show.
fn findings_fault(findings: &Value) -> Option<String> {
    let text = findings["sentences"].to_string() + &findings["notes"].to_string();
    if ["NaN", " inf", "-inf", "infinity"].iter().any(|word| text.contains(word)) {
        return Some(format!("words for numbers that are none: {}", text.chars().take(400).collect::<String>()));
    }
    let parts = || findings["curves"].as_array().into_iter().chain(findings["differences"].as_array()).flatten();
    let failed = findings["fit"]["status"] == "failed";
    if failed {
        let said = findings["fit"]["remarks"].as_array().is_some_and(|remarks| !remarks.is_empty());
        let empty = parts().count() == 0 && said;
        return (!empty).then(|| "a failed fit that shows something, or says nothing".to_string());
    }
    if findings["curves"].as_array().is_none_or(Vec::is_empty) {
        return Some("no curves, but no failure".into());
    }
    parts().find_map(part_fault)
}

fn part_fault(part: &Value) -> Option<String> {
    let key = if part.get("mean").is_some() { "mean" } else { "estimate" };
    let series = |name: &str| part[name].as_array().cloned().unwrap_or_default();
    let support: Vec<f64> = series("support").iter().filter_map(Value::as_f64).collect();
    let all = [series("time"), series(key), series("lower"), series("upper"), series("se")];
    for at in 0..all[0].len() {
        let [time, middle, lower, upper, se] = [0, 1, 2, 3, 4].map(|row| all[row].get(at).and_then(Value::as_f64));
        let inside = time.is_some_and(|time| support.len() == 2 && support[0] <= time && time <= support[1]);
        match (middle, lower, upper, se) {
            (Some(middle), Some(lower), Some(upper), Some(se)) if lower <= middle && middle <= upper && se >= 0.0 => {}
            (None, None, None, None) if !inside => {}
            // One subject has a course, but no band.
            (Some(_), None, None, None) => {}
            other => return Some(format!("at {time:?} of {}: {other:?}", part["group"])),
        }
    }
    None
}

/// The same numbers as the plain table's, but for the last digits.
fn difference(findings: &Value, plain: &Value) -> Option<String> {
    for place in ["/curves/0/mean", "/curves/1/upper", "/differences/0/estimate", "/differences/0/lower"] {
        let series = |value: &Value| -> Vec<f64> {
            value.pointer(place).and_then(Value::as_array).into_iter().flatten().filter_map(Value::as_f64).collect()
        };
        let (here, there) = (series(findings), series(plain));
        let close = |(a, b): (&f64, &f64)| (a - b).abs() <= 1e-6 * b.abs().max(1.0);
        if here.len() != there.len() || !here.iter().zip(&there).all(close) {
            return Some(format!("{place} differs from the plain table's: {:?} and {:?}", here.first(), there.first()));
        }
    }
    None
}

#[test]
fn every_table_ends_in_findings_or_in_one_clear_message() {
    let cases = [encodings::cases(), designs::cases(), names::cases()].concat();
    assert!(cases.len() >= 150, "only {} tables", cases.len());
    // Tables of an earlier run may be called otherwise.
    let _ = std::fs::remove_dir_all(folder());
    let first = run(999, &corpus::case("plain", corpus::plain(), Outcome::Groups(2))).expect("the plain table");
    let plain: Value = serde_json::from_str(&first.out).expect("findings of the plain table");
    let began = Instant::now();
    let mut faults = Vec::new();
    let (mut found, mut refused, mut slowest) = (0, 0, (Duration::ZERO, ""));
    for (at, case) in cases.iter().enumerate() {
        let start = Instant::now();
        let done = run(at, case);
        slowest = slowest.max((start.elapsed(), &case.name));
        match done {
            Ok(done) => {
                (found, refused) =
                    (found + usize::from(done.code == Some(0)), refused + usize::from(done.code == Some(2)));
                faults.extend(fault(case, &done, &plain).map(|fault| format!("{}: {fault}", case.name)));
            }
            Err(fault) => faults.push(format!("{}: {fault}", case.name)),
        }
    }
    println!(
        "{} tables: {found} with findings, {refused} refused, in {:.0} s; slowest {:.1} s ({})",
        cases.len(),
        began.elapsed().as_secs_f64(),
        slowest.0.as_secs_f64(),
        slowest.1
    );
    assert!(faults.is_empty(), "{} of {}:\n{}", faults.len(), cases.len(), faults.join("\n"));
}
