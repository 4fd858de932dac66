//! Natural cubic spline in a form whose penalty is the identity.
//!
//! With knots `x_1 < ... < x_K`, values `g` at the knots and second
//! derivatives `d` at the interior knots (zero at the ends), the spline obeys
//! `Q' g = R d` and its penalty is `int f''^2 = d' R d`
//! (Green & Silverman 1994, Nonparametric Regression, eqs 2.4 and 2.5).
//! Writing `R = L L'` and `d = L^-T u` makes the penalty `u'u`. The line is
//! taken out: `f(t) = b0 + b1 t + sum_j z_j(t) u_j`, where every `z_j` is zero
//! at both end knots. So `u ~ N(0, s^2 I)` is the prior of a smoothing spline
//! (Wahba 1978, JRSS-B 40:364).
//!
//! Not handled: knots outside the data, repeated knots.

/// The penalised part `z_1 .. z_(K-2)` of a natural cubic spline.
#[derive(Debug, Clone)]
pub(crate) struct NaturalSpline {
    knots: Vec<f64>,
    /// Values at the knots, K rows of K-2.
    values: Vec<f64>,
    /// Second derivatives at the knots, K rows of K-2.
    seconds: Vec<f64>,
}

impl NaturalSpline {
    /// `knots` strictly ascending, at least two.
    pub(crate) fn new(knots: Vec<f64>) -> Self {
        let count = knots.len();
        let inner = count.saturating_sub(2);
        let step: Vec<f64> = knots.windows(2).map(|pair| pair[1] - pair[0]).collect();
        let mut values = vec![0.0; count * inner];
        let mut seconds = vec![0.0; count * inner];
        if inner > 0 {
            let (diagonal, below) = factor_gram(&step);
            for j in 0..inner {
                let second = back_substitute_unit(&diagonal, &below, j);
                let value = values_from_seconds(&step, &second);
                for k in 0..inner {
                    values[(k + 1) * inner + j] = value[k];
                    seconds[(k + 1) * inner + j] = second[k];
                }
            }
        }
        NaturalSpline { knots, values, seconds }
    }

    /// Number of penalised coefficients, `K - 2`.
    pub(crate) fn len(&self) -> usize {
        self.knots.len().saturating_sub(2)
    }

    /// Writes `z_1(t) .. z_(K-2)(t)` (or the first derivatives) into `out`.
    /// Outside the knots the spline goes on as a straight line.
    pub(crate) fn fill(&self, t: f64, derivative: bool, out: &mut [f64]) {
        let inner = self.len();
        if inner == 0 {
            return;
        }
        let last = self.knots.len() - 1;
        let inside = t.clamp(self.knots[0], self.knots[last]);
        let right = self.knots.partition_point(|&knot| knot < inside).clamp(1, last);
        let weights = piece_weights(self.knots[right - 1], self.knots[right], inside, derivative || inside != t);
        self.combine(right, weights, out);
        if inside != t && !derivative {
            // `out` holds the end slope; add the end value, which is zero by construction.
            for value in out.iter_mut() {
                *value *= t - inside;
            }
        }
    }

    fn combine(&self, right: usize, weights: [f64; 4], out: &mut [f64]) {
        let inner = self.len();
        let (low, high) = ((right - 1) * inner, right * inner);
        for j in 0..inner {
            out[j] = weights[0] * self.values[low + j]
                + weights[1] * self.values[high + j]
                + weights[2] * self.seconds[low + j]
                + weights[3] * self.seconds[high + j];
        }
    }
}

/// Weights of left value, right value, left and right second derivative at `t`
/// (Green & Silverman 1994, eq 2.22), or of their derivatives.
fn piece_weights(left: f64, right: f64, t: f64, derivative: bool) -> [f64; 4] {
    let h = right - left;
    let (a, b) = ((right - t) / h, (t - left) / h);
    if derivative {
        [-1.0 / h, 1.0 / h, -h * (3.0 * a * a - 1.0) / 6.0, h * (3.0 * b * b - 1.0) / 6.0]
    } else {
        [a, b, h * h * (a * a * a - a) / 6.0, h * h * (b * b * b - b) / 6.0]
    }
}

/// Cholesky factor of the tridiagonal `R`: diagonal and subdiagonal of `L`.
fn factor_gram(step: &[f64]) -> (Vec<f64>, Vec<f64>) {
    let inner = step.len() - 1;
    let mut diagonal = vec![0.0; inner];
    let mut below = vec![0.0; inner];
    for k in 0..inner {
        let mut pivot = (step[k] + step[k + 1]) / 3.0;
        if k > 0 {
            below[k] = step[k] / 6.0 / diagonal[k - 1];
            pivot -= below[k] * below[k];
        }
        diagonal[k] = pivot.sqrt();
    }
    (diagonal, below)
}

/// Solves `L' d = e_j`.
fn back_substitute_unit(diagonal: &[f64], below: &[f64], j: usize) -> Vec<f64> {
    let mut solution = vec![0.0; diagonal.len()];
    solution[j] = 1.0 / diagonal[j];
    for k in (0..j).rev() {
        solution[k] = -below[k + 1] * solution[k + 1] / diagonal[k];
    }
    solution
}

/// Values at the interior knots of the spline with these second derivatives
/// and zero at both ends: solves the tridiagonal `Q' g = R d`.
fn values_from_seconds(step: &[f64], second: &[f64]) -> Vec<f64> {
    let inner = second.len();
    let at = |k: isize| if k < 0 || k as usize >= inner { 0.0 } else { second[k as usize] };
    let mut pivot = vec![0.0; inner];
    let mut value = vec![0.0; inner];
    for k in 0..inner {
        let i = k as isize;
        let right_side =
            step[k] / 6.0 * at(i - 1) + (step[k] + step[k + 1]) / 3.0 * at(i) + step[k + 1] / 6.0 * at(i + 1);
        pivot[k] = -1.0 / step[k] - 1.0 / step[k + 1];
        value[k] = right_side;
        if k > 0 {
            let factor = 1.0 / step[k] / pivot[k - 1];
            pivot[k] -= factor / step[k];
            value[k] -= factor * value[k - 1];
        }
    }
    for k in (0..inner).rev() {
        let next = if k + 1 < inner { value[k + 1] / step[k + 1] } else { 0.0 };
        value[k] = (value[k] - next) / pivot[k];
    }
    value
}

#[cfg(test)]
mod tests {
    use super::*;

    fn spline() -> NaturalSpline {
        NaturalSpline::new(vec![0.0, 0.7, 1.0, 2.5, 4.0])
    }

    fn curve(spline: &NaturalSpline, u: &[f64], t: f64, derivative: bool) -> f64 {
        let mut row = vec![0.0; spline.len()];
        spline.fill(t, derivative, &mut row);
        row.iter().zip(u).map(|(z, u)| z * u).sum()
    }

    #[test]
    fn penalty_is_the_identity() {
        // int f''^2 by the trapezoid rule of the piecewise linear second derivative, squared exactly
        // with Simpson's rule on each piece (a quadratic).
        let spline = spline();
        let u = [0.3, -1.2, 0.8];
        let second = |t: f64| {
            let h = 1e-4;
            (curve(&spline, &u, t + h, true) - curve(&spline, &u, t - h, true)) / (2.0 * h)
        };
        let mut integral = 0.0;
        for pair in spline.knots.windows(2) {
            let (a, b) = (pair[0] + 2e-4, pair[1] - 2e-4);
            let (m, h) = ((a + b) / 2.0, pair[1] - pair[0]);
            integral += h / 6.0 * (second(a).powi(2) + 4.0 * second(m).powi(2) + second(b).powi(2));
        }
        let expected: f64 = u.iter().map(|u| u * u).sum();
        assert!((integral - expected).abs() < 2e-3 * expected, "{integral} {expected}");
    }

    #[test]
    fn smooth_at_knots_and_straight_outside() {
        let spline = spline();
        let u = [0.3, -1.2, 0.8];
        for knot in [0.7, 1.0, 2.5] {
            for derivative in [false, true] {
                let left = curve(&spline, &u, knot - 1e-9, derivative);
                let right = curve(&spline, &u, knot + 1e-9, derivative);
                assert!((left - right).abs() < 1e-7);
            }
        }
        let slope = curve(&spline, &u, 4.0, true);
        assert!((curve(&spline, &u, 6.0, false) - 2.0 * slope).abs() < 1e-12);
        assert!((curve(&spline, &u, 6.0, true) - slope).abs() < 1e-12);
        assert!(curve(&spline, &u, 0.0, false).abs() < 1e-15);
    }
}
