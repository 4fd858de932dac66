//! The files of `reference/expected`: one value a row.

use crate::cases::path;

/// One expected value.
pub(crate) struct Expected {
    pub(crate) case: String,
    pub(crate) quantity: String,
    /// A group; `all` for what groups share; `to - from` for a pair; empty where there is none.
    pub(crate) group: String,
    pub(crate) time: Option<f64>,
    pub(crate) value: f64,
    /// Absolute; where absent, the file's rule holds.
    pub(crate) tolerance: Option<f64>,
    pub(crate) source: String,
}

/// Rows of an expected file; `source` where a row names none.
pub(crate) fn read(file: &str, source: &str) -> Vec<Expected> {
    let file = path(&format!("expected/{file}"));
    let mut reader = csv::Reader::from_path(&file).unwrap_or_else(|error| panic!("{file}: {error}"));
    let rows = reader.records().map(|record| {
        let record = record.unwrap();
        let cell = |k: usize| record.get(k).unwrap_or("").to_string();
        let number = |k: usize| {
            let text = cell(k);
            (!text.is_empty()).then(|| text.parse::<f64>().unwrap_or_else(|_| panic!("{file}: {text} is no number")))
        };
        Expected {
            case: cell(0),
            quantity: cell(1),
            group: cell(2),
            time: number(3),
            value: number(4).unwrap_or_else(|| panic!("{file}: no value in {record:?}")),
            tolerance: number(5),
            source: if cell(6).is_empty() { source.to_string() } else { format!("{source}{}", cell(6)) },
        }
    });
    rows.collect()
}
