//! Bytes of a table to observations and the problems found in it.

mod observations;

pub use observations::{Covariate, CovariateValues, Observations, SubjectInfo};
