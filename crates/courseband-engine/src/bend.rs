//! The bend of an explanatory number: penalised columns beside its straight line.

use crate::model::Dimension;
use crate::spline::{NaturalSpline, distinct_sorted, place_knots};

/// Most knots of the bend of an explanatory number.
const KNOTS: usize = 10;

/// Columns of a natural cubic spline over an explanatory number, for a run of [`crate::Shared`] columns: zero at a
/// reference value, its straight line left out.
#[derive(Debug, Clone)]
pub struct Bend {
    low: f64,
    span: f64,
    spline: NaturalSpline,
    at_reference: Vec<f64>,
}

impl Bend {
    /// `None` with fewer than four distinct values, where a line is all there can be.
    #[must_use]
    pub fn new(values: &[f64], reference: f64) -> Option<Bend> {
        let distinct = distinct_sorted(values.iter().copied().filter(|x| x.is_finite()));
        let (low, high) = (*distinct.first()?, *distinct.last()?);
        if distinct.len() < 4 {
            return None;
        }
        let span = high - low;
        let inner: Vec<f64> = distinct.iter().map(|x| (x - low) / span).collect();
        let spline = NaturalSpline::new(place_knots(&inner, Dimension::Knots(KNOTS.min(inner.len()))));
        let mut bend = Bend { low, span, at_reference: vec![0.0; spline.len()], spline };
        bend.at_reference = bend.columns(reference);
        Some(bend)
    }

    /// Number of columns.
    #[must_use]
    pub fn len(&self) -> usize {
        self.spline.len()
    }

    /// True without columns.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// The columns at a value.
    #[must_use]
    pub fn columns(&self, value: f64) -> Vec<f64> {
        let mut out = vec![0.0; self.spline.len()];
        self.spline.fill((value - self.low) / self.span, false, &mut out);
        out.iter().zip(&self.at_reference).map(|(z, reference)| z - reference).collect()
    }
}
