//! The restricted likelihood and its gradient.
//!
//! Model, in internal units, for a subject of group g:
//! `y = F b + Z u + e`, `e ~ N(0, s C)`, `u ~ N(0, D)`, and for the penalised
//! columns of F a prior `N(0, v I)`; the other columns are free. With
//! `V = s C + Z D Z'` minus twice the log restricted likelihood is
//! (Harville 1974, Biometrika 61:383; Wood 2011, JRSS-B 73:3, from memory)
//!
//! `(N-p) ln 2pi + sum ln|V| + r ln v + ln|A| + y'V^-1 y - b'A b`,
//! `A = F'V^-1 F + P`, `b = A^-1 F'V^-1 y`, P = 1/v on penalised columns, r of them.
//!
//! With whitened columns and `D = L L'`, `H = s I + L' Z'Z L`, `M = L H^-1 L'`:
//! `F'V^-1 F = (F'F - F'Z M Z'F) / s`, `ln|V| = (n-q) ln s + ln|C| + ln|H|`.
//! Nothing is divided by D, so variances may be zero.
//!
//! The gradient runs backwards through the same steps: the derivative for each
//! small matrix is formed once and contracted with what that matrix depends on.

use crate::params::Layout;
use crate::reduce::{Design, PatternProducts, Products, reduce};
use crate::whiten::ErrorShape;
use nalgebra::{Cholesky, DMatrix, Dyn};

const LN_TWO_PI: f64 = 1.837_877_066_409_345_3;

/// A group's solved equations.
#[derive(Debug, Clone)]
pub(crate) struct Solved {
    /// Factor of `A`, K x K.
    pub(crate) factor: Cholesky<f64, Dyn>,
    /// Coefficients, K x 1.
    pub(crate) coefficients: DMatrix<f64>,
}

/// The criterion at one parameter vector.
#[derive(Debug, Clone)]
pub(crate) struct Evaluation {
    /// Minus the log restricted likelihood in internal units.
    pub(crate) value: f64,
    /// Its gradient; empty where not asked for.
    pub(crate) gradient: Vec<f64>,
    pub(crate) solved: Vec<Solved>,
}

/// The criterion for one design and model, with the last reduction kept.
pub(crate) struct Criterion<'a> {
    pub(crate) design: &'a Design,
    pub(crate) layout: &'a Layout,
    kept: Option<(Option<ErrorShape>, bool, Products, Vec<Products>)>,
    /// Evaluations so far.
    pub(crate) evaluations: usize,
}

/// What the backward pass needs of a pattern.
struct PatternState {
    inverse: DMatrix<f64>,
    middle: DMatrix<f64>,
    log_det: f64,
}

impl<'a> Criterion<'a> {
    pub(crate) fn new(design: &'a Design, layout: &'a Layout) -> Self {
        Criterion { design, layout, kept: None, evaluations: 0 }
    }

    /// `None` where a matrix is not positive definite or a number is not finite.
    pub(crate) fn evaluate(&mut self, theta: &[f64], with_gradient: bool) -> Option<Evaluation> {
        self.evaluations += 1;
        let shape = self.layout.error_shape(theta);
        let slopes = self.slopes();
        let fresh = !matches!(&self.kept, Some((s, full, ..)) if *s == shape && (*full || !with_gradient));
        if fresh {
            let asked = if with_gradient { &slopes[..] } else { &[] };
            let (value, derivatives) = reduce(self.design, shape, asked)?;
            self.kept = Some((shape, with_gradient || slopes.is_empty(), value, derivatives));
        }
        let (_, _, products, derivatives) = self.kept.as_ref()?;
        let pass = Pass { design: self.design, layout: self.layout, theta, products };
        pass.run(if with_gradient { Some(derivatives) } else { None })
    }

    fn slopes(&self) -> Vec<usize> {
        let mut slopes = Vec::new();
        if self.layout.rate.is_some() {
            slopes.push(0);
        }
        if self.layout.nugget.is_some() {
            slopes.push(1);
        }
        slopes
    }
}

struct Pass<'a> {
    design: &'a Design,
    layout: &'a Layout,
    theta: &'a [f64],
    products: &'a Products,
}

/// Sums of one group on the way to its equations.
struct GroupSums {
    a: DMatrix<f64>,
    b: DMatrix<f64>,
    c: f64,
    log_v: f64,
}

impl Pass<'_> {
    fn run(&self, derivatives: Option<&Vec<Products>>) -> Option<Evaluation> {
        let groups = self.design.bases.len();
        let factors: Vec<DMatrix<f64>> = (0..groups).map(|g| self.layout.subject_factor(self.theta, g)).collect();
        let mut states = Vec::with_capacity(self.design.patterns.len());
        let mut sums: Vec<GroupSums> = (0..groups).map(|g| self.start(g)).collect();
        for (pattern, products) in self.design.patterns.iter().zip(&self.products.patterns) {
            let g = pattern.group;
            let state = self.eliminate(g, products, &factors[g])?;
            let m = pattern.subjects.len() as f64;
            sums[g].log_v += m * state.log_det;
            if self.design.effects > 0 {
                let s = self.layout.variance(self.theta, g);
                let half = &products.fz * &state.middle;
                sums[g].a.gemm(-m / s, &half, &products.fz.transpose(), 1.0);
                sums[g].b.gemm(-1.0 / s, &half, &products.zy, 1.0);
                sums[g].c -= state.middle.dot(&products.zyyz) / s;
            }
            states.push(state);
        }
        let mut value = 0.0;
        let mut solved = Vec::with_capacity(groups);
        let mut fits = Vec::with_capacity(groups);
        for (g, sum) in sums.into_iter().enumerate() {
            let (part, solution) = self.solve(g, &sum)?;
            value += part;
            solved.push(solution);
            fits.push(sum);
        }
        let mut gradient = Vec::new();
        if let Some(derivatives) = derivatives {
            gradient = vec![0.0; self.layout.len()];
            self.backward(&factors, &states, &fits, &solved, derivatives, &mut gradient);
            gradient.iter_mut().for_each(|g| *g *= 0.5);
        }
        let finite = value.is_finite() && gradient.iter().all(|g| g.is_finite());
        finite.then_some(Evaluation { value: 0.5 * value, gradient, solved })
    }

    fn start(&self, g: usize) -> GroupSums {
        let s = self.layout.variance(self.theta, g);
        let group = &self.products.groups[g];
        let rows = self.design.rows[g] as f64;
        let log_v = rows * libm::log(s) + group.log_det;
        GroupSums { a: &group.ff / s, b: &group.fy / s, c: group.yy / s, log_v }
    }

    /// Takes a subject's effects out: `H`, its inverse, `M = L H^-1 L'` and `ln|H| - q ln s`.
    fn eliminate(&self, g: usize, products: &PatternProducts, factor: &DMatrix<f64>) -> Option<PatternState> {
        let q = self.design.effects;
        if q == 0 {
            return Some(PatternState { inverse: DMatrix::zeros(0, 0), middle: DMatrix::zeros(0, 0), log_det: 0.0 });
        }
        let s = self.layout.variance(self.theta, g);
        let mut h = factor.tr_mul(&(&products.zz * factor));
        (0..q).for_each(|a| h[(a, a)] += s);
        let cholesky = Cholesky::new(h)?;
        let log_det: f64 = cholesky.l_dirty().diagonal().iter().map(|&d| 2.0 * libm::log(d)).sum();
        let inverse = cholesky.inverse();
        let middle = factor * &inverse * factor.transpose();
        Some(PatternState { inverse, middle, log_det: log_det - q as f64 * libm::log(s) })
    }

    /// A group's share of minus twice the log restricted likelihood.
    fn solve(&self, g: usize, sum: &GroupSums) -> Option<(f64, Solved)> {
        let basis = &self.design.bases[g];
        let (free, penalised) = (basis.unpenalised(), basis.penalised());
        let mut a = sum.a.clone();
        let mut log_prior = 0.0;
        if let Some(v) = self.layout.smoothing_variance(self.theta, g) {
            (free..free + penalised).for_each(|j| a[(j, j)] += 1.0 / v);
            log_prior = penalised as f64 * libm::log(v);
        }
        let factor = Cholesky::new(a)?;
        let log_a: f64 = factor.l_dirty().diagonal().iter().map(|&d| 2.0 * libm::log(d)).sum();
        let coefficients = factor.solve(&sum.b);
        let quadratic = sum.c - coefficients.dot(&sum.b);
        let constant = (self.design.rows[g] as f64 - free as f64) * LN_TWO_PI;
        Some((constant + sum.log_v + log_prior + log_a + quadratic, Solved { factor, coefficients }))
    }

    fn backward(
        &self,
        factors: &[DMatrix<f64>],
        states: &[PatternState],
        fits: &[GroupSums],
        solved: &[Solved],
        derivatives: &[Products],
        gradient: &mut [f64],
    ) {
        let groups = factors.len();
        // Derivative for F'V^-1 F of each group.
        let adjoints: Vec<DMatrix<f64>> =
            solved.iter().map(|s| s.factor.inverse() + &s.coefficients * s.coefficients.transpose()).collect();
        for g in 0..groups {
            self.group_backward(g, &adjoints[g], &fits[g], &solved[g], derivatives, gradient);
        }
        if self.design.effects == 0 {
            return;
        }
        let mut slopes = vec![DMatrix::zeros(self.design.effects, self.design.effects); groups];
        for (index, pattern) in self.design.patterns.iter().enumerate() {
            let g = pattern.group;
            let back = PatternBackward {
                s: self.layout.variance(self.theta, g),
                m: pattern.subjects.len() as f64,
                factor: &factors[g],
                state: &states[index],
                products: &self.products.patterns[index],
                adjoint: &adjoints[g],
                coefficients: &solved[g].coefficients,
            };
            let (h, slope) = back.factor_slope();
            slopes[g] += slope;
            gradient[self.layout.error[g]] += back.s * (h.trace() - back.m * self.design.effects as f64 / back.s);
            for (which, derivative) in derivatives.iter().enumerate() {
                let entry = if which == 0 { self.layout.rate } else { self.layout.nugget };
                if let Some(entry) = entry {
                    gradient[entry] += back.shape_slope(&h, &derivative.patterns[index]);
                }
            }
        }
        for (g, slope) in slopes.iter().enumerate() {
            self.layout.add_factor_slope(self.theta, g, slope, gradient);
        }
    }

    /// What reaches the parameters through a group's sums.
    fn group_backward(
        &self,
        g: usize,
        adjoint: &DMatrix<f64>,
        fit: &GroupSums,
        solved: &Solved,
        derivatives: &[Products],
        gradient: &mut [f64],
    ) {
        let s = self.layout.variance(self.theta, g);
        let b = &solved.coefficients;
        let quadratic = adjoint.dot(&fit.a) - 2.0 * b.dot(&fit.b) + fit.c;
        gradient[self.layout.error[g]] += self.design.rows[g] as f64 - quadratic;
        if let Some(entry) = self.layout.smoothing[g] {
            let v = libm::exp(self.theta[entry]);
            let free = self.design.bases[g].unpenalised();
            let trace: f64 = (free..adjoint.nrows()).map(|j| adjoint[(j, j)]).sum();
            gradient[entry] += self.design.bases[g].penalised() as f64 - trace / v;
        }
        for (which, derivative) in derivatives.iter().enumerate() {
            let entry = if which == 0 { self.layout.rate } else { self.layout.nugget };
            if let Some(entry) = entry {
                let d = &derivative.groups[g];
                gradient[entry] += d.log_det + (adjoint.dot(&d.ff) - 2.0 * b.dot(&d.fy) + d.yy) / s;
            }
        }
    }
}

/// The backward pass through one pattern's elimination.
struct PatternBackward<'a> {
    s: f64,
    m: f64,
    factor: &'a DMatrix<f64>,
    state: &'a PatternState,
    products: &'a PatternProducts,
    adjoint: &'a DMatrix<f64>,
    coefficients: &'a DMatrix<f64>,
}

impl PatternBackward<'_> {
    /// Derivative for M: `-(m Z'F G F'Z - 2 sym(Z'F b y'Z) + Z'y y'Z) / s`.
    fn middle_slope(&self) -> DMatrix<f64> {
        let p = self.products;
        let zf_b = p.fz.tr_mul(self.coefficients);
        let cross = zf_b * p.zy.transpose();
        let spread = p.fz.tr_mul(&(self.adjoint * &p.fz)) * self.m;
        (spread - &cross - cross.transpose() + &p.zyyz) / -self.s
    }

    /// Derivatives for `H` and for the factor `L`.
    fn factor_slope(&self) -> (DMatrix<f64>, DMatrix<f64>) {
        let middle = self.middle_slope();
        let l_inverse = self.factor * &self.state.inverse;
        let h = &self.state.inverse * self.m - l_inverse.tr_mul(&(&middle * &l_inverse));
        let slope = (&middle * &l_inverse + &self.products.zz * self.factor * &h) * 2.0;
        (h, slope)
    }

    /// Derivative for a parameter of the error shape through this pattern's own products.
    fn shape_slope(&self, h: &DMatrix<f64>, d: &PatternProducts) -> f64 {
        let p = self.products;
        let middle = &self.state.middle;
        let zz = self.factor * h * self.factor.transpose();
        let fz = (&p.fz * middle) * -self.m;
        let through_fz = (self.adjoint * fz + self.coefficients * (middle * &p.zy).transpose()) * (2.0 / self.s);
        let through_zy = middle * p.fz.tr_mul(self.coefficients) * (2.0 / self.s);
        zz.dot(&d.zz) + through_fz.dot(&d.fz) + through_zy.dot(&d.zy) - middle.dot(&d.zyyz) / self.s
    }
}
