//! The reduction where the error precision is tridiagonal: independent or AR(1) errors.
//!
//! With `r = exp(-rate gap)` the inverse of a subject's AR(1) correlation matrix is
//!
//! `T = I + sum over steps of [[a, -b], [-b, a]]`, `a = r^2 / (1 - r^2)`, `b = r / (1 - r^2)`,
//!
//! and `ln|C| = sum ln(1 - r^2)` (Whittle 1951; multiply out for two visits, then chain).
//! So `F'TF` of a whole group is a sum over its distinct times and distinct steps,
//! whatever the number of subjects, and per pattern only `Z'T` is formed:
//! O(n K q) per pattern and O(n q) per subject.

use crate::reduce::{Design, GroupProducts, Pattern, PatternProducts, Products, Step, empty_products};
use nalgebra::DMatrix;

/// What one step adds to the precision, or the derivative of that for `ln rate`.
#[derive(Debug, Clone, Copy, Default)]
struct Link {
    /// On both diagonal entries.
    a: f64,
    /// Minus the off-diagonal entry.
    b: f64,
    /// To the log determinant of the correlation matrix.
    log: f64,
}

fn link(step: &Step, rate: Option<f64>) -> Option<(Link, Link)> {
    let Some(rate) = rate else {
        return Some((Link::default(), Link::default()));
    };
    let x = rate * step.gap;
    let r = libm::exp(-x);
    let left = -libm::expm1(-2.0 * x);
    if !(left > 0.0) {
        return None;
    }
    let value = Link { a: r * r / left, b: r / left, log: libm::log(left) };
    let slope = Link {
        a: -2.0 * x * r * r / (left * left),
        b: -x * r * (1.0 + r * r) / (left * left),
        log: 2.0 * x * r * r / left,
    };
    Some((value, slope))
}

/// Products at one decay rate (`None`: independent errors) and, if asked, their derivatives for `ln rate`.
/// `None` where the correlation matrix is singular.
pub(crate) fn reduce_chains(design: &Design, rate: Option<f64>, slope: bool) -> Option<(Products, Vec<Products>)> {
    let groups = design.bases.len();
    let mut links = Vec::with_capacity(groups);
    for steps in &design.steps {
        links.push(steps.iter().map(|step| link(step, rate)).collect::<Option<Vec<(Link, Link)>>>()?);
    }
    let parts = |part: &dyn Fn(&(Link, Link)) -> Link| -> Vec<Vec<Link>> {
        links.iter().map(|group| group.iter().map(part).collect()).collect()
    };
    let values = parts(&|pair| pair.0);
    let value = products(design, &values, &values, 1.0);
    let derivatives = if slope { vec![products(design, &parts(&|pair| pair.1), &values, 0.0)] } else { Vec::new() };
    Some((value, derivatives))
}

/// Products with `T = unit I + links`. For derivatives `unit` is 0 and `plain` holds the links of `T` itself.
fn products(design: &Design, links: &[Vec<Link>], plain: &[Vec<Link>], unit: f64) -> Products {
    let mut target = empty_products(design);
    for g in 0..design.bases.len() {
        let group = &mut target.groups[g];
        let own = group_gram(design, g, &links[g], unit);
        group.ff.view_mut((0, 0), own.shape()).copy_from(&own);
        group.log_det = design.steps[g].iter().zip(&links[g]).map(|(step, link)| step.count * link.log).sum();
    }
    let mut sums: Vec<Vec<f64>> = design.seen.iter().map(|seen| vec![0.0; seen.len()]).collect();
    for pattern in &design.patterns {
        let g = pattern.group;
        if design.shared.columns() > 0 {
            add_shared(design, pattern, &links[g], unit, &mut target.groups[g]);
        }
        let (part, yy) = pattern_products(design, pattern, (&links[g], unit), &plain[g], &mut sums[g]);
        target.groups[g].yy += yy;
        target.patterns.push(part);
    }
    for g in 0..design.bases.len() {
        let columns = design.bases[g].columns();
        for (row, &sum) in design.tables[g].chunks_exact(columns).zip(&sums[g]) {
            for (j, f) in row.iter().enumerate() {
                target.groups[g].fy[j] += f * sum;
            }
        }
    }
    target
}

/// `sum over times of w f f'` and over steps of `-b (f f2' + f2 f')`, w the whole diagonal.
fn group_gram(design: &Design, g: usize, links: &[Link], unit: f64) -> DMatrix<f64> {
    let k = design.bases[g].columns();
    let table = &design.tables[g];
    let mut diagonal: Vec<f64> = design.seen[g].iter().map(|count| unit * count).collect();
    for (step, link) in design.steps[g].iter().zip(links) {
        diagonal[step.from] += step.count * link.a;
        diagonal[step.to] += step.count * link.a;
    }
    let mut upper = vec![0.0; k * k];
    let mut add = |from: &[f64], to: &[f64], weight: f64| {
        for i in 0..k {
            let (x, y) = (weight * from[i], weight * to[i]);
            for ((o, a), b) in upper[i * k + i..(i + 1) * k].iter_mut().zip(&to[i..k]).zip(&from[i..k]) {
                *o += x * a + y * b;
            }
        }
    };
    for (row, &weight) in table.chunks_exact(k).zip(&diagonal) {
        add(row, row, 0.5 * weight);
    }
    for (step, link) in design.steps[g].iter().zip(links) {
        if link.b != 0.0 {
            add(
                &table[step.from * k..(step.from + 1) * k],
                &table[step.to * k..(step.to + 1) * k],
                -step.count * link.b,
            );
        }
    }
    DMatrix::from_fn(k, k, |i, j| upper[i.min(j) * k + i.max(j)])
}

/// `T x` for one column of n numbers `x(j)`.
fn precision_times(pattern: &Pattern, links: &[Link], unit: f64, x: impl Fn(usize) -> f64, out: &mut [f64]) {
    let n = pattern.times.len();
    for j in 0..n {
        out[j] = unit * x(j);
    }
    for (j, &step) in pattern.step.iter().enumerate() {
        let Link { a, b, .. } = links[step];
        let (here, next) = (x(j), x(j + 1));
        out[j] += a * here - b * next;
        out[j + 1] += a * next - b * here;
    }
}

/// Adds the products of the shared columns X of one pattern: `F'T X`, `X'T X`, `X'T y`.
fn add_shared(design: &Design, pattern: &Pattern, links: &[Link], unit: f64, group: &mut GroupProducts) {
    let (k, shared) = (design.bases[pattern.group].columns(), design.shared.columns());
    let (n, m) = (pattern.times.len(), pattern.subjects.len());
    let table = &design.tables[pattern.group];
    let mut tx = vec![0.0; n];
    for c in 0..shared {
        precision_times(pattern, links, unit, |j| pattern.shared[j * shared + c], &mut tx);
        for (j, &row) in pattern.table_row.iter().enumerate() {
            let weight = m as f64 * tx[j];
            for (i, f) in table[row * k..(row + 1) * k].iter().enumerate() {
                group.ff[(i, k + c)] += weight * f;
                group.ff[(k + c, i)] += weight * f;
            }
            for d in 0..shared {
                group.ff[(k + d, k + c)] += weight * pattern.shared[j * shared + d];
            }
            group.fy[k + c] += tx[j] * pattern.responses[j * m..(j + 1) * m].iter().sum::<f64>();
        }
    }
}

/// Products of one pattern; adds `T y` of its subjects to the group's sums per distinct time, returns `y'T y` too.
fn pattern_products(
    design: &Design,
    pattern: &Pattern,
    (links, unit): (&[Link], f64),
    plain: &[Link],
    sums: &mut [f64],
) -> (PatternProducts, f64) {
    let (k, q) = (design.bases[pattern.group].columns(), design.effects.width());
    let shared = design.shared.columns();
    let (n, m) = (pattern.times.len(), pattern.subjects.len());
    let derivative = unit == 0.0;
    let z = |a: usize, j: usize| pattern.effects[j * q + a];
    // T Z, and for derivatives also the undifferentiated one, column by column.
    let mut tz = vec![0.0; n * q];
    let mut tz_plain = vec![0.0; n * q];
    for a in 0..q {
        precision_times(pattern, links, unit, |j| z(a, j), &mut tz[a * n..(a + 1) * n]);
        if derivative {
            precision_times(pattern, plain, 1.0, |j| z(a, j), &mut tz_plain[a * n..(a + 1) * n]);
        }
    }
    let mut fz = DMatrix::zeros(k + shared, q);
    let table = &design.tables[pattern.group];
    for (j, &row) in pattern.table_row.iter().enumerate() {
        let f = table[row * k..(row + 1) * k].iter().chain(&pattern.shared[j * shared..(j + 1) * shared]);
        for a in 0..q {
            let weight = tz[a * n + j];
            fz.column_mut(a).iter_mut().zip(f.clone()).for_each(|(o, f)| *o += weight * f);
        }
    }
    let zz = DMatrix::from_fn(q, q, |a, b| (0..n).map(|j| tz[a * n + j] * z(b, j)).sum());
    let mut zy = DMatrix::zeros(q, 1);
    let mut zyyz = DMatrix::zeros(q, q);
    let (mut yy, mut ty) = (0.0, vec![0.0; n]);
    for s in 0..m {
        let y = |j: usize| pattern.responses[j * m + s];
        precision_times(pattern, links, unit, y, &mut ty);
        for (j, &row) in pattern.table_row.iter().enumerate() {
            sums[row] += ty[j];
            yy += ty[j] * y(j);
        }
        let along = |tz: &[f64], a: usize| -> f64 { (0..n).map(|j| tz[a * n + j] * y(j)).sum() };
        let own: Vec<f64> = (0..q).map(|a| along(&tz, a)).collect();
        let other: Vec<f64> = if derivative { (0..q).map(|a| along(&tz_plain, a)).collect() } else { own.clone() };
        for a in 0..q {
            zy[a] += own[a];
            for b in 0..q {
                zyyz[(a, b)] += if derivative { own[a] * other[b] + other[a] * own[b] } else { own[a] * own[b] };
            }
        }
    }
    (PatternProducts { fz, zz, zy, zyyz }, yy)
}
