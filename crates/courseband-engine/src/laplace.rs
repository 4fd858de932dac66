//! Responses that are not normal: the restricted likelihood by Laplace's approximation.
//!
//! With link predictor `eta = F b + Z L v`, `v ~ N(0, I)` per subject and the penalised columns' prior `N(0, s^2)`, the
//! mode of (b, v) is found by Newton's method, subjects taken out one by one, and minus twice the log of
//! the integral over b and v is approximated by (Tierney & Kadane 1986, JASA 81:82; Wood 2011, JRSS-B 73:3, from memory)
//!
//! `-2 [sum l - b'P b / 2 - sum v'v / 2] + r ln s^2 + sum ln|H_i| + ln|A| - p ln 2pi`,
//!
//! `H_i = I + L'Z'W Z L`, `A = F'W F + P - sum F'W Z L H^-1 L'Z'W F`, W minus the second derivatives of l at the mode.
//! For a normal response this is the restricted likelihood itself. Cost O(rows (K^2 + K q)) per Newton step.
//! The gradient over the few variance parameters is by central differences of the value, whose mode is followed to 1e-10.

use crate::criterion::Solved;
use crate::density::{LN_TWO_PI, Row, constant, density};
use crate::model::Family;
use crate::params::Layout;
use crate::reduce::{Design, Pattern};
use nalgebra::{Cholesky, DMatrix, DVector};

/// Newton steps to a mode at most.
const MOST_STEPS: usize = 60;
/// Halvings of one step at most.
const MOST_HALVINGS: usize = 30;

/// Where the joint density is largest.
#[derive(Debug, Clone)]
pub(crate) struct Mode {
    /// Coefficients per block.
    b: Vec<DVector<f64>>,
    /// Standardised effects per pattern: w rows, one column per subject.
    v: Vec<DMatrix<f64>>,
}

/// The value and the solved equations at a mode.
pub(crate) struct AtMode {
    /// Minus the log restricted likelihood.
    pub(crate) value: f64,
    pub(crate) solved: Vec<Solved>,
    pub(crate) mode: Mode,
}

/// The link predictor of a mean.
fn link(family: Family, mean: f64) -> f64 {
    match family {
        Family::Normal | Family::Censored => mean,
        Family::Binomial | Family::Beta => {
            let p = mean.clamp(0.01, 0.99);
            libm::log(p / (1.0 - p))
        }
        _ => libm::log(mean.max(1e-3)),
    }
}

/// One row of a pattern, by its place among the responses.
fn row(pattern: &Pattern, at: usize, dispersion: f64) -> Row {
    let detail = pattern.detail.get(at).copied().unwrap_or(f64::NAN);
    Row { y: pattern.responses[at], detail, dispersion }
}

/// One design and layout, ready to be evaluated.
pub(crate) struct Laplace<'a> {
    design: &'a Design,
    layout: &'a Layout,
    /// Per pattern: extended columns, n rows.
    columns: Vec<DMatrix<f64>>,
    /// Per pattern: columns of subject effects, n rows.
    effects: Vec<DMatrix<f64>>,
}

impl<'a> Laplace<'a> {
    pub(crate) fn new(design: &'a Design, layout: &'a Layout) -> Self {
        let w = design.effects.width();
        let columns = (design.patterns.iter())
            .map(|p| {
                let rows: Vec<Vec<f64>> = (0..p.times.len()).map(|j| design.columns_of(p, j)).collect();
                DMatrix::from_fn(rows.len(), design.placement.extended(p.group), |j, c| rows[j][c])
            })
            .collect();
        let effects = design.patterns.iter().map(|p| DMatrix::from_row_slice(p.times.len(), w, &p.effects)).collect();
        Laplace { design, layout, columns, effects }
    }

    /// Levels at the groups' means, subjects alike.
    fn begin(&self) -> Mode {
        let placement = &self.design.placement;
        let mut b: Vec<DVector<f64>> = (0..placement.blocks()).map(|k| DVector::zeros(placement.size(k))).collect();
        for (g, basis) in self.design.bases.iter().enumerate() {
            let own = self.design.patterns.iter().filter(|p| p.group == g);
            let (mut sum, mut count) = (0.0, 0.0);
            let trials = |p: &Pattern| match self.layout.family {
                Family::Binomial if !p.detail.is_empty() => p.detail.iter().sum::<f64>(),
                _ => p.responses.len() as f64,
            };
            own.for_each(|p| {
                sum += p.responses.iter().sum::<f64>();
                count += trials(p);
            });
            let level = link(self.layout.family, sum / count);
            // By-time means have a column each; otherwise the first is the level.
            let levels = if basis.has_trend() || basis.penalised() > 0 { 1 } else { basis.unpenalised() };
            (0..levels).for_each(|c| b[placement.block(g)][placement.position(g, c)] = level);
        }
        let w = self.design.effects.width();
        let v = self.design.patterns.iter().map(|p| DMatrix::zeros(w, p.subjects.len())).collect();
        Mode { b, v }
    }

    /// The value at `theta`, the mode sought from `from`. `None` where no mode is found: the response does not
    /// bound some course, such as a group of zeros.
    pub(crate) fn at(&self, theta: &[f64], from: Option<&Mode>) -> Option<AtMode> {
        let mut mode = from.cloned().unwrap_or_else(|| self.begin());
        let factors: Vec<DMatrix<f64>> =
            (0..self.design.bases.len()).map(|g| self.layout.subject_factor(theta, g)).collect();
        let mut height = self.height(theta, &factors, &mode);
        if !height.is_finite() {
            mode = self.begin();
            height = self.height(theta, &factors, &mode);
        }
        for _ in 0..MOST_STEPS {
            let step = self.step(theta, &factors, &mode)?;
            if step.gain < 1e-11 * (1.0 + height.abs()) {
                return self.finish(theta, height, mode, step);
            }
            let mut size = 1.0;
            let mut taken = None;
            for _ in 0..MOST_HALVINGS {
                let tried = moved(&mode, &step, size);
                let reached = self.height(theta, &factors, &tried);
                if reached.is_finite() && reached >= height {
                    taken = Some((tried, reached));
                    break;
                }
                size *= 0.5;
            }
            match taken {
                Some((tried, reached)) => (mode, height) = (tried, reached),
                // No rise to be had in the last digits: this is the mode.
                None if step.gain < 1e-6 => return self.finish(theta, height, mode, step),
                None => return None,
            }
        }
        None
    }

    fn predictor(&self, k: usize, mode: &Mode, factor: &DMatrix<f64>) -> (DVector<f64>, DMatrix<f64>) {
        let pattern = &self.design.patterns[k];
        let placement = &self.design.placement;
        let own = &mode.b[placement.block(pattern.group)];
        let gathered =
            DVector::from_fn(placement.extended(pattern.group), |c, _| own[placement.position(pattern.group, c)]);
        (&self.columns[k] * gathered, &self.effects[k] * factor * &mode.v[k])
    }

    fn dispersion(&self, theta: &[f64], pattern: &Pattern) -> f64 {
        self.layout.variance(theta, pattern.group)
    }

    /// What of the log density depends on the dispersion alone.
    fn constants(&self, theta: &[f64]) -> f64 {
        let part = |pattern: &Pattern| -> f64 {
            let phi = self.dispersion(theta, pattern);
            (0..pattern.responses.len()).map(|at| constant(self.layout.family, row(pattern, at, phi))).sum()
        };
        self.design.patterns.iter().map(part).sum()
    }

    /// Log joint density, constants left out.
    fn height(&self, theta: &[f64], factors: &[DMatrix<f64>], mode: &Mode) -> f64 {
        let mut height = 0.0;
        for (k, pattern) in self.design.patterns.iter().enumerate() {
            let (mean, effects) = self.predictor(k, mode, &factors[pattern.group]);
            let phi = self.dispersion(theta, pattern);
            let m = pattern.subjects.len();
            for at in 0..pattern.responses.len() {
                height +=
                    density(self.layout.family, row(pattern, at, phi), mean[at / m] + effects[(at / m, at % m)])[0];
            }
            height -= 0.5 * mode.v[k].norm_squared();
        }
        for block in 0..self.design.placement.blocks() {
            for (entry, columns) in self.layout.priors(self.design, block) {
                let precision = libm::exp(-theta[entry]);
                height -= 0.5 * precision * columns.map(|j| mode.b[block][j] * mode.b[block][j]).sum::<f64>();
            }
        }
        height
    }

    fn step(&self, theta: &[f64], factors: &[DMatrix<f64>], mode: &Mode) -> Option<Step> {
        let placement = &self.design.placement;
        let w = self.design.effects.width();
        let sizes: Vec<usize> = (0..placement.blocks()).map(|k| placement.size(k)).collect();
        let mut a: Vec<DMatrix<f64>> = sizes.iter().map(|&n| DMatrix::zeros(n, n)).collect();
        let mut rhs: Vec<DVector<f64>> = sizes.iter().map(|&n| DVector::zeros(n)).collect();
        let mut subjects = Vec::new();
        let mut log_h = 0.0;
        for (k, pattern) in self.design.patterns.iter().enumerate() {
            let g = pattern.group;
            let (mean, effects) = self.predictor(k, mode, &factors[g]);
            let phi = self.dispersion(theta, pattern);
            let zl = &self.effects[k] * &factors[g];
            let f = &self.columns[k];
            let m = pattern.subjects.len();
            for s in 0..m {
                let rows = (0..mean.len())
                    .map(|j| density(self.layout.family, row(pattern, j * m + s, phi), mean[j] + effects[(j, s)]));
                let rows: Vec<[f64; 3]> = rows.collect();
                let score = DVector::from_fn(rows.len(), |j, _| rows[j][1]);
                let wf = DMatrix::from_fn(f.nrows(), f.ncols(), |j, c| rows[j][2] * f[(j, c)]);
                let mut own = f.tr_mul(&wf);
                let mut right = f.tr_mul(&score);
                if w > 0 {
                    let wz = DMatrix::from_fn(zl.nrows(), w, |j, c| rows[j][2] * zl[(j, c)]);
                    let mut h = zl.tr_mul(&wz);
                    (0..w).for_each(|c| h[(c, c)] += 1.0);
                    let h = Cholesky::new(h)?;
                    log_h += 2.0 * h.l_dirty().diagonal().iter().map(|&d| libm::log(d)).sum::<f64>();
                    let cross = f.tr_mul(&wz);
                    let gv = zl.tr_mul(&score) - mode.v[k].column(s);
                    let solved = h.solve(&cross.transpose());
                    own -= &cross * &solved;
                    right -= &cross * h.solve(&gv);
                    subjects.push(Eliminated { h, cross, gv });
                }
                let block = placement.block(g);
                placement.scatter(g, &own, &mut a[block]);
                (0..right.len()).for_each(|c| rhs[block][placement.position(g, c)] += right[c]);
            }
        }
        let mut blocks = Vec::with_capacity(a.len());
        for (block, (mut a, mut right)) in a.into_iter().zip(rhs).enumerate() {
            for (entry, columns) in self.layout.priors(self.design, block) {
                let precision = libm::exp(-theta[entry]);
                columns.for_each(|j| {
                    a[(j, j)] += precision;
                    right[j] -= precision * mode.b[block][j];
                });
            }
            let factor = Cholesky::new(a)?;
            let db = factor.solve(&right);
            blocks.push((factor, db, right));
        }
        Some(self.eliminated(blocks, subjects, log_h))
    }

    /// Moves of all subjects from those of the blocks, and the rise that a whole step promises.
    fn eliminated(&self, blocks: Vec<SolvedStep>, subjects: Vec<Eliminated>, log_h: f64) -> Step {
        let placement = &self.design.placement;
        let mut gain: f64 = blocks.iter().map(|(_, db, right)| 0.5 * db.dot(right)).sum();
        let mut dv = Vec::with_capacity(self.design.patterns.len());
        let mut next = subjects.into_iter();
        for pattern in &self.design.patterns {
            let w = self.design.effects.width();
            let mut own = DMatrix::zeros(w, pattern.subjects.len());
            if w > 0 {
                let db = &blocks[placement.block(pattern.group)].1;
                let part = DVector::from_fn(placement.extended(pattern.group), |c, _| {
                    db[placement.position(pattern.group, c)]
                });
                for s in 0..pattern.subjects.len() {
                    if let Some(one) = next.next() {
                        let move_ = one.h.solve(&(&one.gv - one.cross.tr_mul(&part)));
                        gain += 0.5 * one.gv.dot(&one.h.solve(&one.gv));
                        own.set_column(s, &move_);
                    }
                }
            }
            dv.push(own);
        }
        let (factors, db): (Vec<_>, Vec<_>) = blocks.into_iter().map(|(factor, db, _)| (factor, db)).unzip();
        Step { factors, db, dv, gain, log_h }
    }

    /// False where some group says nothing of its course any more: all zeros, or all alike under a logit.
    fn is_bounded(&self, theta: &[f64], mode: &Mode) -> bool {
        let mut weights = vec![0.0; self.design.bases.len()];
        for (k, pattern) in self.design.patterns.iter().enumerate() {
            let factor = self.layout.subject_factor(theta, pattern.group);
            let (mean, effects) = self.predictor(k, mode, &factor);
            let (phi, m) = (self.dispersion(theta, pattern), pattern.subjects.len());
            for at in 0..pattern.responses.len() {
                let eta = mean[at / m] + effects[(at / m, at % m)];
                weights[pattern.group] += density(self.layout.family, row(pattern, at, phi), eta)[2];
            }
        }
        weights.iter().all(|&sum| sum > 1e-3)
    }

    fn finish(&self, theta: &[f64], height: f64, mode: Mode, step: Step) -> Option<AtMode> {
        if !self.is_bounded(theta, &mode) {
            return None;
        }
        let mut value =
            -2.0 * (height + self.constants(theta)) + step.log_h - self.design.unpenalised() as f64 * LN_TWO_PI;
        for block in 0..self.design.placement.blocks() {
            for (entry, columns) in self.layout.priors(self.design, block) {
                value += columns.len() as f64 * theta[entry];
            }
        }
        let mut solved = Vec::with_capacity(step.factors.len());
        for (factor, b) in step.factors.into_iter().zip(&mode.b) {
            value += 2.0 * factor.l_dirty().diagonal().iter().map(|&d| libm::log(d)).sum::<f64>();
            solved.push(Solved { factor, coefficients: DMatrix::from_column_slice(b.len(), 1, b.as_slice()) });
        }
        value.is_finite().then_some(AtMode { value: 0.5 * value, solved, mode })
    }
}

/// A block's factor, its move and its right side.
type SolvedStep = (Cholesky<f64, nalgebra::Dyn>, DVector<f64>, DVector<f64>);

struct Eliminated {
    h: Cholesky<f64, nalgebra::Dyn>,
    cross: DMatrix<f64>,
    gv: DVector<f64>,
}

struct Step {
    factors: Vec<Cholesky<f64, nalgebra::Dyn>>,
    db: Vec<DVector<f64>>,
    dv: Vec<DMatrix<f64>>,
    /// Rise of the log density that the step promises.
    gain: f64,
    log_h: f64,
}

fn moved(mode: &Mode, step: &Step, size: f64) -> Mode {
    Mode {
        b: mode.b.iter().zip(&step.db).map(|(b, d)| b + d * size).collect(),
        v: mode.v.iter().zip(&step.dv).map(|(v, d)| v + d * size).collect(),
    }
}

#[cfg(test)]
#[path = "laplace_tests.rs"]
mod tests;
