//! The plan: every choice of an analysis, with its default.
//!
//! Unknown keys are refused by name; absent keys take the defaults.

mod table;

use serde::{Deserialize, Deserializer, Serialize, Serializer};

pub use table::*;

/// Every choice of an analysis.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Plan {
    /// Which column plays which part.
    pub columns: Columns,
    /// Rows left out, each with its reason.
    pub exclusions: Vec<Exclusion>,
    /// Subjects that were removed as planned, by name, beside those that `columns.removal` tells.
    pub removed: Vec<String>,
    /// How cells are read.
    pub reading: ReadingChoice,
    /// Words for what was followed.
    pub words: Words,
    /// Distribution and scale of the response.
    pub response: Response,
    /// Shape of the groups' curves.
    pub curves: Curves,
    /// What differs from subject to subject.
    pub subjects: SubjectEffects,
    /// One covariance of the subject effects for all groups, or one per group.
    pub subjects_spread: Sharing,
    /// What differs from cluster to cluster.
    pub clusters: ClusterChoice,
    /// Errors around a subject's course.
    pub errors: Errors,
    /// Which pairs, how sure, which margin.
    pub comparisons: Comparisons,
    /// Where curves are evaluated.
    pub grid: GridChoice,
    /// Seed of every simulation.
    pub seed: u64,
}

impl Default for Plan {
    fn default() -> Self {
        Plan {
            columns: Columns::default(),
            exclusions: Vec::new(),
            removed: Vec::new(),
            reading: ReadingChoice::default(),
            words: Words::default(),
            response: Response::default(),
            curves: Curves::default(),
            subjects: SubjectEffects::Intercept,
            subjects_spread: Sharing::Common,
            clusters: ClusterChoice::Auto,
            errors: Errors::default(),
            comparisons: Comparisons::default(),
            grid: GridChoice::default(),
            seed: 20260,
        }
    }
}

/// Distribution and scale of the response.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Response {
    /// Probability distribution around the course.
    pub distribution: Distribution,
    /// Scale on which the course is modelled.
    pub transform: Transform,
    /// Power of a Tweedie distribution, between 1 and 2; `null`: estimated.
    pub power: Option<f64>,
    /// What a value such as `<0.5` is taken for: kept out, or a limit.
    pub detection: Detection,
    /// What is made of the values at the first time.
    pub start: Start,
}

/// What is made of the values at the first time.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Start {
    /// They are part of the course; groups may start apart.
    #[default]
    AsMeasured,
    /// They are part of the course; all groups have one mean then, as after randomisation.
    Common,
    /// Each subject's value is an explanatory value for its later ones.
    Covariate,
    /// Later values are differences from it.
    Change,
    /// Later values are percent changes from it.
    Percent,
}

impl Start {
    /// As written in a plan.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Start::AsMeasured => "as-measured",
            Start::Common => "common",
            Start::Covariate => "covariate",
            Start::Change => "change",
            Start::Percent => "percent",
        }
    }
}

/// Probability distribution of the response.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Distribution {
    /// Normal.
    #[default]
    Normal,
    /// Gamma, log link.
    Gamma,
    /// Negative binomial, log link.
    NegativeBinomial,
    /// Poisson, log link.
    Poisson,
    /// Binomial, logit link.
    Binomial,
    /// Beta, logit link.
    Beta,
    /// Tweedie, log link.
    Tweedie,
}

/// Scale on which the course is modelled.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Transform {
    /// As measured.
    #[default]
    Identity,
    /// Natural logarithm; gaps are ratios of geometric means.
    Log,
}

/// What a value such as `<0.5` is taken for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Detection {
    /// As it is written.
    #[default]
    AsWritten,
    /// A limit beyond which the value lies (Tobin 1958).
    Limits,
}

/// Order of a Matern covariance.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
pub enum Roughness {
    /// 3/2: once differentiable.
    #[serde(rename = "3/2")]
    ThreeHalves,
    /// 5/2: twice differentiable.
    #[default]
    #[serde(rename = "5/2")]
    FiveHalves,
}

/// Shape of the groups' curves.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Curves {
    /// Curved, straight, or one mean per time.
    pub shape: Shape,
    /// Basis of a curved course.
    pub basis: Basis,
    /// Number of knots.
    pub dimension: Dimension,
    /// Length of one round of a cyclic course, in time units.
    pub period: Option<f64>,
    /// Distance over which a Gaussian process stays alike, in time units; `null` estimates it.
    pub range: Option<f64>,
    /// Smoothness of a Gaussian process: order of its Matern covariance.
    pub roughness: Roughness,
    /// One smoothing parameter per group, or one for all.
    pub smoothness: Smoothness,
}

/// Shape of the mean.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Shape {
    /// Penalised spline.
    #[default]
    Smooth,
    /// Straight line.
    Straight,
    /// A mean for each distinct time.
    ByTime,
}

/// Basis of a curved course.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Basis {
    /// Natural cubic regression spline.
    #[default]
    Cubic,
    /// Thin-plate spline, eigen-truncated.
    ThinPlate,
    /// Penalised B-spline.
    PSpline,
    /// Gaussian process.
    GaussianProcess,
    /// Cyclic cubic.
    Cyclic,
}

/// Number of knots, ends included: `"auto"`, `"full"` or an integer.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Dimension {
    /// All distinct times when at most 20, else 20.
    #[default]
    Auto,
    /// All distinct times.
    Full,
    /// This many.
    Knots(usize),
}

impl Serialize for Dimension {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match self {
            Dimension::Auto => serializer.serialize_str("auto"),
            Dimension::Full => serializer.serialize_str("full"),
            Dimension::Knots(count) => serializer.serialize_u64(*count as u64),
        }
    }
}

impl<'de> Deserialize<'de> for Dimension {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        #[derive(Deserialize)]
        #[serde(untagged)]
        enum Wire {
            Count(u64),
            Word(String),
        }
        let refusal = "dimension is \"auto\", \"full\" or a whole number of knots, 3 or more";
        match Wire::deserialize(deserializer).map_err(|_| serde::de::Error::custom(refusal))? {
            Wire::Word(word) if word == "auto" => Ok(Dimension::Auto),
            Wire::Word(word) if word == "full" => Ok(Dimension::Full),
            Wire::Count(count) if count >= 3 => Ok(Dimension::Knots(count as usize)),
            _ => Err(serde::de::Error::custom(refusal)),
        }
    }
}

/// One smoothing parameter per group, or one for all.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Smoothness {
    /// One per group.
    #[default]
    PerGroup,
    /// One for all groups.
    Shared,
}

/// What differs from subject to subject.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum SubjectEffects {
    /// Nothing.
    None,
    /// The level.
    #[default]
    Intercept,
    /// Level and trend, correlated.
    Slope,
    /// A smooth deviation.
    Curve,
}

/// One value for all groups, or one per group.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Sharing {
    /// One for all groups.
    #[default]
    Common,
    /// One per group.
    ByGroup,
}

/// What differs from cluster to cluster (cage, litter, site).
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum ClusterChoice {
    /// Level and trend where each cluster is in one group and there are enough clusters, else the level.
    #[default]
    Auto,
    /// Nothing: subjects of one cluster are independent.
    None,
    /// The level.
    Intercept,
    /// Level and trend, correlated.
    Slope,
}

/// Errors around a subject's course.
#[derive(Debug, Clone, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Errors {
    /// Correlation from visit to visit.
    pub serial: Serial,
    /// Standard deviation.
    pub spread: Spread,
    /// A measurement-error part beside the serially correlated one.
    pub nugget: bool,
}

/// Correlation from visit to visit.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Serial {
    /// Independent.
    #[default]
    None,
    /// Continuous-time AR(1).
    Ar1,
    /// Any covariance between visits.
    Unstructured,
}

/// Standard deviation of the errors.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Spread {
    /// One for all.
    #[default]
    Common,
    /// One per group.
    ByGroup,
    /// Growing with the mean.
    WithMean,
    /// One per visit.
    ByVisit,
}

/// Which pairs, how sure, which margin.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Comparisons {
    /// All pairs, or each group with the control.
    pub pairs: Pairs,
    /// The control group.
    pub control: Option<String>,
    /// Confidence level, between 0 and 1.
    pub level: f64,
    /// Largest gap that does not matter; 0 for none.
    pub margin: f64,
    /// Unit of the margin.
    pub margin_unit: MarginUnit,
    /// Whole course and all pairs at once, or each day by itself.
    pub band: BandKind,
    /// Handling of small samples.
    pub small_sample: SmallSample,
    /// Number of refits behind a calibrated critical value.
    pub refits: usize,
    /// A trend over the order of the groups (`reading.group_order`) beside the pairs.
    pub trend: bool,
    /// Level of the response whose day is sought, on the response's own scale.
    pub target: Option<f64>,
    /// First and last time of the stretch over which growth is taken; `null`: the group's whole follow-up.
    pub growth_over: Option<[f64; 2]>,
    /// Which way harm lies, where it is to be shown that a group is not worse than another by more than the margin.
    pub not_worse: Option<Worse>,
    /// Also the rate of change of every course, with bands of its own.
    pub rates: bool,
    /// Time at which the gap is read out; `null`: the last visit that both groups have.
    pub landmark: Option<f64>,
}

impl Default for Comparisons {
    fn default() -> Self {
        Comparisons {
            pairs: Pairs::All,
            control: None,
            level: 0.95,
            margin: 0.0,
            margin_unit: MarginUnit::Response,
            band: BandKind::Simultaneous,
            small_sample: SmallSample::Auto,
            refits: 1000,
            trend: false,
            target: None,
            growth_over: None,
            not_worse: None,
            rates: false,
            landmark: None,
        }
    }
}

/// Which way harm lies.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Worse {
    /// Higher values are worse.
    Higher,
    /// Lower values are worse.
    Lower,
}

/// Which pairs are compared.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Pairs {
    /// Every pair.
    #[default]
    All,
    /// Each group with the control.
    AgainstControl,
}

/// Unit of the margin.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum MarginUnit {
    /// The response's own.
    #[default]
    Response,
    /// Percent of the other group; needs a ratio scale.
    Percent,
}

/// What a band promises.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum BandKind {
    /// Over the whole course and all pairs at once.
    #[default]
    Simultaneous,
    /// Each day by itself.
    Pointwise,
}

/// Handling of small samples.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum SmallSample {
    /// Plug-in standard errors and normal theory.
    None,
    /// Degrees of freedom after Satterthwaite.
    Df,
    /// Critical value from refitted simulations.
    Calibrated,
    /// `df` at once; the page replaces it by `calibrated` when that finishes.
    #[default]
    Auto,
}

/// Where curves are evaluated.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct GridChoice {
    /// First time; `null`: the earliest in the table.
    pub start: Option<f64>,
    /// Last time; `null`: the latest in the table.
    pub end: Option<f64>,
    /// Number of points, equally spaced, ends included.
    pub count: usize,
}

impl Default for GridChoice {
    fn default() -> Self {
        GridChoice { start: None, end: None, count: 101 }
    }
}
