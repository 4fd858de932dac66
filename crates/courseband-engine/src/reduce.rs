//! Each visiting schedule reduced once to small cross-products.
//!
//! Subjects of one group with the same times form a *pattern*. With the rows
//! whitened to unit error variance, everything that the criterion needs of a
//! pattern is in the products of its columns
//!
//! | symbol | shape | what |
//! |---|---|---|
//! | F | n x K | columns of the group's mean, then those that all groups share |
//! | Z | n x q | columns of a subject's effects: 1, time, spline |
//! | Y | n x m | responses of the pattern's m subjects |
//!
//! `F'F` is summed over a group, `F'Z` and `Z'Z` are kept per pattern, and of
//! the responses only sums over the pattern's subjects remain. Cost O(n (K^2 + K q + m q))
//! per pattern, memory O(K q) per pattern. Without serial correlation it is done once.
//! Without measurement error [`crate::chains`] does the same for less.

use crate::basis::{GroupBasis, Units};
use crate::chains::reduce_chains;
use crate::model::{ClusterEffects, Data, Dimension, Model, Shared, SubjectEffects, SubjectRows};
use crate::placement::Placement;
use crate::spline::{NaturalSpline, distinct_sorted, place_knots};
use crate::subject_basis::SubjectBasis;
use crate::whiten::{ErrorShape, Whitener};
use nalgebra::DMatrix;
use std::collections::BTreeMap;

/// Subjects of one group seen at the same times.
#[derive(Debug, Clone)]
pub(crate) struct Pattern {
    pub(crate) group: usize,
    /// Internal times.
    pub(crate) times: Vec<f64>,
    /// Row of the group's table of columns for each time.
    pub(crate) table_row: Vec<usize>,
    /// For each step to the next time: its entry in the group's steps.
    pub(crate) step: Vec<usize>,
    /// Indices into the data's subjects.
    pub(crate) subjects: Vec<usize>,
    /// Internal responses, n rows of m.
    pub(crate) responses: Vec<f64>,
    /// What families need of every row, in the order of `responses`; empty for a normal response.
    pub(crate) detail: Vec<f64>,
    /// Values of the shared columns, n rows.
    pub(crate) shared: Vec<f64>,
    /// Columns of a subject's effects, n rows.
    pub(crate) effects: Vec<f64>,
}

/// The data in internal units, sorted into patterns.
#[derive(Debug, Clone)]
pub(crate) struct Design {
    pub(crate) units: Units,
    pub(crate) bases: Vec<GroupBasis>,
    pub(crate) patterns: Vec<Pattern>,
    /// What differs from subject to subject, or from cluster to cluster.
    pub(crate) effects: SubjectBasis,
    /// Columns that all groups share.
    pub(crate) shared: Shared,
    /// Where each group's coefficients stand.
    pub(crate) placement: Placement,
    /// Patterns of each cluster; none in a model without clusters.
    pub(crate) clusters: Vec<Vec<usize>>,
    /// Rows per group.
    pub(crate) rows: Vec<usize>,
    /// Columns of each group's mean at each of its distinct times, row by row.
    pub(crate) tables: Vec<Vec<f64>>,
    /// Per group: how many subjects are seen at each distinct time.
    pub(crate) seen: Vec<Vec<f64>>,
    /// Per group: the distinct steps between neighbouring visits of one subject.
    pub(crate) steps: Vec<Vec<Step>>,
}

/// A step from one visit to a subject's next.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Step {
    /// Rows of the group's table.
    pub(crate) from: usize,
    pub(crate) to: usize,
    /// Internal time between them.
    pub(crate) gap: f64,
    /// How many subjects take it.
    pub(crate) count: f64,
}

impl Design {
    pub(crate) fn new(data: &Data, units: Units, bases: Vec<GroupBasis>, model: &Model) -> Self {
        let effects = subject_basis(model, &units, data);
        Design::assemble(data, units, bases, effects, model.clusters)
    }

    /// Other data with the same units, bases and subject effects.
    pub(crate) fn again(&self, data: &Data, clusters: ClusterEffects) -> Self {
        Design::assemble(data, self.units, self.bases.clone(), self.effects.clone(), clusters)
    }

    fn assemble(
        data: &Data,
        units: Units,
        bases: Vec<GroupBasis>,
        effects: SubjectBasis,
        clusters: ClusterEffects,
    ) -> Self {
        let mut distinct = vec![Vec::new(); data.groups];
        for subject in &data.subjects {
            distinct[subject.group].extend(subject.times.iter().map(|&t| units.inner_time(t)));
        }
        let distinct: Vec<Vec<f64>> = distinct.into_iter().map(|times| distinct_sorted(times.into_iter())).collect();
        let tables = distinct.iter().zip(&bases).map(|(times, basis)| column_table(basis, times)).collect();
        let mut rows = vec![0; data.groups];
        data.subjects.iter().for_each(|s| rows[s.group] += s.times.len());
        let (mut patterns, clusters) = sort_into_patterns(data, &units, &distinct, &effects, clusters);
        let (seen, steps) = count_steps(&mut patterns, &distinct);
        let joint = clusters.iter().any(|of| of.iter().any(|&p| patterns[p].group != patterns[of[0]].group));
        let own = bases.iter().map(GroupBasis::columns).collect();
        let placement = Placement::new(own, data.shared.columns(), joint);
        let shared = data.shared.clone();
        Design { units, bases, patterns, effects, shared, placement, clusters, rows, tables, seen, steps }
    }

    /// Number of columns without a penalty, of all groups together.
    pub(crate) fn unpenalised(&self) -> usize {
        self.bases.iter().map(GroupBasis::unpenalised).sum::<usize>() + self.shared.free
    }

    /// Extended columns of one row of a pattern.
    pub(crate) fn columns_of(&self, pattern: &Pattern, row: usize) -> Vec<f64> {
        let own = self.bases[pattern.group].columns();
        let (from, shared) = (pattern.table_row[row] * own, self.shared.columns());
        let mut columns = self.tables[pattern.group][from..from + own].to_vec();
        columns.extend(&pattern.shared[row * shared..(row + 1) * shared]);
        columns
    }

    /// Places of a block's penalised unknowns.
    pub(crate) fn penalised(&self, block: usize) -> Vec<usize> {
        let own = (0..self.bases.len()).filter(|&g| self.placement.block(g) == block).flat_map(|g| {
            let first = self.placement.position(g, self.bases[g].unpenalised());
            first..first + self.bases[g].penalised()
        });
        let size = self.placement.size(block);
        let shared = size - self.placement.shared() + self.shared.free;
        own.chain(if self.placement.shared() > 0 { shared..size } else { size..size }).collect()
    }

    /// The first free shared column that the groups' own columns and those before it determine.
    pub(crate) fn inseparable(&self) -> Option<usize> {
        if self.shared.free == 0 {
            return None;
        }
        let (products, _) = reduce(self, None, &[])?;
        let placement = &self.placement;
        let size = placement.size(0);
        let mut gram = DMatrix::zeros(size, size);
        for g in 0..self.bases.len() {
            placement.scatter(g, &products.groups[g].ff, &mut gram);
        }
        let own = (0..self.bases.len()).flat_map(|g| {
            let first = placement.position(g, 0);
            first..first + self.bases[g].unpenalised()
        });
        let first_shared = size - self.shared.columns();
        let columns: Vec<usize> = own.chain(first_shared..first_shared + self.shared.free).collect();
        dependent_column(&gram, &columns).and_then(|at| at.checked_sub(columns.len() - self.shared.free))
    }

    /// True where some subject has several rows at one time.
    pub(crate) fn has_ties(&self) -> bool {
        self.steps.iter().flatten().any(|step| step.gap <= 0.0)
    }

    /// Median internal time between neighbouring visits of one subject; 1 where there is none.
    pub(crate) fn median_gap(&self) -> f64 {
        let mut gaps: Vec<f64> = self
            .patterns
            .iter()
            .flat_map(|p| p.times.windows(2).flat_map(|w| std::iter::repeat_n(w[1] - w[0], p.subjects.len())))
            .filter(|&gap| gap > 0.0)
            .collect();
        if gaps.is_empty() {
            return 1.0;
        }
        let middle = gaps.len() / 2;
        *gaps.select_nth_unstable_by(middle, f64::total_cmp).1
    }

    /// Rows `F | Z | Y` of a pattern, row by row; returns them with their width.
    fn rows_of(&self, pattern: &Pattern) -> (Vec<f64>, usize) {
        let own = self.bases[pattern.group].columns();
        let (shared, q, m) = (self.shared.columns(), self.effects.width(), pattern.subjects.len());
        let columns = own + shared;
        let width = columns + q + m;
        let mut rows = vec![0.0; pattern.times.len() * width];
        for (j, row) in rows.chunks_exact_mut(width).enumerate() {
            let from = pattern.table_row[j] * own;
            row[..own].copy_from_slice(&self.tables[pattern.group][from..from + own]);
            row[own..columns].copy_from_slice(&pattern.shared[j * shared..(j + 1) * shared]);
            row[columns..columns + q].copy_from_slice(&pattern.effects[j * q..(j + 1) * q]);
            row[columns + q..].copy_from_slice(&pattern.responses[j * m..(j + 1) * m]);
        }
        (rows, width)
    }
}

/// The first of `columns` whose squared length falls under a 1e-9 share once those before it are
/// taken out of the Gram matrix; own columns never do.
fn dependent_column(gram: &DMatrix<f64>, columns: &[usize]) -> Option<usize> {
    let n = columns.len();
    let mut left = DMatrix::from_fn(n, n, |i, j| gram[(columns[i], columns[j])]);
    for k in 0..n {
        let (pivot, whole) = (left[(k, k)], gram[(columns[k], columns[k])]);
        if !(pivot > 1e-9 * whole) {
            return Some(k);
        }
        for i in k + 1..n {
            let share = left[(i, k)] / pivot;
            (k + 1..n).for_each(|j| left[(i, j)] -= share * left[(k, j)]);
        }
    }
    None
}

/// Most knots of a subject's own curve.
const SUBJECT_KNOTS: usize = 8;

fn subject_basis(model: &Model, units: &Units, data: &Data) -> SubjectBasis {
    let spline = (model.subjects == SubjectEffects::Curve).then(|| {
        let times = data.subjects.iter().flat_map(|s| s.times.iter().map(|&t| units.inner_time(t)));
        let pooled = distinct_sorted(times);
        NaturalSpline::new(place_knots(&pooled, Dimension::Knots(SUBJECT_KNOTS.min(pooled.len()))))
    });
    let lines = model.subjects.count().max(model.clusters.count());
    SubjectBasis::new(lines, units.subject_centre, spline)
}

fn column_table(basis: &GroupBasis, times: &[f64]) -> Vec<f64> {
    let columns = basis.columns();
    let mut table = vec![0.0; times.len() * columns];
    for (row, &t) in table.chunks_exact_mut(columns).zip(times) {
        basis.fill(t, false, row);
    }
    table
}

/// Finds each group's distinct steps, and which step each pattern takes when.
fn count_steps(patterns: &mut [Pattern], distinct: &[Vec<f64>]) -> (Vec<Vec<f64>>, Vec<Vec<Step>>) {
    let mut seen: Vec<Vec<f64>> = distinct.iter().map(|times| vec![0.0; times.len()]).collect();
    let mut steps: Vec<Vec<Step>> = vec![Vec::new(); distinct.len()];
    let mut known: BTreeMap<(usize, usize, usize), usize> = BTreeMap::new();
    for pattern in patterns {
        let (g, m) = (pattern.group, pattern.subjects.len() as f64);
        pattern.table_row.iter().for_each(|&row| seen[g][row] += m);
        pattern.step = (pattern.table_row.windows(2).zip(pattern.times.windows(2)))
            .map(|(rows, times)| {
                let index = *known.entry((g, rows[0], rows[1])).or_insert_with(|| {
                    steps[g].push(Step { from: rows[0], to: rows[1], gap: times[1] - times[0], count: 0.0 });
                    steps[g].len() - 1
                });
                steps[g][index].count += m;
                index
            })
            .collect();
    }
    (seen, steps)
}

/// What subjects of one pattern have in common: group, cluster, times and shared columns.
type Key = (usize, usize, Vec<u64>, Vec<u64>);

/// The patterns, and the patterns of each cluster.
fn sort_into_patterns(
    data: &Data,
    units: &Units,
    distinct: &[Vec<f64>],
    effects: &SubjectBasis,
    clusters: ClusterEffects,
) -> (Vec<Pattern>, Vec<Vec<usize>>) {
    let bits = |values: &[f64]| values.iter().map(|x| x.to_bits()).collect::<Vec<u64>>();
    let mut found: BTreeMap<Key, usize> = BTreeMap::new();
    let mut patterns: Vec<Pattern> = Vec::new();
    let mut known: BTreeMap<usize, usize> = BTreeMap::new();
    let mut members: Vec<Vec<usize>> = Vec::new();
    for (index, subject) in data.subjects.iter().enumerate() {
        let cluster = match (clusters, subject.cluster) {
            (ClusterEffects::None, _) => 0,
            (_, Some(name)) => *known.entry(name).or_insert_with(|| {
                members.push(Vec::new());
                members.len() - 1
            }),
            (_, None) => {
                members.push(Vec::new());
                members.len() - 1
            }
        };
        let key = (subject.group, cluster, bits(&subject.times), bits(&subject.shared));
        let at = *found.entry(key).or_insert_with(|| {
            patterns.push(empty_pattern(subject, units, &distinct[subject.group], effects));
            if let Some(own) = members.get_mut(cluster) {
                own.push(patterns.len() - 1);
            }
            patterns.len() - 1
        });
        patterns[at].subjects.push(index);
    }
    for pattern in &mut patterns {
        pattern.responses = (0..pattern.times.len())
            .flat_map(|j| pattern.subjects.iter().map(move |&s| (j, s)))
            .map(|(j, s)| (data.subjects[s].responses[j] - units.response_centre) / units.response_scale)
            .collect();
        if pattern.subjects.iter().any(|&s| !data.subjects[s].detail.is_empty()) {
            pattern.detail = (0..pattern.times.len())
                .flat_map(|j| pattern.subjects.iter().map(move |&s| (j, s)))
                .map(|(j, s)| data.subjects[s].detail.get(j).copied().unwrap_or(f64::NAN))
                .collect();
        }
    }
    (patterns, members)
}

fn empty_pattern(subject: &SubjectRows, units: &Units, distinct: &[f64], effects: &SubjectBasis) -> Pattern {
    let times: Vec<f64> = subject.times.iter().map(|&t| units.inner_time(t)).collect();
    Pattern {
        group: subject.group,
        table_row: times.iter().map(|t| distinct.partition_point(|d| d < t)).collect(),
        step: Vec::new(),
        subjects: Vec::new(),
        responses: Vec::new(),
        detail: Vec::new(),
        shared: subject.shared.clone(),
        effects: effects.table(&times),
        times,
    }
}

/// Products of one pattern's whitened columns, or their derivatives.
#[derive(Debug, Clone)]
pub(crate) struct PatternProducts {
    /// F'Z, K x q.
    pub(crate) fz: DMatrix<f64>,
    /// Z'Z, q x q.
    pub(crate) zz: DMatrix<f64>,
    /// Sum over subjects of Z'y, q x 1.
    pub(crate) zy: DMatrix<f64>,
    /// Sum over subjects of Z'y y'Z, q x q.
    pub(crate) zyyz: DMatrix<f64>,
}

/// Sums over one group, or their derivatives.
#[derive(Debug, Clone)]
pub(crate) struct GroupProducts {
    /// F'F, K x K, every subject counted.
    pub(crate) ff: DMatrix<f64>,
    /// Sum of F'y, K x 1.
    pub(crate) fy: DMatrix<f64>,
    /// Sum of y'y.
    pub(crate) yy: f64,
    /// Sum of log determinants of the error correlation.
    pub(crate) log_det: f64,
}

/// All products at one error shape, or their derivatives for one of its parameters.
#[derive(Debug, Clone)]
pub(crate) struct Products {
    pub(crate) patterns: Vec<PatternProducts>,
    pub(crate) groups: Vec<GroupProducts>,
}

/// Products and, for each asked parameter of the error shape, their derivatives.
///
/// `slopes`: which derivatives (0: `ln rate`, 1: `logit nugget`). `None` where the
/// error correlation of some subject is singular.
pub(crate) fn reduce(
    design: &Design,
    shape: Option<ErrorShape>,
    slopes: &[usize],
) -> Option<(Products, Vec<Products>)> {
    if shape.is_none_or(|shape| shape.nugget == 0.0) {
        return reduce_chains(design, shape.map(|shape| shape.rate), !slopes.is_empty());
    }
    let mut value = empty_products(design);
    let mut derivatives = vec![empty_products(design); slopes.len()];
    for pattern in &design.patterns {
        let (raw, width) = design.rows_of(pattern);
        let whitener = match shape {
            Some(shape) => Some(Whitener::new(&pattern.times, shape)?),
            None => None,
        };
        let mut rows = raw.clone();
        if let Some(whitener) = &whitener {
            whitener.apply(&mut rows, width);
        }
        let log_det = whitener.as_ref().map_or(0.0, |w| w.log_det);
        add_pattern(design, pattern, &mut value, (&rows, &rows), width, log_det, 1.0);
        for (target, &which) in derivatives.iter_mut().zip(slopes) {
            if let Some(whitener) = &whitener {
                let (mut again, mut slope) = (raw.clone(), vec![0.0; raw.len()]);
                whitener.apply_with_slope(&mut again, &mut slope, width, which);
                add_pattern(design, pattern, target, (&again, &slope), width, whitener.d_log_det[which], 2.0);
            }
        }
    }
    Some((value, derivatives))
}

pub(crate) fn empty_products(design: &Design) -> Products {
    let groups = (0..design.bases.len()).map(|g| {
        let k = design.placement.extended(g);
        GroupProducts { ff: DMatrix::zeros(k, k), fy: DMatrix::zeros(k, 1), yy: 0.0, log_det: 0.0 }
    });
    Products { patterns: Vec::with_capacity(design.patterns.len()), groups: groups.collect() }
}

/// Adds `sym(A'B)` of a pattern; with `A = B` and `factor` 1 the products, with
/// `B` the derivative of `A` and `factor` 2 (`A'dA + dA'A`) their derivative.
fn add_pattern(
    design: &Design,
    pattern: &Pattern,
    target: &mut Products,
    (left, right): (&[f64], &[f64]),
    width: usize,
    log_det: f64,
    factor: f64,
) {
    let (k, q, m) = (design.placement.extended(pattern.group), design.effects.width(), pattern.subjects.len());
    let group = &mut target.groups[pattern.group];
    group.log_det += m as f64 * log_det;
    add_gram(&mut group.ff, left, right, width, k, factor * m as f64);
    let z = |row: &[f64], a: usize| row[k + a];
    let mut fz = DMatrix::zeros(k, q);
    let mut zz = DMatrix::zeros(q, q);
    let mut zy_each = vec![0.0; q * m];
    let mut zy_raw = vec![0.0; q * m];
    let half = factor / 2.0;
    for (l, r) in left.chunks_exact(width).zip(right.chunks_exact(width)) {
        let (yl, yr) = (&l[k + q..], &r[k + q..]);
        let (sum_l, sum_r) = (yl.iter().sum::<f64>(), yr.iter().sum::<f64>());
        for i in 0..k {
            group.fy[i] += half * (l[i] * sum_r + r[i] * sum_l);
        }
        group.yy += factor * yl.iter().zip(yr).map(|(a, b)| a * b).sum::<f64>();
        for a in 0..q {
            let (zl, zr) = (half * z(l, a), half * z(r, a));
            for i in 0..k {
                fz[(i, a)] += l[i] * zr + r[i] * zl;
            }
            for b in 0..q {
                zz[(a, b)] += zl * z(r, b) + zr * z(l, b);
            }
            for s in 0..m {
                zy_each[a * m + s] += zl * yr[s] + zr * yl[s];
                zy_raw[a * m + s] += z(l, a) * yl[s];
            }
        }
    }
    let zy = DMatrix::from_fn(q, 1, |a, _| zy_each[a * m..(a + 1) * m].iter().sum());
    let dot = |x: &[f64], a: usize, y: &[f64], b: usize| -> f64 {
        x[a * m..(a + 1) * m].iter().zip(&y[b * m..(b + 1) * m]).map(|(x, y)| x * y).sum()
    };
    let zyyz = DMatrix::from_fn(q, q, |a, b| {
        if factor == 1.0 {
            dot(&zy_each, a, &zy_each, b)
        } else {
            dot(&zy_each, a, &zy_raw, b) + dot(&zy_raw, a, &zy_each, b)
        }
    });
    target.patterns.push(PatternProducts { fz, zz, zy, zyyz });
}

/// `gram += factor * sym(L'R)` over the first `k` columns of the rows.
fn add_gram(gram: &mut DMatrix<f64>, left: &[f64], right: &[f64], width: usize, k: usize, factor: f64) {
    let mut upper = vec![0.0; k * k];
    let same = std::ptr::eq(left, right);
    for (l, r) in left.chunks_exact(width).zip(right.chunks_exact(width)) {
        for i in 0..k {
            let (li, ri) = (l[i], r[i]);
            let out = &mut upper[i * k + i..(i + 1) * k];
            if same {
                for (o, &rj) in out.iter_mut().zip(&r[i..k]) {
                    *o += li * rj;
                }
            } else {
                for ((o, &rj), &lj) in out.iter_mut().zip(&r[i..k]).zip(&l[i..k]) {
                    *o += 0.5 * (li * rj + ri * lj);
                }
            }
        }
    }
    for i in 0..k {
        for j in i..k {
            let value = factor * upper[i * k + j];
            gram[(i, j)] += value;
            if i != j {
                gram[(j, i)] += value;
            }
        }
    }
}
