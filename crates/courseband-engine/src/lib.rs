//! Penalised-spline mixed models for groups followed over time: mathematics only.

mod band;
mod basis;
mod bend;
mod calibrate;
mod chains;
mod clusters;
mod criterion;
mod density;
mod fit;
mod impute;
mod influence;
mod laplace;
mod model;
mod optimise;
mod params;
mod placement;
mod posterior;
mod predict;
mod reduce;
mod refit;
mod replica;
mod residuals;
mod robust;
mod simulate;
pub mod special;
mod spectral;
mod spline;
mod subject_basis;
pub mod usual;
pub mod visits;
mod whiten;

pub use band::{CriticalValues, Run, runs_above_zero};
pub use bend::Bend;
pub use calibrate::{Calibration, calibrated_quantile};
pub use fit::{Fit, FitError, Remark, Verdict, fit};
pub use impute::{AfterLeaving, Filling, Imputer};
pub use influence::Influence;
pub use model::{
    Basis, ClusterEffects, Data, Dimension, Family, Likelihood, Model, Serial, Shape, Shared, Sharing, SubjectEffects,
    SubjectRows,
};
pub use params::Parameter;
pub use posterior::{Contrast, Estimate, Joint, Posterior, correlation_rows};
pub use predict::{Foreseen, ForeseenValues, OddSubject};
pub use replica::{Replicas, envelope};
pub use residuals::Residual;
pub use robust::RobustError;
pub use spline::Roughness;
