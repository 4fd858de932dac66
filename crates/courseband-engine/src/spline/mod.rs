//! Bases for a course over time.

mod knots;
mod natural;

pub(crate) use knots::{distinct_sorted, place_knots};
pub(crate) use natural::NaturalSpline;
