//! Bases for a course over time.

mod knots;
mod natural;
mod smooth;

pub(crate) use knots::{distinct_sorted, place_knots};
pub(crate) use natural::NaturalSpline;
pub use smooth::Roughness;
pub(crate) use smooth::Smooth;
