//! The descriptive table: each group at each time.

use crate::observations::Observations;

/// One group at one time.
#[derive(Debug, Clone, PartialEq)]
pub struct Description {
    /// Index into [`Observations::groups`].
    pub group: u32,
    /// Time.
    pub time: f64,
    /// Observations.
    pub n: usize,
    /// Mean.
    pub mean: f64,
    /// Standard deviation with n - 1; `None` for one observation.
    pub sd: Option<f64>,
    /// Median; the mean of the middle two for an even number.
    pub median: f64,
    /// Smallest.
    pub min: f64,
    /// Largest.
    pub max: f64,
}

/// Describes each group at each of its times, by group, then time.
pub fn describe(observations: &Observations) -> Vec<Description> {
    let group = |at: u32| observations.subjects[observations.subject[at as usize] as usize].group;
    let (time, response) = (&observations.time, &observations.response);
    let mut order: Vec<u32> = (0..time.len() as u32).collect();
    order.sort_unstable_by(|&a, &b| {
        let by_time = time[a as usize].total_cmp(&time[b as usize]);
        group(a).cmp(&group(b)).then(by_time).then(response[a as usize].total_cmp(&response[b as usize]))
    });
    order
        .chunk_by(|&a, &b| group(a) == group(b) && time[a as usize] == time[b as usize])
        .map(|cell| {
            one(
                group(cell[0]),
                time[cell[0] as usize],
                &cell.iter().map(|&at| response[at as usize]).collect::<Vec<_>>(),
            )
        })
        .collect()
}

/// Describes values in ascending order.
fn one(group: u32, time: f64, values: &[f64]) -> Description {
    let n = values.len();
    let mean = values.iter().sum::<f64>() / n as f64;
    let squares: f64 = values.iter().map(|value| (value - mean) * (value - mean)).sum();
    let middle = values[n / 2];
    let median = if n % 2 == 1 { middle } else { values[n / 2 - 1] / 2.0 + middle / 2.0 };
    let sd = (n > 1).then(|| (squares / (n - 1) as f64).sqrt());
    Description { group, time, n, mean, sd, median, min: values[0], max: values[n - 1] }
}
