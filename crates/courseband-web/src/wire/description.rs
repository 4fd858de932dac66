//! The descriptive table.

use courseband_table::{Observations, describe};
use serde::Serialize;

/// Each group at each time.
#[derive(Debug, Serialize)]
pub(crate) struct Description {
    rows: Vec<Row>,
    /// Lines whose response is zero or negative.
    non_positive: Vec<u32>,
}

#[derive(Debug, Serialize)]
struct Row {
    group: String,
    time: f64,
    n: usize,
    mean: f64,
    sd: Option<f64>,
    median: f64,
    min: f64,
    max: f64,
}

impl Description {
    pub(crate) fn new(observations: &Observations) -> Self {
        let rows = describe(observations).into_iter().map(|row| Row {
            group: observations.groups[row.group as usize].clone(),
            time: row.time,
            n: row.n,
            mean: row.mean,
            sd: row.sd,
            median: row.median,
            min: row.min,
            max: row.max,
        });
        let lines = observations.response.iter().zip(&observations.line);
        let mut non_positive: Vec<u32> = lines.filter(|(y, _)| **y <= 0.0).map(|(_, &line)| line).collect();
        non_positive.sort_unstable();
        Description { rows: rows.collect(), non_positive }
    }
}
