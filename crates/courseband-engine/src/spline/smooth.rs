//! Smooth functions of time whose penalty is the identity, whatever they are made of.
//!
//! | kind | functions before mixing | penalty |
//! |---|---|---|
//! | natural cubic | see [`NaturalSpline`] | `int f''^2` |
//! | thin plate, m = 2 | `|t - x|^3 / 12` at every distinct time x | `d'E d = int f''^2`, cut to its largest eigenvectors (Wood 2003, JRSS-B 65:95) |
//! | penalised B-splines | cubic B-splines on equal steps | squared second differences of coefficients (Eilers & Marx 1996, Stat Sci 11:89) |
//! | Gaussian process | Matern covariances with the knots | inverse covariance at the knots (Kammann & Wand 2003, Appl Stat 52:1) |
//! | cyclic cubic | values at equal steps around the circle | `int f''^2` over one period (Wood 2017, Generalized Additive Models, sec. 5.4.2, from memory) |
//!
//! Raw functions r(t) and a mixing matrix give the penalised columns `z(t) = r(t) M`; what the penalty leaves free
//! (level and trend; for the cyclic one the level) is a column of its own elsewhere. Columns are zero at internal
//! time 0 and scaled so that a smoothing variance means about the same in every basis.

use super::natural::NaturalSpline;
use crate::spectral::symmetric_eigen;
use nalgebra::DMatrix;

/// The penalised columns of a smooth course.
#[derive(Debug, Clone)]
pub(crate) enum Smooth {
    Natural(NaturalSpline),
    Mixed(Mixed),
}

/// Smoothness of the Matern covariance.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Roughness {
    /// Once differentiable.
    ThreeHalves,
    /// Twice differentiable.
    FiveHalves,
}

/// Raw functions.
#[derive(Debug, Clone)]
enum Raw {
    /// `|t - x|^3 / 12`.
    Cubes(Vec<f64>),
    /// This many cubic B-splines on equal steps over 0 to 1.
    Pieces(usize),
    /// Matern covariance with each knot at this range.
    Matern(Vec<f64>, f64, Roughness),
    /// Values at `values.nrows()` equal steps around a circle of this length; their second derivatives.
    Circle(f64, DMatrix<f64>),
}

/// Raw functions times a mixing matrix.
#[derive(Debug, Clone)]
pub(crate) struct Mixed {
    raw: Raw,
    mix: DMatrix<f64>,
    /// Columns at internal time 0.
    at_zero: Vec<f64>,
}

impl Smooth {
    /// Thin plate spline over the distinct times, with as many columns as `knots` has, less two.
    pub(crate) fn thin_plate(distinct: &[f64], count: usize) -> Option<Smooth> {
        let n = distinct.len();
        let e = DMatrix::from_fn(n, n, |i, j| cube(distinct[i] - distinct[j]));
        let eigen = symmetric_eigen(&e);
        let mut order: Vec<usize> = (0..n).collect();
        order.sort_by(|&a, &b| eigen.eigenvalues[b].abs().total_cmp(&eigen.eigenvalues[a].abs()).then(a.cmp(&b)));
        let k = count.min(n);
        let u = DMatrix::from_fn(n, k, |i, j| eigen.eigenvectors[(i, order[j])]);
        let line = DMatrix::from_fn(n, 2, |i, j| if j == 0 { 1.0 } else { distinct[i] });
        // Coefficients that leave level and trend out: T'U d = 0.
        let z = complement(&u.tr_mul(&line))?;
        let d = DMatrix::from_fn(k, k, |i, j| if i == j { eigen.eigenvalues[order[i]] } else { 0.0 });
        let penalty = z.tr_mul(&(d * &z));
        let mix = u * z * inverse_root(&penalty)?;
        Some(Mixed::smooth(Raw::Cubes(distinct.to_vec()), mix, distinct))
    }

    /// Penalised B-splines: `count` coefficients, at least five.
    pub(crate) fn pieces(distinct: &[f64], count: usize) -> Option<Smooth> {
        let k = count.max(5);
        let d = DMatrix::from_fn(k - 2, k, |i, j| match j as isize - i as isize {
            0 | 2 => 1.0,
            1 => -2.0,
            _ => 0.0,
        });
        // Coefficients with given second differences and nothing along level and trend (Currie & Durban 2002, Stat Model 2:333).
        let mix = d.transpose() * (&d * d.transpose()).try_inverse()?;
        Some(Mixed::smooth(Raw::Pieces(k), mix, distinct))
    }

    /// Gaussian process at the knots. `range` in internal time.
    pub(crate) fn process(knots: Vec<f64>, range: f64, roughness: Roughness) -> Option<Smooth> {
        let n = knots.len();
        let mut omega = DMatrix::from_fn(n, n, |i, j| matern((knots[i] - knots[j]).abs() / range, roughness).0);
        (0..n).for_each(|i| omega[(i, i)] += 1e-9);
        let mix = inverse_root(&omega)?;
        let at = knots.clone();
        Some(Mixed::smooth(Raw::Matern(knots, range, roughness), mix, &at))
    }

    /// Cyclic cubic spline with `count` values around a circle of length `period`, internal time.
    pub(crate) fn cyclic(period: f64, count: usize) -> Option<Smooth> {
        let k = count.max(4);
        let h = period / k as f64;
        let circulant = |middle: f64, side: f64| {
            DMatrix::from_fn(k, k, |i, j| {
                let step = (j + k - i) % k;
                if step == 0 {
                    middle
                } else if step == 1 || step == k - 1 {
                    side
                } else {
                    0.0
                }
            })
        };
        let (b, d) = (circulant(2.0 * h / 3.0, h / 6.0), circulant(-2.0 / h, 1.0 / h));
        let seconds = b.cholesky()?.solve(&d);
        let penalty = d.tr_mul(&seconds);
        let eigen = symmetric_eigen(&((&penalty + penalty.transpose()) * 0.5));
        let largest = eigen.eigenvalues.max();
        let kept: Vec<usize> = (0..k).filter(|&j| eigen.eigenvalues[j] > 1e-9 * largest).collect();
        let mix = DMatrix::from_fn(k, kept.len(), |i, j| {
            eigen.eigenvectors[(i, kept[j])] / libm::sqrt(eigen.eigenvalues[kept[j]])
        });
        let places: Vec<f64> = (0..k).map(|j| j as f64 * h).collect();
        Some(Mixed::smooth(Raw::Circle(period, seconds), mix, &places))
    }

    /// Number of columns.
    pub(crate) fn len(&self) -> usize {
        match self {
            Smooth::Natural(spline) => spline.len(),
            Smooth::Mixed(mixed) => mixed.mix.ncols(),
        }
    }

    /// True where a trend is no part of the course.
    pub(crate) fn is_cyclic(&self) -> bool {
        matches!(self, Smooth::Mixed(Mixed { raw: Raw::Circle(..), .. }))
    }

    /// Writes the columns at internal time `t`, or their first derivatives.
    pub(crate) fn fill(&self, t: f64, derivative: bool, out: &mut [f64]) {
        match self {
            Smooth::Natural(spline) => spline.fill(t, derivative, out),
            Smooth::Mixed(mixed) => mixed.fill(t, derivative, out),
        }
    }
}

/// Mean squared length of a row of columns at the places where a basis stands: about that of a natural spline.
const SCALE: f64 = 0.02;

impl Mixed {
    fn smooth(raw: Raw, mix: DMatrix<f64>, places: &[f64]) -> Smooth {
        let mut mixed = Mixed { raw, at_zero: vec![0.0; mix.ncols()], mix };
        let mut row = vec![0.0; mixed.mix.ncols()];
        mixed.fill(0.0, false, &mut row);
        mixed.at_zero.copy_from_slice(&row);
        let mut square = 0.0;
        for &t in places {
            mixed.fill(t, false, &mut row);
            square += row.iter().map(|z| z * z).sum::<f64>() / places.len() as f64;
        }
        let factor = libm::sqrt(SCALE / square);
        mixed.mix *= factor;
        mixed.at_zero.iter_mut().for_each(|z| *z *= factor);
        Smooth::Mixed(mixed)
    }

    fn fill(&self, t: f64, derivative: bool, out: &mut [f64]) {
        out.fill(0.0);
        let mut add = |k: usize, value: f64| {
            for (j, out) in out.iter_mut().enumerate() {
                *out += value * self.mix[(k, j)];
            }
        };
        match &self.raw {
            Raw::Cubes(at) => {
                for (k, x) in at.iter().enumerate() {
                    let r = t - x;
                    add(k, if derivative { r * r.abs() / 4.0 } else { cube(r) });
                }
            }
            Raw::Pieces(count) => pieces_at(t, *count, derivative, &mut add),
            Raw::Matern(at, range, roughness) => {
                for (k, x) in at.iter().enumerate() {
                    let (value, slope) = matern((t - x).abs() / range, *roughness);
                    add(k, if derivative { slope / range * (t - x).signum() } else { value });
                }
            }
            Raw::Circle(period, seconds) => circle_at(t, *period, seconds, derivative, &mut add),
        }
        if !derivative {
            out.iter_mut().zip(&self.at_zero).for_each(|(z, zero)| *z -= zero);
        }
    }
}

/// `|r|^3 / 12`.
fn cube(r: f64) -> f64 {
    r * r * r.abs() / 12.0
}

/// Matern correlation at distance `x` ranges, and its derivative for `x`.
fn matern(x: f64, roughness: Roughness) -> (f64, f64) {
    match roughness {
        Roughness::ThreeHalves => {
            let a = libm::sqrt(3.0) * x;
            ((1.0 + a) * libm::exp(-a), -3.0 * x * libm::exp(-a))
        }
        Roughness::FiveHalves => {
            let a = libm::sqrt(5.0) * x;
            ((1.0 + a + a * a / 3.0) * libm::exp(-a), -5.0 * x * (1.0 + a) / 3.0 * libm::exp(-a))
        }
    }
}

/// The four cubic B-splines on equal steps that are not zero at `t` (de Boor 1978); beyond the ends straight on.
fn pieces_at(t: f64, count: usize, derivative: bool, add: &mut dyn FnMut(usize, f64)) {
    let steps = (count - 3) as f64;
    let inside = t.clamp(0.0, 1.0);
    let piece = ((inside * steps) as usize).min(count - 4);
    let u = inside * steps - piece as f64;
    let v = 1.0 - u;
    let values = [
        v * v * v / 6.0,
        (3.0 * u * u * u - 6.0 * u * u + 4.0) / 6.0,
        (3.0 * v * v * v - 6.0 * v * v + 4.0) / 6.0,
        u * u * u / 6.0,
    ];
    let slopes = [-v * v / 2.0, (3.0 * u * u - 4.0 * u) / 2.0, (4.0 * v - 3.0 * v * v) / 2.0, u * u / 2.0];
    for k in 0..4 {
        let value = if derivative { slopes[k] * steps } else { values[k] + (t - inside) * slopes[k] * steps };
        add(piece + k, value);
    }
}

/// Values around the circle as a cubic spline at `t`.
fn circle_at(t: f64, period: f64, seconds: &DMatrix<f64>, derivative: bool, add: &mut dyn FnMut(usize, f64)) {
    let k = seconds.nrows();
    let h = period / k as f64;
    let turned = t - period * libm::floor(t / period);
    let left = ((turned / h) as usize).min(k - 1);
    let right = (left + 1) % k;
    let b = turned / h - left as f64;
    let a = 1.0 - b;
    let weights = if derivative {
        [-1.0 / h, 1.0 / h, -h * (3.0 * a * a - 1.0) / 6.0, h * (3.0 * b * b - 1.0) / 6.0]
    } else {
        [a, b, h * h * (a * a * a - a) / 6.0, h * h * (b * b * b - b) / 6.0]
    };
    add(left, weights[0]);
    add(right, weights[1]);
    for j in 0..k {
        add(j, weights[2] * seconds[(left, j)] + weights[3] * seconds[(right, j)]);
    }
}

/// Orthonormal columns that the given ones leave free.
fn complement(taken: &DMatrix<f64>) -> Option<DMatrix<f64>> {
    let n = taken.nrows();
    let gram = (taken.tr_mul(taken)).try_inverse()?;
    let left = DMatrix::identity(n, n) - taken * gram * taken.transpose();
    let eigen = symmetric_eigen(&left);
    let kept: Vec<usize> = (0..n).filter(|&j| eigen.eigenvalues[j] > 0.5).collect();
    Some(DMatrix::from_fn(n, kept.len(), |i, j| eigen.eigenvectors[(i, kept[j])]))
}

/// `S^(-1/2)` as `L^-T` of `S = L L'`.
fn inverse_root(matrix: &DMatrix<f64>) -> Option<DMatrix<f64>> {
    let symmetric = (matrix + matrix.transpose()) * 0.5;
    let n = symmetric.nrows();
    symmetric.cholesky()?.l().transpose().solve_upper_triangular(&DMatrix::identity(n, n))
}

#[cfg(test)]
#[path = "smooth_tests.rs"]
mod tests;
