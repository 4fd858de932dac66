//! Clusters: a second level of the same elimination, and the way back through it.
//!
//! With subjects taken out, a cluster's effects `c ~ N(0, L L')` act through the columns Z. Over
//! its patterns p, with `E = I - Z'Z M`, `M` the pattern's, and s its error variance,
//!
//! `T = sum m E Z'Z / s`, `U = sum m E Z'F / s`, `r = sum E Z'y / s`
//!
//! are `Z'V^-1 Z`, `Z'V^-1 F` and `Z'V^-1 y`. With `H = I + L'T L` and `M = L H^-1 L'` the
//! cluster takes `U'M U` from `F'V^-1 F`, `U'M r` from `F'V^-1 y`, `r'M r` from `y'V^-1 y`, and
//! adds `ln|H|`. Nothing is divided by L. The way back is derived step by step from these lines.

use crate::criterion::{PatternState, Solved};
use crate::reduce::{Design, PatternProducts};
use nalgebra::{Cholesky, DMatrix};

/// One cluster, taken out.
pub(crate) struct ClusterState {
    pub(crate) block: usize,
    /// `Z'V^-1 F` over the block's unknowns, w x B.
    u: DMatrix<f64>,
    t: DMatrix<f64>,
    r: DMatrix<f64>,
    inverse: DMatrix<f64>,
    middle: DMatrix<f64>,
    pub(crate) log_det: f64,
}

/// Derivatives for a cluster's sums.
pub(crate) struct ClusterSlopes {
    u: DMatrix<f64>,
    t: DMatrix<f64>,
    r: DMatrix<f64>,
    /// Derivative for the entries of L.
    pub(crate) factor: DMatrix<f64>,
}

/// Derivatives for a pattern's products and its M through its cluster.
pub(crate) struct Through {
    pub(crate) middle: DMatrix<f64>,
    pub(crate) zz: DMatrix<f64>,
    pub(crate) fz: DMatrix<f64>,
    pub(crate) zy: DMatrix<f64>,
    /// For `ln s`.
    pub(crate) scale: f64,
}

/// What one pattern adds to its cluster: `E / s` and its products.
pub(crate) struct Share<'a> {
    pub(crate) group: usize,
    pub(crate) m: f64,
    pub(crate) s: f64,
    pub(crate) products: &'a PatternProducts,
    pub(crate) state: &'a PatternState,
}

impl Share<'_> {
    fn leftover(&self) -> DMatrix<f64> {
        let w = self.products.zz.nrows();
        (DMatrix::identity(w, w) - &self.products.zz * &self.state.middle) / self.s
    }

    /// Derivatives for what this pattern put in, from those for its cluster's sums.
    pub(crate) fn through(&self, design: &Design, slopes: &ClusterSlopes) -> Through {
        let (p, e) = (self.products, self.leftover());
        let u = design.placement.gather_rows(self.group, &slopes.u.transpose()).transpose();
        let for_e = (&u * &p.fz + &slopes.t * &p.zz) * self.m + &slopes.r * p.zy.transpose();
        let own = (e.transpose() * &slopes.t) * self.m - &for_e * &self.state.middle / self.s;
        let middle = (&p.zz * &for_e) / -self.s;
        let put_u = (&e * p.fz.transpose()) * self.m;
        let put_t = (&e * &p.zz) * self.m;
        let put_r = &e * &p.zy;
        Through {
            zz: (&own + own.transpose()) * 0.5,
            middle: (&middle + middle.transpose()) * 0.5,
            fz: (u.transpose() * &e) * self.m,
            zy: e.transpose() * &slopes.r,
            scale: -(u.dot(&put_u) + slopes.t.dot(&put_t) + slopes.r.dot(&put_r)),
        }
    }
}

impl ClusterState {
    /// Takes a cluster out; `None` where a matrix is not positive definite.
    pub(crate) fn new(design: &Design, shares: &[Share], factor: &DMatrix<f64>) -> Option<Self> {
        let block = design.placement.block(shares.first()?.group);
        let w = factor.nrows();
        let mut u = DMatrix::zeros(w, design.placement.size(block));
        let (mut t, mut r) = (DMatrix::zeros(w, w), DMatrix::zeros(w, 1));
        for share in shares {
            let e = share.leftover();
            let part = (&e * share.products.fz.transpose()) * share.m;
            for j in 0..part.ncols() {
                let column = design.placement.position(share.group, j);
                (0..w).for_each(|a| u[(a, column)] += part[(a, j)]);
            }
            t += (&e * &share.products.zz) * share.m;
            r += &e * &share.products.zy;
        }
        let mut h = factor.tr_mul(&(&t * factor));
        (0..w).for_each(|a| h[(a, a)] += 1.0);
        let cholesky = Cholesky::new(h)?;
        let log_det = cholesky.l_dirty().diagonal().iter().map(|&d| 2.0 * libm::log(d)).sum();
        let inverse = cholesky.inverse();
        let middle = factor * &inverse * factor.transpose();
        Some(ClusterState { block, u, t, r, inverse, middle, log_det })
    }

    /// Takes the cluster's part from `F'V^-1 F`, `F'V^-1 y` and `y'V^-1 y` of its block.
    pub(crate) fn take(&self, a: &mut DMatrix<f64>, b: &mut DMatrix<f64>, c: &mut f64) {
        let half = self.u.transpose() * &self.middle;
        a.gemm(-1.0, &half, &self.u, 1.0);
        b.gemm(-1.0, &half, &self.r, 1.0);
        *c -= self.r.dot(&(&self.middle * &self.r));
    }

    /// Derivatives for the sums, from the block's solution and the derivative for `F'V^-1 F`.
    pub(crate) fn slopes(&self, solved: &Solved, adjoint: &DMatrix<f64>, factor: &DMatrix<f64>) -> ClusterSlopes {
        let ub = &self.u * &solved.coefficients;
        let ug = &self.u * adjoint;
        let cross = &ub * self.r.transpose();
        let middle = &cross + cross.transpose() - &ug * self.u.transpose() - &self.r * self.r.transpose();
        let l_inverse = factor * &self.inverse;
        let h = &self.inverse - l_inverse.tr_mul(&(&middle * &l_inverse));
        ClusterSlopes {
            u: &self.middle * (&self.r * solved.coefficients.transpose() - &ug) * 2.0,
            r: &self.middle * (&ub - &self.r) * 2.0,
            t: factor * &h * factor.transpose(),
            factor: (&middle * &l_inverse + &self.t * factor * &h) * 2.0,
        }
    }
}
