//! One plan over many response columns, such as a panel of markers: what each says, and which are to be believed
//! when so many were looked at.

use crate::findings::{Direction, Findings, FitStatus};
use crate::plan::{BandKind, Plan, SmallSample};
use crate::refusal::Refusal;
use crate::report::ReportTable;
use crate::sentences::{decimals, joined, number, percent};
use crate::study::Study;
use courseband_engine::usual::benjamini_hochberg;
use serde::{Deserialize, Serialize};

/// What a plan says of one response column.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Marker {
    /// What it is called.
    pub name: String,
    /// Why it gives no result; empty where it does.
    pub failed: String,
    /// Rows fitted.
    pub rows: usize,
    /// Were all compared courses one: chance of so large a largest gap, anywhere and for any pair.
    pub p: Option<f64>,
    /// Word for one time unit.
    pub time_word: String,
    /// True where gaps are ratios.
    pub ratio: bool,
    /// Compared pairs.
    pub pairs: Vec<MarkerPair>,
}

/// One compared pair of a marker.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct MarkerPair {
    /// The control, else the earlier group.
    pub from: String,
    /// The other group.
    pub to: String,
    /// Adjusted over the marker's pairs.
    pub p: Option<f64>,
    /// When its band first excludes no gap, with the direction; `null` where it never does.
    pub first: Option<(f64, String)>,
    /// Average gap (or ratio) with its interval by itself.
    pub average: Option<[f64; 3]>,
}

/// All markers together.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct MarkersFindings {
    /// What was found, in sentences.
    pub sentence: String,
    /// How, for a methods section.
    pub method: String,
    /// One row per marker and pair.
    pub table: ReportTable,
    /// Markers whose courses come apart at the asked rate.
    pub found: Vec<String>,
    /// Markers that gave no result, with the reason.
    pub failed: Vec<(String, String)>,
    /// By marker, p adjusted over the markers that were tested.
    pub q: Vec<Option<f64>>,
}

impl Study {
    /// Columns of numbers that could be the response of a plan, the one in use among them.
    ///
    /// # Errors
    /// A plan or table that cannot be used.
    pub fn marker_columns(&mut self, plan: &Plan) -> Result<Vec<String>, Refusal> {
        let used = self.reading(plan)?.columns.clone();
        let taken = [used.subject, used.time, used.group, used.cluster, plan.columns.block.clone()];
        let is_free = |name: &String| {
            !taken.iter().flatten().any(|other| other == name) && !plan.columns.covariates.contains(name)
        };
        Ok(self.table().number_columns(&plan.request()).into_iter().filter(is_free).collect())
    }

    /// What a plan says of its response, as one of many. Bands are simultaneous, with degrees of freedom. A column
    /// that cannot be used is no error: it says why.
    #[must_use]
    pub fn marker(&mut self, plan: &Plan, name: &str) -> Marker {
        let mut quick = plan.clone();
        quick.comparisons.band = BandKind::Simultaneous;
        if quick.comparisons.small_sample == SmallSample::Calibrated {
            quick.comparisons.small_sample = SmallSample::Df;
        }
        match self.run(&quick) {
            Ok(findings) => marker(name, &findings),
            Err(refusal) => failed(name, refusal.message),
        }
    }
}

fn failed(name: &str, why: String) -> Marker {
    Marker {
        name: name.into(),
        failed: why,
        rows: 0,
        p: None,
        time_word: String::new(),
        ratio: false,
        pairs: Vec::new(),
    }
}

fn marker(name: &str, findings: &Findings) -> Marker {
    if findings.fit.status == FitStatus::Failed {
        return failed(name, findings.fit.remarks.join(" "));
    }
    let pairs: Vec<MarkerPair> = (findings.differences.iter().zip(&findings.pair_effects))
        .map(|(difference, effects)| MarkerPair {
            from: difference.from.clone(),
            to: difference.to.clone(),
            p: difference.p_adjusted,
            first: difference.stretches.first().map(|stretch| {
                let above = stretch.direction == Some(Direction::Above);
                (stretch.start, if above { "above" } else { "below" }.to_string())
            }),
            average: effects.average.as_ref().map(|e| [e.estimate, e.lower, e.upper]),
        })
        .collect();
    let p = pairs.iter().filter_map(|pair| pair.p).reduce(f64::min);
    let untested = if p.is_none() { "No compared pair could be tested." } else { "" };
    Marker {
        name: name.into(),
        failed: untested.into(),
        rows: findings.rows,
        p,
        time_word: findings.scale.time_word.clone(),
        ratio: findings.scale.ratio,
        pairs,
    }
}

impl MarkersFindings {
    /// All markers together: those whose adjusted p is at most `rate` are found. `level` is that of the markers' own
    /// bands and intervals.
    #[must_use]
    pub fn new(markers: &[Marker], rate: f64, level: f64) -> MarkersFindings {
        let tested: Vec<usize> = (0..markers.len()).filter(|&k| markers[k].p.is_some()).collect();
        let p: Vec<f64> = tested.iter().filter_map(|&k| markers[k].p).collect();
        let mut q = vec![None; markers.len()];
        for (&k, adjusted) in tested.iter().zip(benjamini_hochberg(&p)) {
            q[k] = Some(adjusted);
        }
        let is_found = |k: usize| q[k].is_some_and(|q| q <= rate);
        let found: Vec<String> = (0..markers.len()).filter(|&k| is_found(k)).map(|k| markers[k].name.clone()).collect();
        let failed: Vec<(String, String)> =
            markers.iter().filter(|m| m.p.is_none()).map(|m| (m.name.clone(), m.failed.clone())).collect();
        let mut order: Vec<usize> = (0..markers.len()).collect();
        let rank = |k: usize| q[k].unwrap_or(f64::INFINITY);
        order.sort_by(|&a, &b| rank(a).total_cmp(&rank(b)).then(p_of(markers, a).total_cmp(&p_of(markers, b))));
        let rows = order.iter().flat_map(|&k| rows(&markers[k], q[k], rate)).collect();
        MarkersFindings {
            sentence: sentence(markers.len(), tested.len(), &found, failed.len(), rate),
            method: method(rate, level),
            table: table(markers, rows),
            found,
            failed,
            q,
        }
    }
}

fn p_of(markers: &[Marker], k: usize) -> f64 {
    markers[k].p.unwrap_or(f64::INFINITY)
}

fn sentence(all: usize, tested: usize, found: &[String], failed: usize, rate: f64) -> String {
    let columns = if all == 1 { "response column" } else { "response columns" };
    let mut text = format!("Of {all} {columns} {tested} could be tested. ");
    text += &match found {
        [] => format!("In none do courses come apart at a false-discovery rate of {}.", percent(rate)),
        [one] => format!("In one do courses come apart at a false-discovery rate of {}: {one}.", percent(rate)),
        many => format!(
            "In {} courses come apart at a false-discovery rate of {}: {}.",
            many.len(),
            percent(rate),
            joined(many)
        ),
    };
    match failed {
        0 => {}
        1 => text += " One gave no result and is listed with the reason.",
        n => text += &format!(" {n} gave no result and are listed with the reason."),
    }
    text
}

fn method(rate: f64, level: f64) -> String {
    format!(
        "One plan was used for every response column. For each, p is the chance of so large a largest gap in standard \
         errors, anywhere over the course and for any compared pair, were the courses one; these were adjusted over the columns so \
         that on average at most {} of those found are false (Benjamini & Hochberg 1995, J. R. Stat. Soc. B 57:289; it holds for \
         independent columns and for columns that go together, Benjamini & Yekutieli 2001, Ann. Stat. 29:1165). Columns without a \
         result are not counted. Days and intervals come from each column's own {} bands, with degrees of freedom, and do not \
         account for the number of columns.",
        percent(rate),
        percent(level)
    )
}

fn table(markers: &[Marker], rows: Vec<Vec<String>>) -> ReportTable {
    let word = markers.iter().map(|m| m.time_word.as_str()).find(|word| !word.is_empty()).unwrap_or("time");
    let gap = if markers.iter().any(|m| m.ratio) { "Average ratio" } else { "Average gap" };
    let heads = [
        "Response",
        "Result",
        "Group",
        "Compared with",
        &format!("Apart from {word}"),
        "Direction",
        gap,
        "Lower",
        "Upper",
        "p of the pair",
        "p",
        "p over all columns",
    ];
    ReportTable {
        key: "responses".into(),
        title: "One plan over many response columns".into(),
        heads: heads.iter().map(|head| (*head).to_string()).collect(),
        rows,
    }
}

fn rows(marker: &Marker, q: Option<f64>, rate: f64) -> Vec<Vec<String>> {
    let dash = || "\u{2013}".to_string();
    if marker.p.is_none() {
        let mut row = vec![marker.name.clone(), format!("no result: {}", marker.failed)];
        row.extend((0..10).map(|_| dash()));
        return vec![row];
    }
    let result = if q.is_some_and(|q| q <= rate) { "found" } else { "not found" };
    let p = |value: Option<f64>| match value {
        Some(p) if p < 0.0001 => "<0.0001".to_string(),
        Some(p) => number(p, 4),
        None => dash(),
    };
    (marker.pairs.iter())
        .map(|pair| {
            let [first, direction] = match &pair.first {
                Some((time, direction)) => [number(*time, 1), direction.clone()],
                None => [dash(), dash()],
            };
            let average = match pair.average {
                Some(values) => values.map(|v| number(v, decimals(values[2] - values[1]))),
                None => [dash(), dash(), dash()],
            };
            [marker.name.clone(), result.to_string(), pair.to.clone(), pair.from.clone(), first, direction]
                .into_iter()
                .chain(average)
                .chain([p(pair.p), p(marker.p), p(q)])
                .collect()
        })
        .collect()
}

#[cfg(test)]
mod tests;
