//! Minimising a smooth function within bounds.
//!
//! Quasi-Newton (BFGS on the inverse Hessian; Nocedal & Wright 2006, Numerical
//! Optimization, eq 6.17) over the entries that are not held at a bound, with
//! backtracking, then Newton steps with a Hessian from differences of the
//! analytic gradient. Every loop is bounded.

use crate::spectral::symmetric_eigen;
use nalgebra::{DMatrix, DVector};

/// A point, with the function and its gradient there.
#[derive(Debug, Clone)]
pub(crate) struct Point {
    pub(crate) theta: Vec<f64>,
    pub(crate) value: f64,
    pub(crate) gradient: Vec<f64>,
}

/// The function: value and gradient, `None` where it cannot be computed.
pub(crate) trait Objective {
    fn at(&mut self, theta: &[f64]) -> Option<(f64, Vec<f64>)>;
}

/// Bounds of each entry.
pub(crate) struct Bounds<'a> {
    pub(crate) lower: &'a [f64],
    pub(crate) upper: &'a [f64],
}

impl Bounds<'_> {
    fn clamp(&self, theta: &mut [f64]) {
        for (k, value) in theta.iter_mut().enumerate() {
            *value = value.clamp(self.lower[k], self.upper[k]);
        }
    }

    /// Entries that may move: not at a bound with the function falling beyond it.
    pub(crate) fn free(&self, point: &Point) -> Vec<usize> {
        (0..point.theta.len())
            .filter(|&k| {
                let at_lower = point.theta[k] <= self.lower[k] && point.gradient[k] >= 0.0;
                let at_upper = point.theta[k] >= self.upper[k] && point.gradient[k] <= 0.0;
                !(at_lower || at_upper)
            })
            .collect()
    }
}

/// Longest move of an entry in one step: parameters are logarithms.
const LONGEST_MOVE: f64 = 2.5;

/// Evaluates a start.
pub(crate) fn start(objective: &mut dyn Objective, bounds: &Bounds, mut theta: Vec<f64>) -> Option<Point> {
    bounds.clamp(&mut theta);
    let (value, gradient) = objective.at(&theta)?;
    Some(Point { theta, value, gradient })
}

/// Quasi-Newton steps from the inverse Hessian `begin` (a multiple of the identity is rescaled
/// after the first step) until the largest gradient entry of the free entries is under
/// `tolerance`, or `most` steps are taken, or no step lowers the function.
pub(crate) fn quasi_newton(
    objective: &mut dyn Objective,
    bounds: &Bounds,
    mut point: Point,
    begin: &DMatrix<f64>,
    tolerance: f64,
    most: usize,
) -> Point {
    let mut inverse = begin.clone();
    let mut fresh = true;
    let mut last_free = Vec::new();
    for _ in 0..most {
        let free = bounds.free(&point);
        let steepest = free.iter().map(|&k| point.gradient[k].abs()).fold(0.0, f64::max);
        if steepest < tolerance {
            break;
        }
        if free != last_free && !fresh {
            inverse = begin.clone();
            fresh = true;
        }
        last_free.clone_from(&free);
        let mut direction = direction(&inverse, &point, &free);
        let mut slope = direction.dot(&DVector::from_column_slice(&point.gradient));
        if slope >= 0.0 {
            inverse = begin.clone();
            direction = self::direction(&inverse, &point, &free);
            slope = direction.dot(&DVector::from_column_slice(&point.gradient));
        }
        match search(objective, bounds, &point, &direction, slope) {
            Some(next) => {
                update(&mut inverse, &point, &next, &mut fresh);
                let fall = point.value - next.value;
                point = next;
                if fall.abs() < 1e-13 * (1.0 + point.value.abs()) {
                    break;
                }
            }
            None if fresh => break,
            None => {
                inverse = begin.clone();
                fresh = true;
            }
        }
    }
    point
}

/// A multiple of the identity as the first inverse Hessian.
pub(crate) fn plain_inverse(n: usize, curvature: f64) -> DMatrix<f64> {
    DMatrix::identity(n, n) * (1.0 / curvature.max(1e-8))
}

fn direction(inverse: &DMatrix<f64>, point: &Point, free: &[usize]) -> DVector<f64> {
    let mut result = DVector::zeros(point.theta.len());
    for &i in free {
        result[i] = -free.iter().map(|&j| inverse[(i, j)] * point.gradient[j]).sum::<f64>();
    }
    let longest = result.iter().fold(0.0, |most: f64, value| most.max(value.abs()));
    if longest > LONGEST_MOVE {
        result *= LONGEST_MOVE / longest;
    }
    result
}

fn search(
    objective: &mut dyn Objective,
    bounds: &Bounds,
    point: &Point,
    direction: &DVector<f64>,
    slope: f64,
) -> Option<Point> {
    let mut length = 1.0;
    for _ in 0..25 {
        let mut theta: Vec<f64> = point.theta.iter().zip(direction.iter()).map(|(t, d)| t + length * d).collect();
        bounds.clamp(&mut theta);
        let tried = objective.at(&theta);
        let mut shorter = 0.3;
        if let Some((value, gradient)) = tried {
            if value <= point.value + 1e-4 * length * slope {
                return Some(Point { theta, value, gradient });
            }
            // Minimum of the parabola through both values and the slope.
            let rise = value - point.value - length * slope;
            shorter = (-0.5 * length * slope / rise).clamp(0.1, 0.5);
        }
        length *= shorter;
        if length < 1e-9 {
            break;
        }
    }
    None
}

fn update(inverse: &mut DMatrix<f64>, from: &Point, to: &Point, fresh: &mut bool) {
    let n = from.theta.len();
    let s = DVector::from_fn(n, |k, _| to.theta[k] - from.theta[k]);
    let y = DVector::from_fn(n, |k, _| to.gradient[k] - from.gradient[k]);
    let sy = s.dot(&y);
    if sy <= 1e-10 * s.norm() * y.norm() {
        return;
    }
    let plain = inverse.iter().enumerate().all(|(k, &value)| value == 0.0 || k % (n + 1) == 0);
    if *fresh && plain {
        *inverse = DMatrix::identity(n, n) * (sy / y.dot(&y));
    }
    *fresh = false;
    let hy = &*inverse * &y;
    let scale = (1.0 + y.dot(&hy) / sy) / sy;
    *inverse += &s * s.transpose() * scale - (&hy * s.transpose() + &s * hy.transpose()) / sy;
}

/// Hessian over the entries in `free` by central differences of the gradient; symmetric.
pub(crate) fn hessian(objective: &mut dyn Objective, theta: &[f64], free: &[usize]) -> Option<DMatrix<f64>> {
    let n = free.len();
    let mut result = DMatrix::zeros(n, n);
    for (column, &k) in free.iter().enumerate() {
        let h = 1e-4 * theta[k].abs().clamp(1.0, 4.0);
        let mut moved = theta.to_vec();
        moved[k] = theta[k] + h;
        let (_, up) = objective.at(&moved)?;
        moved[k] = theta[k] - h;
        let (_, down) = objective.at(&moved)?;
        for (row, &j) in free.iter().enumerate() {
            result[(row, column)] = (up[j] - down[j]) / (2.0 * h);
        }
    }
    Some((&result + result.transpose()) * 0.5)
}

/// How the Newton steps ended.
pub(crate) struct Polished {
    pub(crate) point: Point,
    /// Entries not at a bound.
    pub(crate) free: Vec<usize>,
    /// Hessian over them.
    pub(crate) hessian: DMatrix<f64>,
    /// Predicted further fall of the function.
    pub(crate) decrement: f64,
    /// True where the Hessian is positive definite.
    pub(crate) definite: bool,
}

/// Newton steps to the optimum. `None` where the Hessian cannot be computed.
pub(crate) fn newton(
    objective: &mut dyn Objective,
    bounds: &Bounds,
    mut point: Point,
    most: usize,
) -> Option<Polished> {
    let mut round = 0;
    loop {
        let free = bounds.free(&point);
        let hessian = hessian(objective, &point.theta, &free)?;
        let gradient = DVector::from_fn(free.len(), |k, _| point.gradient[free[k]]);
        let eigen = symmetric_eigen(&hessian);
        let largest = eigen.eigenvalues.iter().fold(1e-12, |most: f64, value| most.max(value.abs()));
        let definite = eigen.eigenvalues.iter().all(|&value| value > 1e-9 * largest);
        let rotated = eigen.eigenvectors.tr_mul(&gradient);
        let floored = eigen.eigenvalues.map(|value| value.abs().max(1e-7 * largest));
        let decrement: f64 = rotated.iter().zip(floored.iter()).map(|(g, value)| 0.5 * g * g / value).sum();
        round += 1;
        if decrement < 1e-12 || round > most {
            return Some(Polished { point, free, hessian, decrement, definite });
        }
        let step = -(&eigen.eigenvectors * rotated.component_div(&floored));
        let mut whole = DVector::zeros(point.theta.len());
        free.iter().enumerate().for_each(|(k, &j)| whole[j] = step[k]);
        let longest = whole.iter().fold(0.0, |most: f64, value| most.max(value.abs()));
        if longest > LONGEST_MOVE {
            whole *= LONGEST_MOVE / longest;
        }
        let slope = whole.dot(&DVector::from_column_slice(&point.gradient));
        match search(objective, bounds, &point, &whole, slope) {
            Some(next) => point = next,
            None => return Some(Polished { point, free, hessian, decrement, definite }),
        }
    }
}
