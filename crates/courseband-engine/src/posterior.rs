//! What a fit says about curves and gaps: estimates, standard errors, degrees of freedom.
//!
//! Every quantity here is a linear function of the groups' coefficients, a
//! [`Contrast`] `f`. Given the variance parameters the coefficients are normal
//! with covariance `A^-1` per block, smoothing bias included (Wahba 1983;
//! Nychka 1988). Two corrections are made for having estimated the parameters
//! `theta`, whose covariance is `W`, the inverse Hessian:
//!
//! * variance: `v(f) = f'A^-1 f + f'J W J'f`, `J = db/dtheta`
//!   (Kass & Steffey 1989, JASA 84:717; Wood, Pya & Saefken 2016, JASA 111:1548);
//! * degrees of freedom: `2 v0^2 / (g'W g)`, `v0 = f'A^-1 f`, `g = dv0/dtheta`
//!   (Satterthwaite 1946, Biometrics 2:110), at least 1, at most rows minus free coefficients.
//!
//! Parameters at a bound take no part. `W` is kept finite: no log-parameter is
//! taken to be less certain than a standard deviation of 4.

use crate::criterion::{Criterion, Solved};
use crate::fit::Fit;
use crate::placement::Placement;
use crate::special::DirectionMaxima;
use crate::spectral::symmetric_eigen;
use nalgebra::{DMatrix, DVector};

/// A linear function of the groups' curves.
#[derive(Debug, Clone, PartialEq)]
pub struct Contrast {
    /// Weights on the extended coefficients of some groups; those of shared columns may be left out.
    parts: Vec<(usize, Vec<f64>)>,
    /// Weight of the response's centre: 1 for a level, 0 for a difference or a slope.
    level: f64,
}

impl Contrast {
    /// Weights on a group's extended columns, the response's centre left out.
    pub(crate) fn of_columns(group: usize, weights: Vec<f64>) -> Contrast {
        Contrast { parts: vec![(group, weights)], level: 0.0 }
    }

    /// Weights on the unknowns of a block.
    pub(crate) fn on_block(&self, placement: &Placement, block: usize) -> Vec<f64> {
        let mut weights = vec![0.0; placement.size(block)];
        for (group, own) in self.parts.iter().filter(|(group, _)| placement.block(*group) == block) {
            placement.spread(*group, own, &mut weights);
        }
        weights
    }

    /// `factor * self`.
    #[must_use]
    pub fn times(mut self, factor: f64) -> Contrast {
        self.level *= factor;
        self.parts.iter_mut().for_each(|(_, weights)| weights.iter_mut().for_each(|w| *w *= factor));
        self
    }

    /// `self + factor * other`.
    #[must_use]
    pub fn plus(mut self, factor: f64, other: &Contrast) -> Contrast {
        self.level += factor * other.level;
        for (group, weights) in &other.parts {
            match self.parts.iter_mut().find(|(g, _)| g == group) {
                Some((_, own)) => {
                    own.resize(own.len().max(weights.len()), 0.0);
                    own.iter_mut().zip(weights).for_each(|(a, b)| *a += factor * b);
                }
                None => self.parts.push((*group, weights.iter().map(|w| factor * w).collect())),
            }
        }
        self
    }
}

/// An estimate on the modelled scale.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Estimate {
    /// Posterior mean.
    pub mean: f64,
    /// Posterior standard deviation.
    pub se: f64,
    /// Degrees of freedom; infinite without small-sample handling.
    pub df: f64,
}

/// A fit, ready to be asked.
#[derive(Debug, Clone)]
pub struct Posterior<'a> {
    fit: &'a Fit,
    correction: Option<Correction>,
}

#[derive(Debug, Clone)]
struct Correction {
    /// `J W^(1/2)`, all coefficients x free parameters.
    root: DMatrix<f64>,
    /// Covariance of the free parameters.
    parameters: DMatrix<f64>,
    /// Solutions with each free parameter moved up and down, and by how much.
    moved: Vec<(Vec<Solved>, Vec<Solved>, f64)>,
    most_df: f64,
}

impl Fit {
    /// Course of a group at a time of the table.
    #[must_use]
    pub fn course(&self, group: usize, time: f64) -> Contrast {
        self.contrast(group, time, false)
    }

    /// Slope of a group's course at a time, per time unit of the table.
    #[must_use]
    pub fn rate(&self, group: usize, time: f64) -> Contrast {
        self.contrast(group, time, true)
    }

    /// Course of `to` minus course of `from`.
    #[must_use]
    pub fn gap(&self, from: usize, to: usize, time: f64) -> Contrast {
        self.course(to, time).plus(-1.0, &self.course(from, time))
    }

    fn contrast(&self, group: usize, time: f64, derivative: bool) -> Contrast {
        let basis = &self.design.bases[group];
        let mut weights = vec![0.0; basis.columns()];
        basis.fill(self.design.units.inner_time(time), derivative, &mut weights);
        let start = basis.start_share(self.design.units.inner_time(time), derivative);
        weights.extend(start);
        if derivative {
            weights.iter_mut().for_each(|w| *w /= self.design.units.time_span);
        } else {
            weights.extend(&self.design.shared.reference[start.iter().len()..]);
        }
        Contrast { parts: vec![(group, weights)], level: if derivative { 0.0 } else { 1.0 } }
    }

    /// What one unit of a shared column of the data adds to every course.
    #[must_use]
    pub fn shared_effect(&self, column: usize) -> Contrast {
        let columns = self.design.placement.shared() - usize::from(self.model.common_start);
        let values: Vec<f64> = (0..columns).map(|c| f64::from(u8::from(c == column))).collect();
        self.shared_sum(&values)
    }

    /// What shared columns of the data with these values add to a course, penalised ones among them.
    #[must_use]
    pub fn shared_sum(&self, values: &[f64]) -> Contrast {
        let own = self.design.placement.own(0) + usize::from(self.model.common_start);
        let mut weights = vec![0.0; own];
        weights.extend(values);
        Contrast { parts: vec![(0, weights)], level: 0.0 }
    }

    /// The posterior with the variance parameters taken as known.
    #[must_use]
    pub fn plug_in(&self) -> Posterior<'_> {
        Posterior { fit: self, correction: None }
    }

    /// The posterior with both small-sample corrections. Falls back to
    /// [`Fit::plug_in`] where they cannot be computed: see [`Posterior::is_corrected`].
    #[must_use]
    pub fn corrected(&self) -> Posterior<'_> {
        Posterior { correction: Correction::of(self), ..self.plug_in() }
    }
}

impl Correction {
    fn of(fit: &Fit) -> Option<Self> {
        let free = &fit.free;
        let eigen = symmetric_eigen(&fit.hessian);
        let floored = eigen.eigenvalues.map(|value| value.max(1.0 / 16.0));
        let root = &eigen.eigenvectors * DMatrix::from_diagonal(&floored.map(|value| 1.0 / value.sqrt()));
        let parameters = &root * root.transpose();
        let mut criterion = Criterion::new(&fit.design, &fit.layout);
        let total = fit.design.placement.offset(fit.design.placement.blocks());
        let mut jacobian = DMatrix::zeros(total, free.len());
        let mut moved = Vec::with_capacity(free.len());
        for (column, &k) in free.iter().enumerate() {
            let h = 1e-3;
            let mut theta = fit.theta.clone();
            theta[k] = fit.theta[k] + h;
            let up = criterion.evaluate(&theta, false)?.solved;
            theta[k] = fit.theta[k] - h;
            let down = criterion.evaluate(&theta, false)?.solved;
            let mut row = 0;
            for (u, d) in up.iter().zip(&down) {
                for j in 0..u.coefficients.nrows() {
                    jacobian[(row, column)] = (u.coefficients[j] - d.coefficients[j]) / (2.0 * h);
                    row += 1;
                }
            }
            moved.push((up, down, h));
        }
        Some(Correction { root: jacobian * root, parameters, moved, most_df: fit.most_df() })
    }
}

impl Posterior<'_> {
    /// True with small-sample corrections.
    #[must_use]
    pub fn is_corrected(&self) -> bool {
        self.correction.is_some()
    }

    /// Estimate, standard error and degrees of freedom of a contrast.
    #[must_use]
    pub fn estimate(&self, contrast: &Contrast) -> Estimate {
        let (units, placement) = (&self.fit.design.units, &self.fit.design.placement);
        let value = solved_value(placement, &self.fit.solved, contrast);
        let plain = variance(placement, &self.fit.solved, contrast);
        let extra: f64 = self.extra(contrast).iter().map(|x| x * x).sum();
        let df = self.correction.as_ref().map_or(f64::INFINITY, |c| c.df(placement, contrast, plain));
        Estimate {
            mean: contrast.level * units.response_centre + units.response_scale * value,
            se: units.response_scale * (plain + extra).sqrt(),
            df,
        }
    }

    /// Mean and standard error in internal units, centre left out.
    pub(crate) fn inner_estimate(&self, contrast: &Contrast) -> (f64, f64) {
        let (placement, solved) = (&self.fit.design.placement, &self.fit.solved);
        let extra: f64 = self.extra(contrast).iter().map(|x| x * x).sum();
        (solved_value(placement, solved, contrast), (variance(placement, solved, contrast) + extra).sqrt())
    }

    /// `W^(1/2)' J' f`.
    fn extra(&self, contrast: &Contrast) -> Vec<f64> {
        let Some(correction) = &self.correction else {
            return Vec::new();
        };
        let mut result = vec![0.0; correction.root.ncols()];
        let placement = &self.fit.design.placement;
        for (g, weights) in &contrast.parts {
            let offset = placement.offset(placement.block(*g));
            for (j, w) in weights.iter().enumerate() {
                let row = offset + placement.position(*g, j);
                for (k, value) in result.iter_mut().enumerate() {
                    *value += w * correction.root[(row, k)];
                }
            }
        }
        result
    }

    /// A vector whose products with those of other contrasts are their covariances (internal unit).
    fn factor_row(&self, contrast: &Contrast) -> Vec<f64> {
        let extra = self.extra(contrast);
        let placement = &self.fit.design.placement;
        let total = placement.offset(placement.blocks());
        let mut row = vec![0.0; total + extra.len()];
        for (block, weights) in block_weights(placement, contrast) {
            let offset = placement.offset(block);
            let solution = half_solve(&self.fit.solved[block], &weights);
            row[offset..offset + solution.len()].copy_from_slice(solution.as_slice());
        }
        row[total..].copy_from_slice(&extra);
        row
    }

    /// The largest of |estimate - truth| / SE over a family of contrasts, ready for its quantiles.
    /// Contrasts whose standard error is zero take no part.
    #[must_use]
    pub fn family(&self, contrasts: &[Contrast], directions: usize, seed: u64) -> DirectionMaxima {
        let rows: Vec<Vec<f64>> = contrasts
            .iter()
            .map(|c| self.factor_row(c))
            .filter_map(|row| {
                let length = row.iter().map(|x| x * x).sum::<f64>().sqrt();
                (length > 1e-12).then(|| row.iter().map(|x| x / length).collect())
            })
            .collect();
        let (flat, rank) = reduce_rank(&rows);
        DirectionMaxima::new(&flat, rows.len(), rank, directions, seed)
    }

    /// Draws of several contrasts together, one vector of `contrasts.len()` values per call of `normal`
    /// batches: `mean + factor' x`, on the modelled scale.
    #[must_use]
    pub fn joint(&self, contrasts: &[Contrast]) -> Joint {
        let scale = self.fit.design.units.response_scale;
        let rows: Vec<Vec<f64>> =
            contrasts.iter().map(|c| self.factor_row(c).into_iter().map(|x| x * scale).collect()).collect();
        let means = contrasts.iter().map(|c| self.estimate(c).mean).collect();
        let (flat, rank) = reduce_rank(&rows);
        Joint { means, flat, rank }
    }
}

/// A joint normal distribution of several contrasts.
#[derive(Debug, Clone)]
pub struct Joint {
    means: Vec<f64>,
    flat: Vec<f64>,
    rank: usize,
}

impl Joint {
    /// Covariance matrix, row by row.
    #[must_use]
    pub fn covariance(&self) -> Vec<f64> {
        let m = self.means.len();
        let row = |k: usize| &self.flat[k * self.rank..(k + 1) * self.rank];
        (0..m * m).map(|at| row(at / m).iter().zip(row(at % m)).map(|(a, b)| a * b).sum()).collect()
    }

    /// One draw: deviations are multiplied by `stretch`.
    pub fn draw(&self, rng: &mut crate::special::Rng, stretch: f64, out: &mut Vec<f64>) {
        let x: Vec<f64> = (0..self.rank).map(|_| rng.normal() * stretch).collect();
        out.clear();
        for (k, mean) in self.means.iter().enumerate() {
            let row = &self.flat[k * self.rank..(k + 1) * self.rank];
            out.push(mean + row.iter().zip(&x).map(|(a, b)| a * b).sum::<f64>());
        }
    }
}

impl Correction {
    fn df(&self, placement: &Placement, contrast: &Contrast, plain: f64) -> f64 {
        let slopes = DVector::from_iterator(
            self.moved.len(),
            (self.moved.iter()).map(|(up, down, h)| {
                (variance(placement, up, contrast) - variance(placement, down, contrast)) / (2.0 * h)
            }),
        );
        let spread = slopes.dot(&(&self.parameters * &slopes));
        let df = 2.0 * plain * plain / spread;
        if df.is_nan() { self.most_df.max(1.0) } else { df.clamp(1.0, self.most_df.max(1.0)) }
    }
}

/// The contrast as weights on the unknowns of each block that it touches.
fn block_weights(placement: &Placement, contrast: &Contrast) -> Vec<(usize, Vec<f64>)> {
    let mut blocks: Vec<(usize, Vec<f64>)> = Vec::new();
    for (g, weights) in &contrast.parts {
        let block = placement.block(*g);
        let at = blocks.iter().position(|(b, _)| *b == block).unwrap_or_else(|| {
            blocks.push((block, vec![0.0; placement.size(block)]));
            blocks.len() - 1
        });
        placement.spread(*g, weights, &mut blocks[at].1);
    }
    blocks
}

/// Value of a contrast for given coefficients per block, internal unit, centre left out.
pub(crate) fn contrast_value(placement: &Placement, contrast: &Contrast, coefficients: &[DMatrix<f64>]) -> f64 {
    let of = |(g, w): &(usize, Vec<f64>)| -> f64 {
        let own = &coefficients[placement.block(*g)];
        w.iter().enumerate().map(|(j, w)| w * own[placement.position(*g, j)]).sum()
    };
    contrast.parts.iter().map(of).sum()
}

pub(crate) fn solved_value(placement: &Placement, solved: &[Solved], contrast: &Contrast) -> f64 {
    let of = |(g, w): &(usize, Vec<f64>)| -> f64 {
        let own = &solved[placement.block(*g)].coefficients;
        w.iter().enumerate().map(|(j, w)| w * own[placement.position(*g, j)]).sum()
    };
    contrast.parts.iter().map(of).sum()
}

/// Coefficients drawn from their posterior given the variance parameters, one column per block.
pub(crate) fn draw_coefficients(solved: &[Solved], rng: &mut crate::special::Rng) -> Vec<DMatrix<f64>> {
    (solved.iter())
        .map(|s| {
            let n = s.coefficients.nrows();
            let mut x = DMatrix::from_fn(n, 1, |_, _| rng.normal());
            let l = s.factor.l_dirty();
            // x = L'^-1 z has covariance A^-1.
            for i in (0..n).rev() {
                let tail: f64 = (i + 1..n).map(|j| l[(j, i)] * x[j]).sum();
                x[i] = (x[i] - tail) / l[(i, i)];
            }
            &s.coefficients + x
        })
        .collect()
}

pub(crate) fn variance(placement: &Placement, solved: &[Solved], contrast: &Contrast) -> f64 {
    block_weights(placement, contrast).iter().map(|(block, w)| half_solve(&solved[*block], w).norm_squared()).sum()
}

/// `L^-1 w` with `A = L L'`.
fn half_solve(solved: &Solved, weights: &[f64]) -> DVector<f64> {
    let mut x = DVector::from_column_slice(weights);
    let l = solved.factor.l_dirty();
    // L is lower triangular and positive on its diagonal, so there is a solution.
    for i in 0..x.len() {
        let mut value = x[i];
        for j in 0..i {
            value -= l[(i, j)] * x[j];
        }
        x[i] = value / l[(i, i)];
    }
    x
}

/// Rows of unit length whose products are the correlations of a covariance matrix (m x m, row by row), and their
/// length, for [`DirectionMaxima::new`]. Rows without variance are zero.
#[must_use]
pub fn correlation_rows(covariance: &[f64], m: usize) -> (Vec<f64>, usize) {
    let sd: Vec<f64> = (0..m).map(|j| libm::sqrt(covariance[j * m + j].max(0.0))).collect();
    let correlation =
        DMatrix::from_fn(
            m,
            m,
            |i, j| {
                if sd[i] > 0.0 && sd[j] > 0.0 { covariance[i * m + j] / (sd[i] * sd[j]) } else { 0.0 }
            },
        );
    let eigen = symmetric_eigen(&((&correlation + correlation.transpose()) * 0.5));
    let root = DMatrix::from_fn(m, m, |i, k| eigen.eigenvectors[(i, k)] * libm::sqrt(eigen.eigenvalues[k].max(0.0)));
    let rows: Vec<Vec<f64>> = (0..m).map(|i| root.row(i).iter().copied().collect()).collect();
    reduce_rank(&rows)
}

/// Rows in the fewest dimensions that hold all but a 1e-5 share of their squared length, lengths kept.
fn reduce_rank(rows: &[Vec<f64>]) -> (Vec<f64>, usize) {
    let Some(width) = rows.first().map(Vec::len) else {
        return (Vec::new(), 0);
    };
    let mut gram: DMatrix<f64> = DMatrix::zeros(width, width);
    for row in rows {
        for i in 0..width {
            if row[i] != 0.0 {
                for j in 0..=i {
                    gram[(i, j)] += row[i] * row[j];
                }
            }
        }
    }
    gram.fill_upper_triangle_with_lower_triangle();
    let eigen = symmetric_eigen(&gram);
    let mut order: Vec<usize> = (0..width).collect();
    let size = |k: usize| -> f64 { eigen.eigenvalues[k] };
    order.sort_by(|&a, &b| size(b).total_cmp(&size(a)).then(a.cmp(&b)));
    let total: f64 = (0..width).map(|k| size(k).max(0.0)).sum();
    let mut rank = 0;
    let mut kept = 0.0;
    while rank < width && (rank == 0 || kept < (1.0 - 1e-5) * total) {
        kept += size(order[rank]).max(0.0);
        rank += 1;
    }
    let mut flat = vec![0.0; rows.len() * rank];
    for (row, out) in rows.iter().zip(flat.chunks_exact_mut(rank)) {
        for (k, value) in out.iter_mut().enumerate() {
            let vector = eigen.eigenvectors.column(order[k]);
            *value = row.iter().zip(vector.iter()).map(|(a, b)| a * b).sum();
        }
        let (full, short) = (row.iter().map(|x| x * x).sum::<f64>(), out.iter().map(|x| x * x).sum::<f64>());
        if short > 0.0 {
            let stretch = (full / short).sqrt();
            out.iter_mut().for_each(|x| *x *= stretch);
        }
    }
    (flat, rank)
}
