//! The cases of `reference/cases.json`: a table and a plan each.

use courseband_study::{Findings, FitStatus, Plan, run};
use serde_json::Value;

/// A file of `tests/reference`.
pub(crate) fn path(file: &str) -> String {
    format!("{}/reference/{file}", env!("CARGO_MANIFEST_DIR"))
}

/// All cases, as one JSON document.
pub(crate) struct Cases(Value);

impl Cases {
    pub(crate) fn read() -> Cases {
        let file = path("cases.json");
        let text = std::fs::read_to_string(&file).unwrap_or_else(|error| panic!("{file}: {error}"));
        Cases(serde_json::from_str(&text).unwrap_or_else(|error| panic!("{file}: {error}")))
    }

    /// The findings of a case. Its plan is `base`, then what its table sets, then its own.
    pub(crate) fn findings(&self, case: &str) -> Findings {
        let entry = &self.0["cases"][case];
        let table = entry["table"].as_str().unwrap_or_else(|| panic!("no case {case} in cases.json"));
        let mut plan = self.0["base"].clone();
        merge(&mut plan, &self.0["tables"][table]);
        merge(&mut plan, &entry["plan"]);
        let plan = Plan::from_json(&plan.to_string()).unwrap_or_else(|refusal| panic!("{case}: {refusal}"));
        let bytes = std::fs::read(path(&format!("data/{table}.csv"))).unwrap();
        let findings = run(&bytes, &plan).unwrap_or_else(|refusal| panic!("{case}: {refusal}"));
        assert_ne!(findings.fit.status, FitStatus::Failed, "{case}: {:?}", findings.fit.remarks);
        findings
    }
}

/// Lays `over` on `under`: objects key by key, everything else replaced.
fn merge(under: &mut Value, over: &Value) {
    match (under, over) {
        (Value::Object(under), Value::Object(over)) => {
            for (key, value) in over {
                merge(under.entry(key.clone()).or_insert(Value::Null), value);
            }
        }
        (_, Value::Null) => {}
        (under, over) => *under = over.clone(),
    }
}
