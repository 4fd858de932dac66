//! Independent errors out of serially correlated ones, in one pass over a subject's rows.
//!
//! Errors have unit variance: a stationary AR(1) process of variance `1 - v`
//! with correlation `exp(-rate |dt|)`, seen through independent measurement
//! errors of variance `v` (Diggle 1988, Biometrics 44:959). The recursion is
//! the Kalman filter of that scalar state (Harvey 1989, Forecasting, ch. 3):
//! each row's one-step prediction error over its standard deviation. It is
//! linear in the rows, costs O(1) per entry, and is exact at `v = 0`, where it
//! is the usual AR(1) difference, and at tied times where `v > 0`.
//!
//! Derivatives with respect to `ln rate` and `logit v` run beside it (forward mode).

/// Correlation of the errors; times are internal.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct ErrorShape {
    /// Decay of the correlation per internal time unit.
    pub(crate) rate: f64,
    /// Share of measurement error, in [0, 1).
    pub(crate) nugget: f64,
}

/// The filter's numbers at one row.
#[derive(Debug, Clone, Copy, Default)]
struct Step {
    /// 1 / sd of the prediction error.
    weight: f64,
    /// Gain of the filtered state.
    gain: f64,
    /// Correlation to the next row.
    carry: f64,
    /// Derivatives for each of the two parameters.
    d_weight: [f64; 2],
    d_gain: [f64; 2],
    d_carry: [f64; 2],
}

/// The filter for one visiting schedule.
#[derive(Debug, Clone)]
pub(crate) struct Whitener {
    steps: Vec<Step>,
    /// Log determinant of the error correlation matrix.
    pub(crate) log_det: f64,
    /// Its derivatives for `ln rate` and `logit nugget`.
    pub(crate) d_log_det: [f64; 2],
}

impl Whitener {
    /// `None` where the correlation matrix is singular (tied times without measurement error).
    pub(crate) fn new(times: &[f64], shape: ErrorShape) -> Option<Self> {
        let v = shape.nugget;
        let dv = [0.0, v * (1.0 - v)];
        let mut steps = Vec::with_capacity(times.len());
        let (mut log_det, mut d_log_det) = (0.0, [0.0; 2]);
        let (mut p, mut dp) = (1.0 - v, [0.0, -dv[1]]);
        for j in 0..times.len() {
            let f = p + v;
            if !(f > 1e-14) {
                return None;
            }
            log_det += libm::log(f);
            let mut step = Step { weight: 1.0 / f.sqrt(), gain: p / f, ..Step::default() };
            let filtered = p * v / f;
            let mut d_filtered = [0.0; 2];
            for k in 0..2 {
                let df = dp[k] + dv[k];
                d_log_det[k] += df / f;
                step.d_weight[k] = -0.5 * step.weight * df / f;
                step.d_gain[k] = (dp[k] - step.gain * df) / f;
                d_filtered[k] = (dp[k] * v + p * dv[k] - filtered * df) / f;
            }
            if j + 1 < times.len() {
                let x = shape.rate * (times[j + 1] - times[j]);
                let carry = libm::exp(-x);
                let fresh = -libm::expm1(-2.0 * x);
                step.carry = carry;
                step.d_carry = [-x * carry, 0.0];
                let square = carry * carry;
                p = square * filtered + (1.0 - v) * fresh;
                dp = [
                    square * d_filtered[0] - 2.0 * x * square * filtered + (1.0 - v) * 2.0 * x * square,
                    square * d_filtered[1] - dv[1] * fresh,
                ];
            }
            steps.push(step);
        }
        Some(Whitener { steps, log_det, d_log_det })
    }

    /// Whitens `rows` (n rows of `width`, row by row) in place.
    pub(crate) fn apply(&self, rows: &mut [f64], width: usize) {
        let mut state = vec![0.0; width];
        for (step, row) in self.steps.iter().zip(rows.chunks_exact_mut(width)) {
            for (x, a) in row.iter_mut().zip(&mut state) {
                let v = *x - *a;
                *a = step.carry * (*a + step.gain * v);
                *x = step.weight * v;
            }
        }
    }

    /// Whitens `rows` in place and writes the derivative for parameter `which` into `slopes`.
    pub(crate) fn apply_with_slope(&self, rows: &mut [f64], slopes: &mut [f64], width: usize, which: usize) {
        let mut state = vec![[0.0; 2]; width];
        let lines = rows.chunks_exact_mut(width).zip(slopes.chunks_exact_mut(width));
        for (step, (row, slope)) in self.steps.iter().zip(lines) {
            let (dw, dk, dc) = (step.d_weight[which], step.d_gain[which], step.d_carry[which]);
            for ((x, dx), [a, da]) in row.iter_mut().zip(slope).zip(&mut state) {
                let v = *x - *a;
                let filtered = *a + step.gain * v;
                let d_filtered = *da + dk * v - step.gain * *da;
                *dx = dw * v - step.weight * *da;
                *x = step.weight * v;
                *da = dc * filtered + step.carry * d_filtered;
                *a = step.carry * filtered;
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use nalgebra::{DMatrix, DVector};

    fn dense(times: &[f64], shape: ErrorShape) -> DMatrix<f64> {
        DMatrix::from_fn(times.len(), times.len(), |i, j| {
            let process = (1.0 - shape.nugget) * libm::exp(-shape.rate * (times[i] - times[j]).abs());
            process + if i == j { shape.nugget } else { 0.0 }
        })
    }

    #[test]
    fn whitened_products_equal_the_dense_inverse() {
        let times = [0.0, 0.1, 0.1, 0.35, 0.9];
        let y = DVector::from_vec(vec![1.0, -0.4, 2.0, 0.3, 1.1]);
        let shape = ErrorShape { rate: 1.7, nugget: 0.3 };
        let whitener = Whitener::new(&times, shape).unwrap();
        let mut row: Vec<f64> = y.iter().copied().collect();
        whitener.apply(&mut row, 1);
        let matrix = dense(&times, shape);
        let factor = matrix.clone().cholesky().unwrap();
        let expected = y.dot(&factor.solve(&y));
        let got: f64 = row.iter().map(|x| x * x).sum();
        assert!((got - expected).abs() < 1e-12 * expected);
        assert!((whitener.log_det - matrix.determinant().ln()).abs() < 1e-12);
    }

    #[test]
    fn slopes_equal_differences() {
        let times = [0.0, 0.2, 0.35, 0.9];
        let y = [1.0, -0.4, 2.0, 0.3];
        let shape = ErrorShape { rate: 1.7, nugget: 0.3 };
        let logit = libm::log(0.3 / 0.7);
        for which in 0..2 {
            let at = |h: f64| {
                let moved = if which == 0 {
                    ErrorShape { rate: 1.7 * libm::exp(h), ..shape }
                } else {
                    ErrorShape { nugget: 1.0 / (1.0 + libm::exp(-logit - h)), ..shape }
                };
                let whitener = Whitener::new(&times, moved).unwrap();
                let mut row = y.to_vec();
                whitener.apply(&mut row, 1);
                (row, whitener.log_det)
            };
            let (up, down) = (at(1e-6), at(-1e-6));
            let whitener = Whitener::new(&times, shape).unwrap();
            let (mut row, mut slope) = (y.to_vec(), vec![0.0; 4]);
            whitener.apply_with_slope(&mut row, &mut slope, 1, which);
            for j in 0..4 {
                let expected = (up.0[j] - down.0[j]) / 2e-6;
                assert!((slope[j] - expected).abs() < 1e-8, "{which} {j}");
            }
            let expected = (up.1 - down.1) / 2e-6;
            assert!((whitener.d_log_det[which] - expected).abs() < 1e-8);
        }
    }

    #[test]
    fn ties_without_measurement_error_are_refused() {
        assert!(Whitener::new(&[0.0, 0.0], ErrorShape { rate: 1.0, nugget: 0.0 }).is_none());
    }
}
