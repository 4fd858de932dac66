//! The variance parameters as one vector without constraints, and back.
//!
//! | entry | meaning |
//! |---|---|
//! | smoothing | `ln s^2` of a group's spline coefficients |
//! | error | `ln sigma^2` of a group |
//! | subject, one effect | `ln sd` |
//! | subject, two effects | `(a, c, b)` with `D = L L'`, `L = [[e^a, 0], [c, e^b]]` |
//! | subject, a curve's spline | `ln sd` of its coefficients |
//! | cluster | as subject, one for all groups |
//! | shared | `ln s^2` of a run of shared columns |
//! | rate | `ln` decay of the serial correlation per internal time unit |
//! | nugget | `logit` of the share of measurement error |
//!
//! Responses are internal (unit variance), times are internal (unit span).

use crate::basis::GroupBasis;
use crate::model::{ClusterEffects, Family, Likelihood, Model, Serial, Sharing, SubjectEffects};
use crate::reduce::Design;
use crate::whiten::ErrorShape;
use nalgebra::DMatrix;

/// What an entry of the parameter vector is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Parameter {
    /// Smoothing variance of a group, or of all (`None`).
    Smoothing(Option<usize>),
    /// Error variance of a group, or of all (`None`).
    Error(Option<usize>),
    /// Subject effects of a group, or of all (`None`); `part` 0: first diagonal entry of the factor,
    /// 1: its off-diagonal entry, 2: its second diagonal entry, 3: the spline of subject curves.
    Subject {
        /// Group, or all.
        group: Option<usize>,
        /// Part of the factor.
        part: usize,
    },
    /// Cluster effects; `part` as for subjects.
    Cluster {
        /// Part of the factor.
        part: usize,
    },
    /// Variance of a run of shared columns.
    Shared(usize),
    /// Decay of the serial correlation.
    Rate,
    /// Share of measurement error.
    Nugget,
}

/// Where each parameter is in the vector.
#[derive(Debug, Clone)]
pub(crate) struct Layout {
    pub(crate) entries: Vec<Parameter>,
    pub(crate) lower: Vec<f64>,
    pub(crate) upper: Vec<f64>,
    /// Per group.
    pub(crate) smoothing: Vec<Option<usize>>,
    /// Per group.
    pub(crate) error: Vec<usize>,
    /// Per group: index of the first entry.
    pub(crate) subject: Vec<usize>,
    /// Index of the first entry.
    cluster: usize,
    /// Per run of shared columns.
    shared: Vec<usize>,
    pub(crate) rate: Option<usize>,
    pub(crate) nugget: Option<usize>,
    /// What differs from subject to subject, and from cluster to cluster.
    pub(crate) subjects: SubjectEffects,
    pub(crate) clusters: ClusterEffects,
    /// Columns of subject and cluster effects, those of a spline among them.
    width: usize,
    curved: usize,
    /// True where the free columns are not integrated out.
    pub(crate) full: bool,
    pub(crate) family: Family,
}

impl Layout {
    pub(crate) fn new(model: &Model, design: &Design) -> Self {
        let bases = &design.bases;
        let groups = bases.len();
        let mut layout = Layout {
            entries: Vec::new(),
            lower: Vec::new(),
            upper: Vec::new(),
            smoothing: vec![None; groups],
            error: vec![0; groups],
            subject: vec![0; groups],
            cluster: 0,
            shared: Vec::new(),
            rate: None,
            nugget: None,
            subjects: model.subjects,
            clusters: model.clusters,
            width: design.effects.width(),
            curved: design.effects.curved(),
            full: model.likelihood == Likelihood::Full,
            family: model.family,
        };
        layout.add_smoothing(model, bases);
        for (group, slot) in layout.owners(model.spread, groups) {
            // Without a dispersion the entry is there and held at 1.
            let (low, high) = match model.family {
                Family::Normal => (-36.0, 12.0),
                Family::Censored => (-18.0, 12.0),
                Family::Poisson | Family::Binomial => (0.0, 0.0),
                _ => (-12.0, 6.0),
            };
            let index = layout.add(Parameter::Error(slot), low, high);
            group.into_iter().for_each(|g| layout.error[g] = index);
        }
        if model.subjects.count() > 0 {
            layout.add_subjects(model, groups);
        }
        if model.clusters.count() > 0 {
            layout.cluster = layout.add(Parameter::Cluster { part: 0 }, -18.0, 6.0);
            if model.clusters == ClusterEffects::Slope {
                layout.add(Parameter::Cluster { part: 1 }, -400.0, 400.0);
                layout.add(Parameter::Cluster { part: 2 }, -18.0, 6.0);
            }
        }
        for run in 0..design.shared.penalised.len() {
            let index = layout.add(Parameter::Shared(run), -24.0, 24.0);
            layout.shared.push(index);
        }
        if model.serial != Serial::None {
            let unit = libm::log(design.median_gap());
            layout.rate = Some(layout.add(Parameter::Rate, -9.3 - unit, 3.0 - unit));
        }
        if model.serial == Serial::Ar1Nugget {
            layout.nugget = Some(layout.add(Parameter::Nugget, -14.0, 14.0));
        }
        layout
    }

    fn add(&mut self, entry: Parameter, lower: f64, upper: f64) -> usize {
        self.entries.push(entry);
        self.lower.push(lower);
        self.upper.push(upper);
        self.entries.len() - 1
    }

    /// Groups that share one entry, with the entry's own group.
    fn owners(&self, sharing: Sharing, groups: usize) -> Vec<(Vec<usize>, Option<usize>)> {
        match sharing {
            Sharing::Common => vec![((0..groups).collect(), (groups == 1).then_some(0))],
            Sharing::ByGroup => (0..groups).map(|g| (vec![g], Some(g))).collect(),
        }
    }

    fn add_smoothing(&mut self, model: &Model, bases: &[GroupBasis]) {
        for (group, slot) in self.owners(model.smoothness, bases.len()) {
            let curved: Vec<usize> = group.into_iter().filter(|&g| bases[g].penalised() > 0).collect();
            if !curved.is_empty() {
                let index = self.add(Parameter::Smoothing(slot), -24.0, 24.0);
                curved.into_iter().for_each(|g| self.smoothing[g] = Some(index));
            }
        }
    }

    fn add_subjects(&mut self, model: &Model, groups: usize) {
        for (group, slot) in self.owners(model.subjects_spread, groups) {
            let first = self.add(Parameter::Subject { group: slot, part: 0 }, -18.0, 6.0);
            if model.subjects.count() == 2 {
                self.add(Parameter::Subject { group: slot, part: 1 }, -400.0, 400.0);
                self.add(Parameter::Subject { group: slot, part: 2 }, -18.0, 6.0);
            }
            if self.curved > 0 {
                self.add(Parameter::Subject { group: slot, part: 3 }, -18.0, 9.0);
            }
            group.into_iter().for_each(|g| self.subject[g] = first);
        }
    }

    pub(crate) fn len(&self) -> usize {
        self.entries.len()
    }

    /// Error variance of a group.
    pub(crate) fn variance(&self, theta: &[f64], group: usize) -> f64 {
        libm::exp(theta[self.error[group]])
    }

    /// Smoothing variance of a group, where it has one.
    pub(crate) fn smoothing_variance(&self, theta: &[f64], group: usize) -> Option<f64> {
        self.smoothing[group].map(|index| libm::exp(theta[index]))
    }

    /// Priors of the penalised unknowns of a block: the entry of their variance, and where they stand.
    pub(crate) fn priors<'a>(
        &'a self,
        design: &'a Design,
        block: usize,
    ) -> impl Iterator<Item = (usize, std::ops::Range<usize>)> + 'a {
        let placement = &design.placement;
        let own = (0..design.bases.len()).filter(move |&g| placement.block(g) == block).filter_map(|g| {
            let first = placement.position(g, design.bases[g].unpenalised());
            self.smoothing[g].map(|entry| (entry, first..first + design.bases[g].penalised()))
        });
        let mut at = placement.size(block) - design.shared.columns() + design.shared.free;
        let shared = self.shared.iter().zip(&design.shared.penalised).map(move |(&entry, &length)| {
            at += length;
            (entry, at - length..at)
        });
        own.chain(shared)
    }

    /// Factor `L` of the subject covariance of a group, lower triangular.
    pub(crate) fn subject_factor(&self, theta: &[f64], group: usize) -> DMatrix<f64> {
        let first = self.subject[group];
        let lines = self.subjects.count();
        let mut factor = self.factor(theta, first, lines);
        if self.curved > 0 {
            let sd = libm::exp(theta[first + 3]);
            (self.width - self.curved..self.width).for_each(|a| factor[(a, a)] = sd);
        }
        factor
    }

    /// Factor `L` of the cluster covariance, lower triangular.
    pub(crate) fn cluster_factor(&self, theta: &[f64]) -> DMatrix<f64> {
        self.factor(theta, self.cluster, self.clusters.count())
    }

    fn factor(&self, theta: &[f64], first: usize, lines: usize) -> DMatrix<f64> {
        let mut factor = DMatrix::zeros(self.width, self.width);
        if lines > 0 {
            factor[(0, 0)] = libm::exp(theta[first]);
        }
        if lines > 1 {
            factor[(1, 0)] = theta[first + 1];
            factor[(1, 1)] = libm::exp(theta[first + 2]);
        }
        factor
    }

    /// Adds the derivative through `L` to `gradient`: `slope` is the derivative for each entry of `L`.
    pub(crate) fn add_factor_slope(&self, theta: &[f64], group: usize, slope: &DMatrix<f64>, gradient: &mut [f64]) {
        let first = self.subject[group];
        Self::add_slope(theta, first, self.subjects.count(), slope, gradient);
        if self.curved > 0 {
            let trace: f64 = (self.width - self.curved..self.width).map(|a| slope[(a, a)]).sum();
            gradient[first + 3] += trace * libm::exp(theta[first + 3]);
        }
    }

    /// The same for the factor of the clusters.
    pub(crate) fn add_cluster_slope(&self, theta: &[f64], slope: &DMatrix<f64>, gradient: &mut [f64]) {
        Self::add_slope(theta, self.cluster, self.clusters.count(), slope, gradient);
    }

    fn add_slope(theta: &[f64], first: usize, lines: usize, slope: &DMatrix<f64>, gradient: &mut [f64]) {
        if lines > 0 {
            gradient[first] += slope[(0, 0)] * libm::exp(theta[first]);
        }
        if lines > 1 {
            gradient[first + 1] += slope[(1, 0)];
            gradient[first + 2] += slope[(1, 1)] * libm::exp(theta[first + 2]);
        }
    }

    /// Correlation of the errors, `None` where they are independent.
    pub(crate) fn error_shape(&self, theta: &[f64]) -> Option<ErrorShape> {
        let rate = self.rate.map(|index| libm::exp(theta[index]))?;
        let nugget = self.nugget.map_or(0.0, |index| 1.0 / (1.0 + libm::exp(-theta[index])));
        Some(ErrorShape { rate, nugget })
    }
}
