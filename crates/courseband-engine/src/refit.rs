//! A quick refit of a simulated table, from a start that is known to be near.

use crate::criterion::Criterion;
use crate::fit::Fit;
use crate::optimise::{Bounds, hessian, newton, plain_inverse, quasi_newton, start};
use crate::reduce::Design;
use crate::spectral::symmetric_eigen;
use nalgebra::DMatrix;

/// What all refits of one fit share.
#[derive(Debug)]
pub(crate) struct Refitter {
    pattern: Fit,
    inverse: DMatrix<f64>,
}

impl Refitter {
    pub(crate) fn new(fit: &Fit) -> Self {
        let n = fit.theta.len();
        let rows: usize = fit.design.rows.iter().sum();
        let mut inverse = plain_inverse(n, rows as f64 / 4.0);
        let eigen = symmetric_eigen(&fit.hessian);
        let bounded = eigen.eigenvalues.map(|value: f64| 1.0 / value.max(0.5));
        let inner = &eigen.eigenvectors * DMatrix::from_diagonal(&bounded) * eigen.eigenvectors.transpose();
        for (i, &row) in fit.free.iter().enumerate() {
            for (j, &column) in fit.free.iter().enumerate() {
                inverse[(row, column)] = inner[(i, j)];
            }
        }
        Refitter { pattern: fit.clone(), inverse }
    }

    /// The refit, started at `theta`; `None` where it fails.
    pub(crate) fn refit(&self, design: Design, theta: &[f64]) -> Option<Fit> {
        let layout = &self.pattern.layout;
        let mut criterion = Criterion::new(&design, layout);
        let bounds = Bounds { lower: &layout.lower, upper: &layout.upper };
        let begin = start(&mut criterion, &bounds, theta.to_vec())?;
        // A gradient this small leaves less than a thousandth of a standard error to gain.
        let tolerance = 1e-3;
        let point = quasi_newton(&mut criterion, &bounds, begin, &self.inverse, tolerance, 60);
        let free = bounds.free(&point);
        if free.iter().any(|&k| point.gradient[k].abs() > 0.05) {
            return None;
        }
        let curvature = hessian(&mut criterion, &point.theta, &free)?;
        let solved = criterion.evaluate(&point.theta, false)?.solved;
        Some(Fit {
            design: design.clone(),
            solved,
            theta: point.theta,
            value: point.value,
            free,
            hessian: curvature,
            ..self.pattern.clone()
        })
    }

    /// The refit followed to the last digits, without what inference needs beyond the curves.
    pub(crate) fn refit_closely(&self, design: Design, theta: &[f64]) -> Option<Fit> {
        let layout = &self.pattern.layout;
        let mut criterion = Criterion::new(&design, layout);
        let bounds = Bounds { lower: &layout.lower, upper: &layout.upper };
        let begin = start(&mut criterion, &bounds, theta.to_vec())?;
        let near = quasi_newton(&mut criterion, &bounds, begin, &self.inverse, 1e-6, 60);
        let polished = newton(&mut criterion, &bounds, near, 6)?;
        if polished.decrement > 1e-6 {
            return None;
        }
        let (theta, value) = (polished.point.theta, polished.point.value);
        let solved = criterion.evaluate(&theta, false)?.solved;
        let (free, hessian) = (polished.free, polished.hessian);
        Some(Fit { design: design.clone(), solved, theta, value, free, hessian, ..self.pattern.clone() })
    }
}
