//! Reference cases that go along, so that a copy can be checked where it is used: the invented examples under
//! several plans, with what the native command finds in them.

use std::fs;
use std::io::Write;
use std::path::Path;
use std::process::Stdio;

use serde_json::{Map, Value, json};
use sha2::{Digest, Sha256};

use crate::failure::{About, Failure, Outcome};
use crate::places::Places;
use crate::run;

/// Name of the case, file of the example, keys of its plan that are replaced. They take different ways through
/// the engine; the last one draws random numbers.
const CASES: [(&str, &str, &str); 7] = [
    ("curved courses, level and trend per subject, log scale", "wounds.csv", "{}"),
    (
        "straight courses, no subject effects",
        "wounds.csv",
        r#"{"subjects": "none", "curves": {"shape": "straight"}, "comparisons": {"small_sample": "none"}}"#,
    ),
    (
        "spreads per group",
        "wounds.csv",
        r#"{"subjects": "slope", "subjects_spread": "by-group", "errors": {"spread": "by-group"}}"#,
    ),
    ("visits at any date", "ferritin.csv", "{}"),
    ("serial correlation, a column per week", "weights.csv", "{}"),
    ("a mean per visit", "weights.csv", r#"{"subjects": "intercept", "curves": {"shape": "by-time"}, "errors": {}}"#),
    (
        "bands calibrated by 99 refits",
        "wounds.csv",
        r#"{"subjects": "intercept", "comparisons": {"small_sample": "calibrated", "refits": 99}}"#,
    ),
];

/// `{"version", "wasm": SHA-256, "cases": [{"name", "file", "plan", "expected"}]}`; `expected` is the part of the
/// findings that is compared, numbers with 15 digits.
///
/// # Errors
/// When the native command cannot be built, or a case ends in no findings.
pub(super) fn text(places: &Places, wasm: &[u8]) -> Outcome<String> {
    let mut build = run::command("cargo");
    build.args(["build", "--quiet", "--locked", "--package", "courseband-cli"]).current_dir(places.root());
    run::show(&mut build)?;
    let native = places.target().join("debug/courseband");
    let list = fs::read_to_string(places.demo_data().join("demos.json")).about("demos.json")?;
    let demos: Vec<Value> = serde_json::from_str(&list).about("demos.json")?;
    let mut cases = Vec::new();
    for (name, file, changes) in CASES {
        let demo = demos.iter().find(|demo| demo["file"] == file);
        let demo = demo.ok_or_else(|| Failure::new(format!("{file} is no invented example")))?;
        let plan = changed(&demo["plan"], &serde_json::from_str(changes).about(name)?);
        let findings = findings(&native, &places.demo_data().join(file), &plan).about(name)?;
        let expected = compared(&findings);
        if expected["curves"].as_array().is_none_or(Vec::is_empty) {
            return Err(Failure::new(format!("the reference case `{name}` ends in no courses")));
        }
        cases.push(json!({ "name": name, "file": file, "title": demo["title"], "plan": plan, "expected": expected }));
    }
    let whole = json!({ "version": env!("CARGO_PKG_VERSION"), "wasm": digest(wasm), "cases": cases });
    Ok(whole.to_string().replace('<', "\\u003c"))
}

/// SHA-256 in hexadecimal digits.
pub(super) fn digest(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// The plan with the first level of its keys replaced.
fn changed(plan: &Value, changes: &Map<String, Value>) -> Value {
    let mut plan = plan.clone();
    for (key, value) in changes {
        plan[key] = value.clone();
    }
    plan
}

fn findings(native: &Path, table: &Path, plan: &Value) -> Outcome<Value> {
    let mut command = run::command(&native.to_string_lossy());
    command.arg(table).args(["--plan", "-"]).stdin(Stdio::piped()).stdout(Stdio::piped());
    let mut child = command.spawn().about("the native command")?;
    if let Some(mut input) = child.stdin.take() {
        input.write_all(plan.to_string().as_bytes()).about("the plan")?;
    }
    let output = child.wait_with_output().about("the native command")?;
    if !output.status.success() {
        return Err(Failure::new(format!("the native command ended with {}", output.status)));
    }
    serde_json::from_slice(&output.stdout).about("the findings")
}

/// The part of the findings that is compared: variances, and curves and gaps at the visits.
fn compared(findings: &Value) -> Value {
    let of = |value: &Value, keys: &[&str]| -> Value {
        keys.iter().map(|key| ((*key).to_owned(), shortened(&value[*key]))).collect::<Map<_, _>>().into()
    };
    let each = |list: &Value, keys: &[&str], points: &[&str]| -> Value {
        let items = list.as_array().into_iter().flatten().map(|item| {
            let mut kept = of(item, keys);
            kept["at_visits"] = of(&item["at_visits"], points);
            kept
        });
        items.collect::<Vec<_>>().into()
    };
    json!({
        "fit": of(&findings["fit"], &["status", "log_reml", "residual_sd", "subject_covariance", "serial_correlation"]),
        "curves": each(&findings["curves"], &["group"], &["time", "mean", "lower", "upper"]),
        "differences": each(&findings["differences"], &["from", "to", "stretches", "beyond"], &["time", "estimate", "lower", "upper"]),
    })
}

/// Numbers with 15 digits: more than is compared, and the same text where only the last bits differ.
fn shortened(value: &Value) -> Value {
    match value {
        Value::Number(number) if number.is_f64() => {
            number.as_f64().and_then(|x| format!("{x:.14e}").parse::<f64>().ok()).map_or(Value::Null, Value::from)
        }
        Value::Array(items) => items.iter().map(shortened).collect(),
        Value::Object(map) => {
            map.iter().map(|(key, value)| (key.clone(), shortened(value))).collect::<Map<_, _>>().into()
        }
        other => other.clone(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_what_is_compared_is_kept_and_shortened() {
        let findings = json!({
            "fit": {"status": "converged", "log_reml": 1.234_567_890_123_456_7, "remarks": ["x"]},
            "curves": [{"group": "a", "time": [0.0], "at_visits": {"time": [0.0], "mean": [1.0], "se": [2.0]}}],
            "differences": [], "sentences": ["s"],
        });
        let kept = compared(&findings);
        assert_eq!(kept["fit"]["log_reml"], json!(1.234_567_890_123_46));
        assert_eq!(kept["curves"][0]["at_visits"], json!({"time": [0.0], "mean": [1.0], "lower": null, "upper": null}));
        assert!(kept.get("sentences").is_none() && kept["curves"][0].get("time").is_none());
    }

    #[test]
    fn keys_of_the_plan_are_replaced_whole_and_digests_are_known() {
        let changes = json!({"a": {"c": 2}});
        assert_eq!(
            changed(&json!({"a": {"b": 1}, "d": 3}), changes.as_object().unwrap()),
            json!({"a": {"c": 2}, "d": 3})
        );
        // FIPS 180-4, the example of one block.
        assert_eq!(digest(b"abc"), "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    }
}
