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
//! Clusters are taken out after their subjects: see [`crate::clusters`].
//! For the full likelihood `ln|A|` is taken over the penalised columns alone and N stands for N - p.
//! The gradient runs backwards through the same steps: the derivative for each
//! small matrix is formed once and contracted with what that matrix depends on.

use crate::clusters::{ClusterSlopes, ClusterState, Share, Through};
use crate::laplace::{Laplace, Mode};
use crate::model::Family;
use crate::params::Layout;
use crate::reduce::{Design, Pattern, PatternProducts, Products, reduce};
use crate::whiten::ErrorShape;
use nalgebra::{Cholesky, DMatrix, Dyn};

const LN_TWO_PI: f64 = 1.837_877_066_409_345_3;

/// A block's solved equations.
#[derive(Debug, Clone)]
pub(crate) struct Solved {
    /// Factor of `A`, B x B.
    pub(crate) factor: Cholesky<f64, Dyn>,
    /// Coefficients, B x 1.
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
    /// For responses that are not normal, with the last mode.
    laplace: Option<(Laplace<'a>, Option<Mode>)>,
}

/// What the backward pass needs of a pattern.
pub(crate) struct PatternState {
    inverse: DMatrix<f64>,
    /// M, q x q.
    pub(crate) middle: DMatrix<f64>,
    log_det: f64,
}

impl<'a> Criterion<'a> {
    pub(crate) fn new(design: &'a Design, layout: &'a Layout) -> Self {
        let laplace = (layout.family != Family::Normal).then(|| (Laplace::new(design, layout), None));
        Criterion { design, layout, kept: None, evaluations: 0, laplace }
    }

    /// `None` where a matrix is not positive definite or a number is not finite.
    pub(crate) fn evaluate(&mut self, theta: &[f64], with_gradient: bool) -> Option<Evaluation> {
        self.evaluations += 1;
        if self.laplace.is_some() {
            return self.evaluate_laplace(theta, with_gradient);
        }
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

    /// By Laplace's approximation; the gradient by central differences.
    fn evaluate_laplace(&mut self, theta: &[f64], with_gradient: bool) -> Option<Evaluation> {
        let (laplace, kept) = self.laplace.as_mut()?;
        let here = laplace.at(theta, kept.as_ref())?;
        let mut gradient = Vec::new();
        if with_gradient {
            let h = 1e-3;
            for k in 0..theta.len() {
                if self.layout.lower[k] == self.layout.upper[k] {
                    gradient.push(0.0);
                    continue;
                }
                let mut moved = theta.to_vec();
                moved[k] = theta[k] + h;
                let up = laplace.at(&moved, Some(&here.mode))?.value;
                moved[k] = theta[k] - h;
                gradient.push((up - laplace.at(&moved, Some(&here.mode))?.value) / (2.0 * h));
            }
        }
        *kept = Some(here.mode);
        Some(Evaluation { value: here.value, gradient, solved: here.solved })
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

/// Sums of one group, or of one block, on the way to its equations.
struct Sums {
    a: DMatrix<f64>,
    b: DMatrix<f64>,
    c: f64,
    log_v: f64,
}

/// The way forward, kept for the way back.
struct Forward {
    factors: Vec<DMatrix<f64>>,
    cluster_factor: DMatrix<f64>,
    states: Vec<PatternState>,
    clusters: Vec<ClusterState>,
    /// Per group, clusters not yet taken out.
    sums: Vec<Sums>,
}

impl Pass<'_> {
    fn run(&self, derivatives: Option<&Vec<Products>>) -> Option<Evaluation> {
        let forward = self.forward()?;
        let mut value = 0.0;
        let mut solved = Vec::with_capacity(self.design.placement.blocks());
        for (block, sums) in self.blocks(&forward).into_iter().enumerate() {
            let (part, solution) = self.solve(block, sums)?;
            value += part;
            solved.push(solution);
        }
        let mut gradient = Vec::new();
        if let Some(derivatives) = derivatives {
            gradient = vec![0.0; self.layout.len()];
            self.backward(&forward, &solved, derivatives, &mut gradient);
            gradient.iter_mut().for_each(|g| *g *= 0.5);
        }
        let finite = value.is_finite() && gradient.iter().all(|g| g.is_finite());
        finite.then_some(Evaluation { value: 0.5 * value, gradient, solved })
    }

    fn forward(&self) -> Option<Forward> {
        let groups = self.design.bases.len();
        let factors: Vec<DMatrix<f64>> = (0..groups).map(|g| self.layout.subject_factor(self.theta, g)).collect();
        let mut states = Vec::with_capacity(self.design.patterns.len());
        let mut sums: Vec<Sums> = (0..groups).map(|g| self.start(g)).collect();
        for (pattern, products) in self.design.patterns.iter().zip(&self.products.patterns) {
            let g = pattern.group;
            let state = self.eliminate(g, products, &factors[g])?;
            let m = pattern.subjects.len() as f64;
            sums[g].log_v += m * state.log_det;
            if self.design.effects.width() > 0 {
                let s = self.layout.variance(self.theta, g);
                let half = &products.fz * &state.middle;
                sums[g].a.gemm(-m / s, &half, &products.fz.transpose(), 1.0);
                sums[g].b.gemm(-1.0 / s, &half, &products.zy, 1.0);
                sums[g].c -= state.middle.dot(&products.zyyz) / s;
            }
            states.push(state);
        }
        let cluster_factor = self.layout.cluster_factor(self.theta);
        let clusters = (self.design.clusters.iter())
            .map(|members| {
                let shares: Vec<Share> = members.iter().map(|&p| self.share(p, &states)).collect();
                ClusterState::new(self.design, &shares, &cluster_factor)
            })
            .collect::<Option<Vec<_>>>()?;
        Some(Forward { factors, cluster_factor, states, clusters, sums })
    }

    fn share<'b>(&'b self, pattern: usize, states: &'b [PatternState]) -> Share<'b> {
        let Pattern { group, subjects, .. } = &self.design.patterns[pattern];
        Share {
            group: *group,
            m: subjects.len() as f64,
            s: self.layout.variance(self.theta, *group),
            products: &self.products.patterns[pattern],
            state: &states[pattern],
        }
    }

    /// Sums per block: those of its groups, clusters taken out.
    fn blocks(&self, forward: &Forward) -> Vec<Sums> {
        let placement = &self.design.placement;
        let mut blocks: Vec<Sums> = (0..placement.blocks())
            .map(|block| {
                let size = placement.size(block);
                Sums { a: DMatrix::zeros(size, size), b: DMatrix::zeros(size, 1), c: 0.0, log_v: 0.0 }
            })
            .collect();
        for (g, own) in forward.sums.iter().enumerate() {
            let block = &mut blocks[placement.block(g)];
            placement.scatter(g, &own.a, &mut block.a);
            placement.scatter_rows(g, &own.b, &mut block.b);
            block.c += own.c;
            block.log_v += own.log_v;
        }
        for cluster in &forward.clusters {
            let block = &mut blocks[cluster.block];
            cluster.take(&mut block.a, &mut block.b, &mut block.c);
            block.log_v += cluster.log_det;
        }
        blocks
    }

    fn start(&self, g: usize) -> Sums {
        let s = self.layout.variance(self.theta, g);
        let group = &self.products.groups[g];
        let rows = self.design.rows[g] as f64;
        let log_v = rows * libm::log(s) + group.log_det;
        Sums { a: &group.ff / s, b: &group.fy / s, c: group.yy / s, log_v }
    }

    /// Takes a subject's effects out: `H`, its inverse, `M = L H^-1 L'` and `ln|H| - q ln s`.
    fn eliminate(&self, g: usize, products: &PatternProducts, factor: &DMatrix<f64>) -> Option<PatternState> {
        let q = self.design.effects.width();
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

    /// A block's share of minus twice the log restricted likelihood.
    fn solve(&self, block: usize, sums: Sums) -> Option<(f64, Solved)> {
        let Sums { mut a, b, c, log_v } = sums;
        let mut log_prior = 0.0;
        let mut free = self.design.shared.free;
        let mut rows = 0;
        for g in (0..self.design.bases.len()).filter(|&g| self.design.placement.block(g) == block) {
            free += self.design.bases[g].unpenalised();
            rows += self.design.rows[g];
        }
        for (entry, columns) in self.layout.priors(self.design, block) {
            let theta = self.theta[entry];
            let precision = libm::exp(-theta);
            log_prior += columns.len() as f64 * theta;
            columns.for_each(|j| a[(j, j)] += precision);
        }
        let (log_a, counted) = if self.layout.full {
            (log_det(&Cholesky::new(submatrix(&a, &self.design.penalised(block)))?), rows as f64)
        } else {
            (f64::NAN, rows as f64 - free as f64)
        };
        let factor = Cholesky::new(a)?;
        let log_a = if self.layout.full { log_a } else { log_det(&factor) };
        let coefficients = factor.solve(&b);
        let quadratic = c - coefficients.dot(&b);
        let constant = counted * LN_TWO_PI;
        Some((constant + log_v + log_prior + log_a + quadratic, Solved { factor, coefficients }))
    }

    fn backward(&self, forward: &Forward, solved: &[Solved], derivatives: &[Products], gradient: &mut [f64]) {
        let placement = &self.design.placement;
        // Derivative for F'V^-1 F of each block.
        let whole: Vec<DMatrix<f64>> = (solved.iter().enumerate())
            .map(|(block, s)| self.integrated(block, s) + &s.coefficients * s.coefficients.transpose())
            .collect();
        for (block, adjoint) in whole.iter().enumerate() {
            for (entry, columns) in self.layout.priors(self.design, block) {
                let count = columns.len() as f64;
                let trace: f64 = columns.map(|j| adjoint[(j, j)]).sum();
                gradient[entry] += count - trace * libm::exp(-self.theta[entry]);
            }
        }
        let parts: Vec<GroupPart> = (0..self.design.bases.len())
            .map(|g| {
                let block = placement.block(g);
                GroupPart {
                    adjoint: placement.gather(g, &whole[block]),
                    coefficients: placement.gather_rows(g, &solved[block].coefficients),
                }
            })
            .collect();
        for (g, part) in parts.iter().enumerate() {
            self.group_backward(g, part, &forward.sums[g], derivatives, gradient);
        }
        if self.design.effects.width() == 0 {
            return;
        }
        let through = self.cluster_backward(forward, solved, &whole, gradient);
        self.patterns_backward(forward, &parts, &through, derivatives, gradient);
    }

    /// Derivative of `ln|A|` over the unknowns that are integrated out: all, or the penalised ones.
    fn integrated(&self, block: usize, solved: &Solved) -> DMatrix<f64> {
        if !self.layout.full {
            return solved.factor.inverse();
        }
        let l = solved.factor.l();
        let places = self.design.penalised(block);
        let mut padded = DMatrix::zeros(l.nrows(), l.nrows());
        if let Some(inverse) = Cholesky::new(submatrix(&(&l * l.transpose()), &places)).map(|c| c.inverse()) {
            for (i, &row) in places.iter().enumerate() {
                for (j, &column) in places.iter().enumerate() {
                    padded[(row, column)] = inverse[(i, j)];
                }
            }
        }
        padded
    }

    /// Derivatives through the clusters, for each pattern; empty without clusters.
    fn cluster_backward(
        &self,
        forward: &Forward,
        solved: &[Solved],
        whole: &[DMatrix<f64>],
        gradient: &mut [f64],
    ) -> Vec<Option<Through>> {
        let mut through: Vec<Option<Through>> = Vec::new();
        if forward.clusters.is_empty() {
            return through;
        }
        through.resize_with(self.design.patterns.len(), || None);
        let mut slope = DMatrix::zeros(forward.cluster_factor.nrows(), forward.cluster_factor.ncols());
        for (members, cluster) in self.design.clusters.iter().zip(&forward.clusters) {
            let slopes: ClusterSlopes =
                cluster.slopes(&solved[cluster.block], &whole[cluster.block], &forward.cluster_factor);
            slope += &slopes.factor;
            for &p in members {
                let share = self.share(p, &forward.states);
                let back = share.through(self.design, &slopes);
                gradient[self.layout.error[share.group]] += back.scale;
                through[p] = Some(back);
            }
        }
        self.layout.add_cluster_slope(self.theta, &slope, gradient);
        through
    }

    fn patterns_backward(
        &self,
        forward: &Forward,
        parts: &[GroupPart],
        through: &[Option<Through>],
        derivatives: &[Products],
        gradient: &mut [f64],
    ) {
        let (q, groups) = (self.design.effects.width(), self.design.bases.len());
        let mut slopes = vec![DMatrix::zeros(q, q); groups];
        for (index, pattern) in self.design.patterns.iter().enumerate() {
            let g = pattern.group;
            let back = PatternBackward {
                s: self.layout.variance(self.theta, g),
                m: pattern.subjects.len() as f64,
                factor: &forward.factors[g],
                state: &forward.states[index],
                products: &self.products.patterns[index],
                part: &parts[g],
                through: through.get(index).and_then(Option::as_ref),
            };
            let (h, slope) = back.factor_slope();
            slopes[g] += slope;
            gradient[self.layout.error[g]] += back.s * (h.trace() - back.m * q as f64 / back.s);
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
    fn group_backward(&self, g: usize, part: &GroupPart, sums: &Sums, derivatives: &[Products], gradient: &mut [f64]) {
        let s = self.layout.variance(self.theta, g);
        let (adjoint, b) = (&part.adjoint, &part.coefficients);
        let quadratic = adjoint.dot(&sums.a) - 2.0 * b.dot(&sums.b) + sums.c;
        gradient[self.layout.error[g]] += self.design.rows[g] as f64 - quadratic;
        for (which, derivative) in derivatives.iter().enumerate() {
            let entry = if which == 0 { self.layout.rate } else { self.layout.nugget };
            if let Some(entry) = entry {
                let d = &derivative.groups[g];
                gradient[entry] += d.log_det + (adjoint.dot(&d.ff) - 2.0 * b.dot(&d.fy) + d.yy) / s;
            }
        }
    }
}

fn submatrix(whole: &DMatrix<f64>, places: &[usize]) -> DMatrix<f64> {
    DMatrix::from_fn(places.len(), places.len(), |i, j| whole[(places[i], places[j])])
}

fn log_det(factor: &Cholesky<f64, Dyn>) -> f64 {
    factor.l_dirty().diagonal().iter().map(|&d| 2.0 * libm::log(d)).sum()
}

/// A group's part of its block: the derivative for `F'V^-1 F`, and the coefficients.
struct GroupPart {
    adjoint: DMatrix<f64>,
    coefficients: DMatrix<f64>,
}

/// The backward pass through one pattern's elimination.
struct PatternBackward<'a> {
    s: f64,
    m: f64,
    factor: &'a DMatrix<f64>,
    state: &'a PatternState,
    products: &'a PatternProducts,
    part: &'a GroupPart,
    through: Option<&'a Through>,
}

impl PatternBackward<'_> {
    /// Derivative for M: `-(m Z'F G F'Z - 2 sym(Z'F b y'Z) + Z'y y'Z) / s`, and through the cluster.
    fn middle_slope(&self) -> DMatrix<f64> {
        let p = self.products;
        let zf_b = p.fz.tr_mul(&self.part.coefficients);
        let cross = zf_b * p.zy.transpose();
        let spread = p.fz.tr_mul(&(&self.part.adjoint * &p.fz)) * self.m;
        let own = (spread - &cross - cross.transpose() + &p.zyyz) / -self.s;
        self.through.map_or_else(|| own.clone(), |through| &own + &through.middle)
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
        let (middle, coefficients) = (&self.state.middle, &self.part.coefficients);
        let zz = self.factor * h * self.factor.transpose();
        let fz = (&p.fz * middle) * -self.m;
        let through_fz = (&self.part.adjoint * fz + coefficients * (middle * &p.zy).transpose()) * (2.0 / self.s);
        let through_zy = middle * p.fz.tr_mul(coefficients) * (2.0 / self.s);
        let own = zz.dot(&d.zz) + through_fz.dot(&d.fz) + through_zy.dot(&d.zy) - middle.dot(&d.zyyz) / self.s;
        own + self.through.map_or(0.0, |t| t.zz.dot(&d.zz) + t.fz.dot(&d.fz) + t.zy.dot(&d.zy))
    }
}
