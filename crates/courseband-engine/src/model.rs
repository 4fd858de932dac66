//! What can be asked of the engine: the data it takes and the model it fits.

use crate::spline::Roughness;

/// Rows of one subject, in ascending time. `times` and `responses` have one length.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct SubjectRows {
    /// Index of the subject's group, below [`Data::groups`].
    pub group: usize,
    /// Times, in the table's own unit.
    pub times: Vec<f64>,
    /// Responses on the modelled scale.
    pub responses: Vec<f64>,
    /// What the subject is housed or treated in (cage, litter, site), for a model with [`ClusterEffects`].
    /// A subject without one is a cluster of its own.
    pub cluster: Option<usize>,
    /// Values of the [`Shared`] columns, row by row; empty where there are none.
    pub shared: Vec<f64>,
    /// What some families need of every row: the number of trials of a [`Family::Binomial`] row; for [`Family::Censored`] -1
    /// where the true value lies below the response, 1 where above, 0 where it is the response. Empty: 1 trial, no limit.
    pub detail: Vec<f64>,
}

/// Columns of the mean that all groups share: covariates, effects of a crossed block.
/// First the free ones, then runs of penalised ones, each run with a variance of its own.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Shared {
    /// Number of columns without a penalty.
    pub free: usize,
    /// Lengths of the runs of penalised columns.
    pub penalised: Vec<usize>,
    /// Value of each column at which courses are stated.
    pub reference: Vec<f64>,
}

impl Shared {
    /// Number of columns.
    #[must_use]
    pub fn columns(&self) -> usize {
        self.free + self.penalised.iter().sum::<usize>()
    }
}

/// Everything that is fitted.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Data {
    /// Number of groups, at least one.
    pub groups: usize,
    /// Subjects; each has at least one row.
    pub subjects: Vec<SubjectRows>,
    /// Columns that all groups share.
    pub shared: Shared,
}

impl Data {
    /// Groups and shared columns alone.
    pub(crate) fn without_subjects(&self) -> Data {
        Data { groups: self.groups, subjects: Vec::new(), shared: self.shared.clone() }
    }

    /// Number of rows.
    #[must_use]
    pub fn rows(&self) -> usize {
        self.subjects.iter().map(|subject| subject.times.len()).sum()
    }
}

/// Shape of a group's mean over time.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Shape {
    /// A penalised smooth course.
    Smooth(Basis, Dimension),
    /// Straight line.
    Straight,
    /// One mean for each distinct time of the group; between them straight joins.
    ByTime,
}

/// What a smooth course is made of; `spline/smooth.rs` says how each is penalised.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Basis {
    /// Natural cubic regression spline.
    Cubic,
    /// Thin plate spline of order two, cut to its leading eigenvectors.
    ThinPlate,
    /// Cubic B-splines on equal steps with penalised second differences.
    Pieces,
    /// Gaussian process around a line, with Matern covariance; `range` in time units of the table.
    Process {
        /// Distance over which values stay alike.
        range: f64,
        /// Smoothness.
        roughness: Roughness,
    },
    /// Cyclic cubic spline without a trend; `period` in time units of the table.
    Cyclic {
        /// Length of one round.
        period: f64,
    },
}

/// Number of knots of a spline.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dimension {
    /// All distinct times when at most 20, else 20.
    Auto,
    /// All distinct times.
    Full,
    /// This many, ends included; at most the number of distinct times.
    Knots(usize),
}

/// What differs from subject to subject.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SubjectEffects {
    /// Nothing.
    None,
    /// The level.
    Intercept,
    /// Level and trend, correlated.
    Slope,
    /// Level and trend, correlated, and a penalised spline whose variance is one for all subjects.
    Curve,
}

impl SubjectEffects {
    /// Number of effects per subject, a curve's spline left out.
    #[must_use]
    pub fn count(self) -> usize {
        match self {
            SubjectEffects::None => 0,
            SubjectEffects::Intercept => 1,
            SubjectEffects::Slope | SubjectEffects::Curve => 2,
        }
    }
}

/// What differs from cluster to cluster, beside what differs from subject to subject.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum ClusterEffects {
    /// Nothing.
    #[default]
    None,
    /// The level.
    Intercept,
    /// Level and trend, correlated.
    Slope,
}

impl ClusterEffects {
    /// Number of effects per cluster.
    #[must_use]
    pub fn count(self) -> usize {
        match self {
            ClusterEffects::None => 0,
            ClusterEffects::Intercept => 1,
            ClusterEffects::Slope => 2,
        }
    }
}

/// One value for all groups, or one per group.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sharing {
    /// One for all groups.
    Common,
    /// One per group.
    ByGroup,
}

/// Correlation of the errors within a subject.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Serial {
    /// Independent.
    None,
    /// Continuous-time AR(1): correlation `phi^|dt|`.
    Ar1,
    /// The same plus an independent measurement-error part (Diggle 1988, Biometrics 44:959).
    Ar1Nugget,
}

/// Distribution of the response around its course, with its link.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Family {
    /// Normal, identity link.
    #[default]
    Normal,
    /// Poisson, log link.
    Poisson,
    /// Negative binomial with variance `mu + phi mu^2`, log link; phi is the error parameter.
    NegativeBinomial,
    /// Gamma with variance `phi mu^2`, log link; phi is the error parameter.
    Gamma,
    /// Successes among a number of trials, logit link.
    Binomial,
    /// Shares between 0 and 1, logit link: beta with variance `mu (1 - mu) phi / (1 + phi)`; `1 / phi` is the precision of
    /// Ferrari & Cribari-Neto 2004, J Appl Stat 31:799.
    Beta,
    /// Not below zero with exact zeros, log link: variance `phi mu^p`, p in thousandths between 1000 and 2000, taken as known
    /// (Dunn & Smyth 2005, Stat Comput 15:267).
    Tweedie(u16),
    /// Normal, some values known to lie below or above a limit only (Tobin 1958, Econometrica 26:24).
    Censored,
}

impl Family {
    /// True where a dispersion is estimated.
    #[must_use]
    pub fn has_dispersion(self) -> bool {
        !matches!(self, Family::Poisson | Family::Binomial)
    }

    /// True where responses keep the unit in which they are computed.
    pub(crate) fn is_scaled(self) -> bool {
        matches!(self, Family::Normal | Family::Censored)
    }
}

/// Which likelihood is maximised.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Likelihood {
    /// Restricted: free columns integrated out. For estimates and inference.
    #[default]
    Restricted,
    /// Full: free columns at their optimum. For comparing models with different free columns.
    Full,
}

/// The model to fit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Model {
    /// Shape of the groups' means.
    pub shape: Shape,
    /// True where all groups have one mean at the table's first time, which every group must have seen
    /// (Liang & Zeger 2000, Sankhya B 62:134).
    pub common_start: bool,
    /// Smoothing variance: one for all groups or one per group.
    pub smoothness: Sharing,
    /// What differs from subject to subject.
    pub subjects: SubjectEffects,
    /// Covariance of the subject effects: one for all groups or one per group.
    pub subjects_spread: Sharing,
    /// What differs from cluster to cluster.
    pub clusters: ClusterEffects,
    /// Correlation of the errors.
    pub serial: Serial,
    /// Error variance: one for all groups or one per group.
    pub spread: Sharing,
    /// Which likelihood is maximised.
    pub likelihood: Likelihood,
    /// Distribution of the response. Other than normal: independent errors of one kind, no clusters.
    pub family: Family,
}

impl Default for Model {
    /// A smooth course per group, subjects that differ in level, independent errors of one spread.
    fn default() -> Self {
        Model {
            shape: Shape::Smooth(Basis::Cubic, Dimension::Auto),
            common_start: false,
            smoothness: Sharing::ByGroup,
            subjects: SubjectEffects::Intercept,
            subjects_spread: Sharing::Common,
            clusters: ClusterEffects::None,
            serial: Serial::None,
            spread: Sharing::Common,
            likelihood: Likelihood::Restricted,
            family: Family::Normal,
        }
    }
}
