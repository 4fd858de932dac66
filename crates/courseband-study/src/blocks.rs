//! Runs of penalised columns that groups share: bends of explanatory numbers, blocks, groups by block.

use crate::evaluate::Evaluation;
use crate::refusal::Refusal;
use courseband_engine::special::t_quantile;
use courseband_engine::{Bend, Data};
use courseband_table::CovariateValues;
use serde::Serialize;

/// Most blocks.
const MOST_BLOCKS: usize = 40;
/// Points at which the bend of an explanatory number is given.
const POINTS: usize = 21;

/// What a run of columns is.
#[derive(Debug, Clone)]
pub(crate) enum RunKind {
    Bend { column: String, mean: f64, range: [f64; 2], bend: Bend },
    Block { column: String },
    GroupByBlock { column: String, levels: Vec<String> },
}

/// A run, with the values of its columns row by row of the data.
pub(crate) struct Run {
    pub(crate) kind: RunKind,
    pub(crate) columns: Vec<Vec<f64>>,
}

/// The effect of an explanatory number that may bend.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BendEffect {
    /// Column of the table.
    pub column: String,
    /// Values of the column, from its least to its largest.
    pub at: Vec<f64>,
    /// What each adds to every course, against the mean of the column; on the modelled scale.
    pub estimate: Vec<f64>,
    /// Lower limits, each by itself.
    pub lower: Vec<f64>,
    /// Upper limits.
    pub upper: Vec<f64>,
}

/// Blocks: how much they differ, and how the groups differ in each.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BlockEffects {
    /// Column of the table.
    pub column: String,
    /// Standard deviation of the blocks' levels, on the modelled scale.
    pub sd: Option<f64>,
    /// Standard deviation of a group's own deviation in a block.
    pub sd_by_group: Option<f64>,
    /// For every compared pair and block.
    pub gaps: Vec<BlockGap>,
}

/// How far the gap of a pair in one block lies from the gap over all blocks.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BlockGap {
    /// Group.
    pub from: String,
    /// Group.
    pub to: String,
    /// Block.
    pub block: String,
    /// Shift of the gap, on the modelled scale; drawn towards zero.
    pub estimate: f64,
    /// Lower limit by itself.
    pub lower: f64,
    /// Upper limit.
    pub upper: f64,
}

impl Run {
    /// `None` where a line is all there can be.
    pub(crate) fn bend(column: &str, values: &[f64]) -> Option<Run> {
        let mean = values.iter().sum::<f64>() / values.len().max(1) as f64;
        let bend = Bend::new(values, mean)?;
        let rows: Vec<Vec<f64>> = values.iter().map(|&x| bend.columns(x)).collect();
        let columns = (0..bend.len()).map(|c| rows.iter().map(|row| row[c]).collect()).collect();
        let ends = |f: fn(f64, f64) -> f64, start: f64| values.iter().copied().fold(start, f);
        let range = [ends(f64::min, f64::INFINITY), ends(f64::max, f64::NEG_INFINITY)];
        Some(Run { kind: RunKind::Bend { column: column.into(), mean, range, bend }, columns })
    }
}

/// The runs of a block column: the blocks, and each group in each block.
///
/// # Errors
/// Numbers without few values, too many blocks, or only one.
pub(crate) fn block_runs(
    data: &Data,
    column: &str,
    values: &CovariateValues,
    kept: &[usize],
) -> Result<Vec<Run>, Refusal> {
    let own: Vec<String> = match values {
        CovariateValues::Numeric(values) => kept.iter().map(|&k| values[k].to_string()).collect(),
        CovariateValues::Categorical { levels, index } => {
            kept.iter().map(|&k| levels[index[k] as usize].clone()).collect()
        }
    };
    let mut levels: Vec<String> = Vec::new();
    for level in &own {
        if !levels.contains(level) {
            levels.push(level.clone());
        }
        if levels.len() > MOST_BLOCKS {
            return Err(Refusal::plan(format!(
                "columns.block is \"{column}\", which has over {MOST_BLOCKS} values. A block is a repeat, batch or plate that \
                 holds many rows of every group."
            )));
        }
    }
    if levels.len() < 2 {
        return Err(Refusal::plan(format!("columns.block is \"{column}\", which has one value only. Leave it out.")));
    }
    let group: Vec<usize> = data.subjects.iter().flat_map(|s| std::iter::repeat_n(s.group, s.times.len())).collect();
    let is = |yes: bool| f64::from(u8::from(yes));
    let blocks = levels.iter().map(|level| own.iter().map(|o| is(o == level)).collect()).collect();
    let mut by_group = Vec::new();
    for g in 0..data.groups {
        for level in &levels {
            by_group.push(own.iter().zip(&group).map(|(o, &of)| is(o == level && of == g)).collect());
        }
    }
    let column = column.to_string();
    Ok(vec![
        Run { kind: RunKind::Block { column: column.clone() }, columns: blocks },
        Run { kind: RunKind::GroupByBlock { column, levels }, columns: by_group },
    ])
}

/// A run whose variance is zero, in words.
pub(crate) fn no_variance(kind: &RunKind) -> String {
    match kind {
        RunKind::Bend { column, .. } => {
            format!("The effect of {column} is estimated as straight: the data show no bend.")
        }
        RunKind::Block { column, .. } => {
            format!("The levels of {column} are estimated not to differ: that variance is zero.")
        }
        RunKind::GroupByBlock { column, .. } => {
            format!("The groups are estimated to differ alike in every {column}: that variance is zero.")
        }
    }
}

impl Evaluation<'_> {
    /// Effects of the runs: bends of explanatory numbers, and blocks.
    pub(crate) fn runs(&self) -> (Vec<BendEffect>, Option<BlockEffects>) {
        let (mut bends, mut blocks) = (Vec::new(), None);
        let shared = &self.cohort.data.shared;
        let mut first = shared.free;
        for (index, kind) in self.cohort.runs.iter().enumerate() {
            match kind {
                RunKind::Bend { column, mean, range, bend } => {
                    bends.push(self.bend(column, *mean, *range, bend, first));
                }
                RunKind::Block { column, .. } => {
                    let sd = self.fit.shared_sd(index);
                    blocks = Some(BlockEffects { column: column.clone(), sd, sd_by_group: None, gaps: Vec::new() });
                }
                RunKind::GroupByBlock { levels, .. } => {
                    if let Some(blocks) = &mut blocks {
                        blocks.sd_by_group = self.fit.shared_sd(index);
                        blocks.gaps = self.block_gaps(levels, first);
                    }
                }
            }
            first += shared.penalised[index];
        }
        (bends, blocks)
    }

    fn limits(&self, values: &[f64]) -> (f64, f64, f64) {
        let e = self.posterior.estimate(&self.fit.shared_sum(values));
        let reach = t_quantile(0.5 + 0.5 * self.plan.comparisons.level, e.df) * e.se;
        (e.mean, e.mean - reach, e.mean + reach)
    }

    fn bend(&self, column: &str, mean: f64, range: [f64; 2], bend: &Bend, first: usize) -> BendEffect {
        let shared = self.cohort.data.shared.columns();
        let line = self.cohort.adjustments.iter().position(|a| a.column == column && a.level.is_none());
        let step = (range[1] - range[0]) / (POINTS - 1) as f64;
        let at: Vec<f64> = (0..POINTS).map(|k| range[0] + step * k as f64).collect();
        let values = at.iter().map(|&x| {
            let mut values = vec![0.0; shared];
            values[first..first + bend.len()].copy_from_slice(&bend.columns(x));
            line.into_iter().for_each(|line| values[line] = x - mean);
            self.limits(&values)
        });
        let all: Vec<(f64, f64, f64)> = values.collect();
        BendEffect {
            column: column.into(),
            at,
            estimate: all.iter().map(|v| v.0).collect(),
            lower: all.iter().map(|v| v.1).collect(),
            upper: all.iter().map(|v| v.2).collect(),
        }
    }

    fn block_gaps(&self, levels: &[String], first: usize) -> Vec<BlockGap> {
        let shared = self.cohort.data.shared.columns();
        let mut gaps = Vec::new();
        for (from, to) in self.cohort.pairs(self.plan) {
            for (k, block) in levels.iter().enumerate() {
                let mut values = vec![0.0; shared];
                values[first + from * levels.len() + k] = -1.0;
                values[first + to * levels.len() + k] = 1.0;
                let (estimate, lower, upper) = self.limits(&values);
                let name = |g: usize| self.cohort.groups[g].name.clone();
                gaps.push(BlockGap { from: name(from), to: name(to), block: block.clone(), estimate, lower, upper });
            }
        }
        gaps
    }
}
