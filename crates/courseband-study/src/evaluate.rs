//! Curves, gaps, bands and stretches of a fit, on the grid and at the visits.

use crate::adjust::Adjustment;
use crate::cohort::Cohort;
use crate::comparison::Comparison;
use crate::findings::*;
use crate::plan::{BandKind, MarginUnit, Plan, Shape, SmallSample, Worse};
use courseband_engine::special::{DirectionMaxima, t_quantile};
use courseband_engine::{Contrast, CriticalValues, Estimate, Fit, Posterior, Run, runs_above_zero};

/// Random directions behind a critical value. The radius is integrated, so that its error is
/// below that of 100,000 plain draws.
const DIRECTIONS: usize = 16_384;

/// Everything that is evaluated on one fit.
pub(crate) struct Evaluation<'a> {
    pub(crate) plan: &'a Plan,
    pub(crate) cohort: &'a Cohort,
    pub(crate) fit: &'a Fit,
    pub(crate) posterior: Posterior<'a>,
    grid: Vec<f64>,
    pub(crate) calibrated: Option<CalibratedValues<'a>>,
}

/// Critical values from refits.
#[derive(Debug, Clone, Copy)]
pub(crate) struct CalibratedValues<'a> {
    pub(crate) curves: f64,
    pub(crate) differences: f64,
    /// Largest |error| / SE over all gaps, one per refit.
    pub(crate) kept: &'a [f64],
}

/// Degrees of freedom over a family, and its critical values.
struct Family {
    values: CriticalValues,
    least: f64,
    most: f64,
    /// Behind a simultaneous band without calibration.
    maxima: Option<DirectionMaxima>,
}

impl Family {
    fn at(&self, df: f64) -> f64 {
        self.values.at(df.clamp(self.least, self.most))
    }

    fn critical(&self, estimates: &[Option<Estimate>]) -> Critical {
        match self.values.single() {
            Some(value) => Critical::One(value),
            None => Critical::Many(estimates.iter().map(|e| e.map(|e| self.at(e.df))).collect()),
        }
    }
}

impl<'a> Evaluation<'a> {
    pub(crate) fn new(
        plan: &'a Plan,
        cohort: &'a Cohort,
        fit: &'a Fit,
        calibrated: Option<CalibratedValues<'a>>,
    ) -> Self {
        let posterior = match plan.comparisons.small_sample {
            SmallSample::None => fit.plug_in(),
            _ => fit.corrected(),
        };
        let start = plan.grid.start.unwrap_or_else(|| cohort.visits[0]);
        let end = plan.grid.end.unwrap_or_else(|| cohort.visits[cohort.visits.len() - 1]);
        let steps = (plan.grid.count - 1) as f64;
        let grid = (0..plan.grid.count)
            .map(|k| if k + 1 == plan.grid.count { end } else { start + (end - start) * k as f64 / steps })
            .collect();
        Evaluation { plan, cohort, fit, posterior, grid, calibrated }
    }

    pub(crate) fn is_corrected(&self) -> bool {
        self.posterior.is_corrected()
    }

    /// All that is compared.
    pub(crate) fn comparisons(&self) -> Vec<Comparison> {
        self.cohort.comparisons(self.plan)
    }

    /// Grid and visits inside `support`, with its ends, ascending.
    pub(crate) fn inside(&self, support: [f64; 2]) -> Vec<f64> {
        let [low, high] = support;
        let all = self.grid.iter().chain(&self.cohort.visits).copied().chain([low, high]);
        crate::cohort::distinct(all.filter(|&t| t >= low && t <= high))
    }

    fn family(&self, members: Vec<(Contrast, Estimate)>, directions: usize, calibrated: Option<f64>) -> Family {
        let level = self.plan.comparisons.level;
        let used: Vec<(Contrast, Estimate)> = members.into_iter().filter(|(_, e)| e.se > 0.0).collect();
        let least = used.iter().map(|(_, e)| e.df).fold(f64::INFINITY, f64::min);
        let most = used.iter().map(|(_, e)| e.df).fold(1.0, f64::max);
        let mut kept = None;
        let values = if let Some(value) = calibrated {
            CriticalValues::fixed(value)
        } else if self.plan.comparisons.band == BandKind::Pointwise || used.is_empty() {
            CriticalValues::pointwise(level)
        } else {
            let contrasts: Vec<Contrast> = used.into_iter().map(|(c, _)| c).collect();
            let maxima = self.posterior.family(&contrasts, directions, self.plan.seed);
            let values = CriticalValues::simultaneous(&maxima, level, least, most);
            kept = Some(maxima);
            values
        };
        Family { values, least, most: most.max(least), maxima: kept }
    }

    fn asked(&self, contrast: impl Fn(f64) -> Contrast, times: &[f64]) -> Vec<(Contrast, Estimate)> {
        times
            .iter()
            .map(|&t| {
                let c = contrast(t);
                let e = self.posterior.estimate(&c);
                (c, e)
            })
            .collect()
    }

    /// Estimates at `times`; none outside support where each time has a mean of its own.
    fn estimates(&self, contrast: impl Fn(f64) -> Contrast, times: &[f64], support: [f64; 2]) -> Vec<Option<Estimate>> {
        let everywhere = self.plan.curves.shape != Shape::ByTime && support[0] <= support[1];
        let within = |t: f64| t >= support[0] && t <= support[1];
        times.iter().map(|&t| (everywhere || within(t)).then(|| self.posterior.estimate(&contrast(t)))).collect()
    }

    pub(crate) fn back(&self, value: f64) -> f64 {
        if self.plan.is_ratio() { libm::exp(value) } else { value }
    }

    /// A course's value on the response's own scale.
    pub(crate) fn back_course(&self, value: f64) -> f64 {
        if self.plan.is_logit() { 1.0 / (1.0 + libm::exp(-value)) } else { self.back(value) }
    }

    pub(crate) fn curves(&self) -> Vec<Curve> {
        let groups = self.cohort.groups.len();
        let family = self.family(self.curve_members(), DIRECTIONS / 2, self.calibrated.map(|c| c.curves));
        (0..groups).map(|g| self.curve(g, &family)).collect()
    }

    /// Rates of change of all courses, with one band over all of them.
    pub(crate) fn rates(&self) -> Vec<Rate> {
        let groups = 0..self.cohort.groups.len();
        let spread = |g: &usize| self.cohort.supports[*g][1] > self.cohort.supports[*g][0];
        let own: Vec<usize> = groups.filter(spread).filter(|_| self.plan.curves.shape != Shape::ByTime).collect();
        let members =
            own.iter().flat_map(|&g| self.asked(|t| self.fit.rate(g, t), &self.inside(self.cohort.supports[g])));
        let family = self.family(members.collect(), DIRECTIONS / 2, None);
        let rate = |&g: &usize| {
            let support = self.cohort.supports[g];
            let estimates = self.estimates(|t| self.fit.rate(g, t), &self.grid, support);
            let points = self.points_by(self.grid.clone(), &estimates, &family, &|value| self.back(value));
            Rate {
                group: self.cohort.groups[g].name.clone(),
                support,
                time: points.time,
                response_mean: points.response_mean,
                response_lower: points.response_lower,
                response_upper: points.response_upper,
            }
        };
        own.iter().map(rate).collect()
    }

    fn curve_members(&self) -> Vec<(Contrast, Estimate)> {
        let groups = 0..self.cohort.groups.len();
        groups.flat_map(|g| self.asked(|t| self.fit.course(g, t), &self.inside(self.cohort.supports[g]))).collect()
    }

    fn gap_members(&self) -> Vec<(Contrast, Estimate)> {
        let mut members = Vec::new();
        for comparison in self.comparisons() {
            if let Some(support) = self.overlap(&comparison) {
                members.extend(self.asked(|t| comparison.at(self.fit, t), &self.inside(support)));
            }
        }
        members
    }

    /// Estimated gaps on the grid, one list per pair.
    pub(crate) fn gap_estimates(&self) -> Vec<Vec<Option<f64>>> {
        let gap = |comparison: &Comparison| {
            let range = self.overlap(comparison).unwrap_or([f64::INFINITY, f64::NEG_INFINITY]);
            let estimates = self.estimates(|t| comparison.at(self.fit, t), &self.grid, range);
            estimates.into_iter().map(|e| e.map(|e| e.mean)).collect()
        };
        self.comparisons().iter().map(gap).collect()
    }

    /// Estimated gaps on the grid put on another scale: logarithms of ratios of the courses where `ratio`, differences of
    /// the courses otherwise. `None` outside support and where a course is not above zero.
    pub(crate) fn gaps_on_scale(&self, ratio: bool) -> Vec<Vec<Option<f64>>> {
        if ratio == self.plan.is_ratio() {
            return self.gap_estimates();
        }
        let course = |g: usize, t: f64| self.posterior.estimate(&self.fit.course(g, t)).mean;
        let gap = |comparison: &Comparison| {
            let support = self.overlap(comparison);
            let at = |&t: &f64| {
                support.filter(|[low, high]| t >= *low && t <= *high)?;
                let on = |value: f64| if ratio { libm::log(value) } else { libm::exp(value) };
                let value: f64 = comparison.weights.iter().map(|&(g, weight)| weight * on(course(g, t))).sum();
                value.is_finite().then_some(value)
            };
            self.grid.iter().map(at).collect()
        };
        self.comparisons().iter().map(gap).collect()
    }

    /// The families whose largest error a calibration follows: courses, then gaps.
    pub(crate) fn families(&self) -> Vec<Vec<Contrast>> {
        let contrasts = |members: Vec<(Contrast, Estimate)>| members.into_iter().map(|(c, _)| c).collect();
        vec![contrasts(self.curve_members()), contrasts(self.gap_members())]
    }

    fn curve(&self, g: usize, family: &Family) -> Curve {
        let support = self.cohort.supports[g];
        let course = |t: f64| self.fit.course(g, t);
        let estimates = self.estimates(course, &self.grid, support);
        let visits: Vec<f64> =
            self.cohort.visits.iter().copied().filter(|&t| t >= support[0] && t <= support[1]).collect();
        let at_visits = self.estimates(course, &visits, support);
        Curve {
            group: self.cohort.groups[g].name.clone(),
            critical: family.critical(&estimates),
            grid: self.curve_points(self.grid.clone(), &estimates, family),
            support,
            at_visits: self.curve_points(visits, &at_visits, family),
        }
    }

    fn curve_points(&self, time: Vec<f64>, estimates: &[Option<Estimate>], family: &Family) -> CurvePoints {
        self.points_by(time, estimates, family, &|value| self.back_course(value))
    }

    fn points_by(
        &self,
        time: Vec<f64>,
        estimates: &[Option<Estimate>],
        family: &Family,
        scale: &dyn Fn(f64) -> f64,
    ) -> CurvePoints {
        let limits = Limits::new(estimates, family);
        let back = |values: &[Option<f64>]| values.iter().map(|v| v.map(scale)).collect();
        CurvePoints {
            time,
            response_mean: back(&limits.mean),
            response_lower: back(&limits.lower),
            response_upper: back(&limits.upper),
            mean: limits.mean,
            se: limits.se,
            lower: limits.lower,
            upper: limits.upper,
        }
    }

    pub(crate) fn differences(&self) -> Vec<Difference> {
        let family = self.family(self.gap_members(), DIRECTIONS, self.calibrated.map(|c| c.differences));
        self.comparisons().iter().map(|comparison| self.difference(comparison, &family)).collect()
    }

    pub(crate) fn overlap(&self, comparison: &Comparison) -> Option<[f64; 2]> {
        let supports = comparison.weights.iter().map(|&(g, _)| self.cohort.supports[g]);
        let [low, high] = supports.fold([f64::NEG_INFINITY, f64::INFINITY], |a, b| [a[0].max(b[0]), a[1].min(b[1])]);
        (low <= high).then_some([low, high])
    }

    /// The margin on the modelled scale.
    pub(crate) fn margin(&self) -> [f64; 2] {
        let c = &self.plan.comparisons;
        match c.margin_unit {
            MarginUnit::Response => [-c.margin, c.margin],
            MarginUnit::Percent => {
                let low = libm::log1p(-c.margin / 100.0);
                [low, -low]
            }
        }
    }

    fn difference(&self, comparison: &Comparison, family: &Family) -> Difference {
        let support = self.overlap(comparison);
        let gap = |t: f64| comparison.at(self.fit, t);
        let range = support.unwrap_or([f64::INFINITY, f64::NEG_INFINITY]);
        let estimates = self.estimates(gap, &self.grid, range);
        let visits: Vec<f64> = self.cohort.visits.iter().copied().filter(|&t| t >= range[0] && t <= range[1]).collect();
        let at_visits = self.estimates(gap, &visits, range);
        let margin = self.margin();
        let limits_at = |t: f64| {
            let e = self.posterior.estimate(&gap(t));
            let reach = family.at(e.df) * e.se;
            (e.mean - reach, e.mean + reach)
        };
        let (mut stretches, mut beyond, mut inside, mut not_worse) = (Vec::new(), Vec::new(), Vec::new(), Vec::new());
        let told = !self.is_lone(comparison);
        if let Some(support) = support.filter(|_| told) {
            let points = self.inside(support);
            let limits: Vec<(f64, f64)> = points.iter().map(|&t| limits_at(t)).collect();
            let runs = |value: &dyn Fn((f64, f64)) -> f64| {
                let at: Vec<f64> = limits.iter().map(|&l| value(l)).collect();
                runs_above_zero(&points, &at, |t| value(limits_at(t)))
            };
            let directed = |low: f64, high: f64| {
                let mut all: Vec<Stretch> = runs(&|(lower, _)| lower - high)
                    .into_iter()
                    .map(|run| stretch(run, Some(Direction::Above)))
                    .chain(runs(&|(_, upper)| low - upper).into_iter().map(|run| stretch(run, Some(Direction::Below))))
                    .collect();
                all.sort_by(|a, b| a.start.total_cmp(&b.start));
                all
            };
            stretches = directed(0.0, 0.0);
            if margin[1] > 0.0 {
                beyond = directed(margin[0], margin[1]);
                let within = runs(&|(lower, upper)| (margin[1] - upper).min(lower - margin[0]));
                inside = within.into_iter().map(|run| stretch(run, None)).collect();
                let spared = match self.plan.comparisons.not_worse {
                    Some(Worse::Higher) => runs(&|(_, upper)| margin[1] - upper),
                    Some(Worse::Lower) => runs(&|(lower, _)| lower - margin[0]),
                    None => Vec::new(),
                };
                not_worse = spared.into_iter().map(|run| stretch(run, None)).collect();
            }
        }
        Difference {
            kind: comparison.kind,
            from: comparison.from.clone(),
            to: comparison.to.clone(),
            not_worse,
            critical: family.critical(&estimates),
            grid: self.difference_points(self.grid.clone(), &estimates, family).bounded(told),
            support,
            margin,
            p_adjusted: support
                .filter(|_| told)
                .and_then(|support| self.p_adjusted(&self.inside(support), &gap, family)),
            stretches,
            beyond,
            inside,
            at_visits: self.difference_points(visits, &at_visits, family).bounded(told),
        }
    }

    /// Effects of the shared columns, each with limits by itself.
    pub(crate) fn fill_adjustments(&self, adjustments: &mut [Adjustment]) {
        for (column, adjustment) in adjustments.iter_mut().enumerate() {
            let e = self.posterior.estimate(&self.fit.shared_effect(column));
            let reach = t_quantile(0.5 + 0.5 * self.plan.comparisons.level, e.df) * e.se;
            (adjustment.estimate, adjustment.se) = (Some(e.mean), Some(e.se));
            (adjustment.lower, adjustment.upper) = (Some(e.mean - reach), Some(e.mean + reach));
        }
    }

    /// True where a gap between the groups cannot be told from a difference between two subjects: nowhere is
    /// there a second subject of a group to show how subjects differ.
    pub(crate) fn is_lone(&self, comparison: &Comparison) -> bool {
        let groups = &self.cohort.groups;
        let own = || comparison.weights.iter().map(|&(g, _)| g);
        if own().any(|g| self.cohort.housing.lone[g]) {
            return true;
        }
        if self.plan.subjects_spread == crate::plan::Sharing::ByGroup {
            own().any(|g| groups[g].subjects < 2)
        } else {
            groups.iter().all(|group| group.subjects < 2)
        }
    }

    /// Chance of so large a largest |gap| / SE, anywhere and for any compared pair, were the courses one.
    fn p_adjusted(&self, points: &[f64], gap: &impl Fn(f64) -> Contrast, family: &Family) -> Option<f64> {
        let estimates = points.iter().map(|&t| self.posterior.estimate(&gap(t))).filter(|e| e.se > 0.0);
        if let Some(calibrated) = self.calibrated {
            let largest = estimates.map(|e| e.mean.abs() / e.se).fold(0.0, f64::max);
            let reached = calibrated.kept.iter().filter(|&&kept| kept >= largest).count();
            // The table itself counts as one (Davison & Hinkley 1997, Bootstrap Methods, eq 4.11).
            return Some((1 + reached) as f64 / (1 + calibrated.kept.len()) as f64);
        }
        let maxima = family.maxima.as_ref()?;
        // Where degrees of freedom differ over time the point that says most decides, as in the band.
        let ratio = |e: &Estimate| e.mean.abs() / e.se / family.at(e.df);
        let most = estimates.max_by(|a, b| ratio(a).total_cmp(&ratio(b)))?;
        let df = Some(most.df).filter(|df| df.is_finite()).map(|df| df.clamp(family.least, family.most));
        Some(maxima.tail(most.mean.abs() / most.se, df).clamp(0.0, 1.0))
    }

    fn difference_points(&self, time: Vec<f64>, estimates: &[Option<Estimate>], family: &Family) -> DifferencePoints {
        let limits = Limits::new(estimates, family);
        let back = |values: &[Option<f64>]| values.iter().map(|v| v.map(|v| self.back(v))).collect();
        DifferencePoints {
            time,
            response_estimate: back(&limits.mean),
            response_lower: back(&limits.lower),
            response_upper: back(&limits.upper),
            estimate: limits.mean,
            se: limits.se,
            lower: limits.lower,
            upper: limits.upper,
            df: estimates.iter().map(|e| e.map(|e| e.df).filter(|df| df.is_finite())).collect(),
        }
    }
}

fn stretch(run: Run, direction: Option<Direction>) -> Stretch {
    Stretch { start: run.start, end: run.end, direction, open_start: run.open_start, open_end: run.open_end }
}

/// Columns of a band.
struct Limits {
    mean: Vec<Option<f64>>,
    se: Vec<Option<f64>>,
    lower: Vec<Option<f64>>,
    upper: Vec<Option<f64>>,
}

impl Limits {
    fn new(estimates: &[Option<Estimate>], family: &Family) -> Self {
        let column = |f: &dyn Fn(&Estimate) -> f64| estimates.iter().map(|e| e.as_ref().map(f)).collect();
        let reach = |e: &Estimate| if e.se > 0.0 { family.at(e.df) * e.se } else { 0.0 };
        Limits {
            mean: column(&|e| e.mean),
            se: column(&|e| e.se),
            lower: column(&|e| e.mean - reach(e)),
            upper: column(&|e| e.mean + reach(e)),
        }
    }
}

impl DifferencePoints {
    /// Without limits and standard errors where these cannot be told.
    fn bounded(mut self, told: bool) -> Self {
        if !told {
            let limits =
                [&mut self.se, &mut self.lower, &mut self.upper, &mut self.response_lower, &mut self.response_upper];
            limits.into_iter().chain([&mut self.df]).for_each(|values| values.fill(None));
        }
        self
    }
}
