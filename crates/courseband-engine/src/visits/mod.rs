//! Each visit a category of its own: a mean per group and visit, any covariance between visits.
//!
//! ```text
//! y_i = mean of group g(i) at the visits that subject i has + e_i,    e_i ~ N(0, Sigma at those visits)
//! ```
//!
//! | symbol | what | shape | unit |
//! |---|---|---|---|
//! | Sigma | covariance between visits, one for all groups | V x V | response squared |
//! | A_g | information of the group's means | V x V | 1 / response squared |
//! | theta | entries of the covariance's factor | V (V + 1) / 2 | none |
//! | W | inverse Hessian of the criterion in theta | same, squared | none |
//!
//! Sigma is estimated by restricted maximum likelihood from all values, incomplete subjects included: right where values
//! are missing at random (Laird & Ware 1982, Biometrics 38:963). Degrees of freedom are Satterthwaite's, by the gradient
//! of a contrast's variance in theta and W; those of several contrasts together are Fai & Cornelius' (1996, J. Statist.
//! Comput. Simul. 54:363). Standard errors take Sigma as known. Subjects of the same group seen at the same visits are
//! reduced together, so the cost is that of the patterns of gaps, not of the subjects.
//!
//! Not handled: covariates, a covariance per group, correlation as a function of time.

mod criterion;
mod inference;
mod patterns;
#[cfg(test)]
mod tests;

use crate::Verdict;
use crate::optimise::{Bounds, Objective, Point, newton, plain_inverse, quasi_newton, start};
use crate::usual::Panel;
use criterion::{Covariance, Criterion, evaluate};
use nalgebra::{DMatrix, DVector};
use patterns::Reduced;

pub use inference::{VisitDifference, VisitEstimate, VisitTest, VisitTestUndefined};

/// Most visits: their covariance has 78 parameters then.
pub const MOST_VISITS: usize = 12;

/// Why there is no fit. Visits are indices into the panel's times.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum VisitsError {
    /// Fewer than two visits.
    OneVisit,
    /// More visits than [`MOST_VISITS`].
    TooManyVisits {
        /// Visits in the panel.
        visits: usize,
    },
    /// A value is not finite.
    NotFinite,
    /// Subjects less groups are fewer than visits: the covariance is not determined.
    TooFewSubjects {
        /// Subjects less groups.
        have: usize,
        /// Visits.
        need: usize,
    },
    /// A visit has too few values for a variance.
    TooFewAtVisit {
        /// The visit.
        visit: usize,
        /// Its values.
        have: usize,
        /// Values needed.
        need: usize,
    },
    /// No subject has both of two visits, so their correlation is not determined.
    NeverTogether {
        /// The earlier visit.
        first: usize,
        /// The later one.
        second: usize,
    },
    /// All values of a visit are alike within groups.
    NoVariation {
        /// The visit.
        visit: usize,
    },
    /// The restricted likelihood rises without limit as the covariance becomes singular.
    Singular,
    /// The data do not determine the covariance.
    NotDetermined,
    /// No optimum was reached.
    NotConverged {
        /// Predicted further rise of the log restricted likelihood.
        decrement: f64,
    },
}

/// A fitted model.
#[derive(Clone, Debug)]
pub struct VisitFit {
    data: Reduced,
    /// Factor of Sigma, internal unit.
    covariance: CovarianceAt,
    means: Vec<DVector<f64>>,
    mean_covariance: Vec<DMatrix<f64>>,
    inverses: Vec<DMatrix<f64>>,
    /// Covariance of the entries of theta that are not at a bound.
    parameters: DMatrix<f64>,
    /// Those entries.
    free: Vec<usize>,
    value: f64,
    verdict: Verdict,
}

/// The covariance at the optimum.
#[derive(Clone, Debug)]
struct CovarianceAt {
    map: Covariance,
    theta: Vec<f64>,
}

/// Steps of expectation-maximisation before the search.
const FIRST_STEPS: usize = 25;
/// A diagonal entry of T this far below the start, on the log scale, counts as zero.
const LOWEST: f64 = -12.0;

/// Fits the model by restricted maximum likelihood. Subjects without a value take no part.
///
/// # Errors
/// Says why the covariance cannot be estimated.
pub fn fit_visits(panel: &Panel) -> Result<VisitFit, VisitsError> {
    let data = check(panel)?;
    let begin = criterion::start(&data, FIRST_STEPS).ok_or(VisitsError::Singular)?;
    let covariance = Covariance { base: begin.cholesky().ok_or(VisitsError::Singular)?.unpack() };
    let count = covariance.count();
    let (mut lower, mut upper) = (vec![-1e6; count], vec![1e6; count]);
    covariance.diagonal().for_each(|k| lower[k] = LOWEST);
    let mut criterion = Criterion { data: &data, covariance: &covariance };
    let inverse = plain_inverse(count, data.subjects as f64);
    let tolerance = 1e-6 * libm::sqrt(data.rows as f64);
    let mut theta = vec![0.0; count];
    let point = loop {
        let bounds = Bounds { lower: &lower, upper: &upper };
        let begin = start(&mut criterion, &bounds, theta).ok_or(VisitsError::Singular)?;
        let point = quasi_newton(&mut criterion, &bounds, begin, &inverse, tolerance, 300);
        refuse_unbounded(&covariance, &point)?;
        match hold(&mut criterion, &covariance, &point, &mut lower, &mut upper) {
            Some(held) => theta = held,
            None => break point,
        }
    };
    let bounds = Bounds { lower: &lower, upper: &upper };
    let polished = newton(&mut criterion, &bounds, point, 20).ok_or(VisitsError::NotDetermined)?;
    refuse_unbounded(&covariance, &polished.point)?;
    if !polished.definite {
        return Err(VisitsError::NotDetermined);
    }
    if polished.decrement > 1e-8 {
        return Err(VisitsError::NotConverged { decrement: polished.decrement });
    }
    let parameters = polished.hessian.cholesky().ok_or(VisitsError::NotDetermined)?.inverse();
    let theta = polished.point.theta;
    let factor = covariance.factor(&theta);
    let state = evaluate(&data, &(&factor * factor.transpose())).ok_or(VisitsError::Singular)?;
    let at_bound = polished.free.len() < count;
    Ok(VisitFit {
        covariance: CovarianceAt { map: covariance, theta },
        means: state.means,
        mean_covariance: state.mean_covariance,
        inverses: state.inverses,
        parameters,
        free: polished.free,
        value: state.value,
        verdict: if at_bound { Verdict::Boundary } else { Verdict::Converged },
        data,
    })
}

fn check(panel: &Panel) -> Result<Reduced, VisitsError> {
    let visits = panel.times.len();
    if visits < 2 {
        return Err(VisitsError::OneVisit);
    }
    if visits > MOST_VISITS {
        return Err(VisitsError::TooManyVisits { visits });
    }
    let data = Reduced::new(panel)?;
    let groups = data.counts.iter().filter(|row| row.iter().any(|&n| n > 0)).count();
    if data.subjects < groups + visits {
        return Err(VisitsError::TooFewSubjects { have: data.subjects - groups, need: visits });
    }
    match data.never_together() {
        Some((first, second)) => Err(VisitsError::NeverTogether { first, second }),
        None => Ok(data),
    }
}

/// A diagonal entry near zero is a valid optimum only where the criterion has become flat in its logarithm.
fn refuse_unbounded(covariance: &Covariance, point: &Point) -> Result<(), VisitsError> {
    let falls = |k: usize| point.theta[k] < LOWEST + 4.0 && point.gradient[k] > 1e-2;
    if covariance.diagonal().any(falls) { Err(VisitsError::Singular) } else { Ok(()) }
}

/// Holds the column of a diagonal entry that has run to zero, one at a time, where that does not raise the criterion.
/// The bounds are narrowed to it; the point to go on from is returned.
fn hold(
    criterion: &mut Criterion,
    covariance: &Covariance,
    point: &Point,
    lower: &mut [f64],
    upper: &mut [f64],
) -> Option<Vec<f64>> {
    let vanished = |&(column, k): &(usize, usize)| {
        point.theta[k] < LOWEST + 8.0
            && lower[k] < upper[k]
            && covariance.without(&point.theta, column, LOWEST).is_some()
    };
    let (column, _) = covariance.diagonal().enumerate().find(vanished)?;
    let theta = covariance.without(&point.theta, column, LOWEST)?;
    let (value, _) = criterion.at(&theta)?;
    if value > point.value + 1e-4 {
        return None;
    }
    for k in covariance.column(column) {
        (lower[k], upper[k]) = (theta[k], theta[k]);
    }
    Some(theta)
}

impl VisitFit {
    /// How the fit ended.
    #[must_use]
    pub fn verdict(&self) -> Verdict {
        self.verdict
    }

    /// Subjects with a value.
    #[must_use]
    pub fn subjects(&self) -> usize {
        self.data.subjects
    }

    /// Values.
    #[must_use]
    pub fn rows(&self) -> usize {
        self.data.rows
    }

    /// Values of a group at a visit.
    #[must_use]
    pub fn count(&self, group: usize, visit: usize) -> usize {
        self.data.counts[group][visit]
    }

    /// Log restricted likelihood, all constants included, for one mean per filled cell.
    #[must_use]
    pub fn log_reml(&self) -> f64 {
        -self.value - (self.data.rows - self.data.means()) as f64 * libm::log(self.data.scale)
    }

    /// Covariance between visits, V x V, in the response's unit squared.
    #[must_use]
    pub fn covariance(&self) -> Vec<Vec<f64>> {
        let factor = self.covariance.map.factor(&self.covariance.theta) * self.data.scale;
        let sigma = &factor * factor.transpose();
        let v = self.data.visits;
        (0..v).map(|i| (0..v).map(|j| sigma[(i, j)]).collect()).collect()
    }
}
