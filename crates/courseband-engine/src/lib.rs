//! Penalised-spline mixed models for groups followed over time: mathematics only.

mod basis;
mod criterion;
mod fit;
mod model;
mod optimise;
mod params;
mod reduce;
pub mod special;
mod spline;
mod whiten;

pub use fit::{Fit, FitError, Remark, Verdict, fit};
pub use model::{Data, Dimension, Model, Serial, Shape, Sharing, SubjectEffects, SubjectRows};
pub use params::Parameter;
