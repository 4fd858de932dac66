//! Effect sizes: the gap at a landmark, areas, averages, growth, extremes, onset.
//!
//! Linear functions of the curves (landmark, average, area, growth) have exact
//! posterior means and standard errors and a t interval for the number by itself.
//! Times and heights of extremes, and probabilities, come from seeded posterior
//! draws, widened by the t distribution of the smallest degrees of freedom met.
//! The onset follows the band: its interval holds every day that some course
//! inside the band could have as its onset.

use crate::comparison::Comparison;
use crate::evaluate::Evaluation;
use crate::findings::*;
use courseband_engine::special::{Rng, t_quantile, t_sf};
use courseband_engine::{Contrast, Estimate, runs_above_zero};

/// Posterior draws behind extremes and probabilities.
const DRAWS: usize = 1000;
/// Random directions behind the test of the gap's shape.
const SHAPE_DIRECTIONS: usize = 2048;
/// Pieces of the integration; within each a cubic is integrated exactly by two points.
const PIECES: usize = 200;

impl Evaluation<'_> {
    fn interval(&self, e: Estimate, back: impl Fn(f64) -> f64) -> Effect {
        let reach = t_quantile(0.5 + 0.5 * self.plan.comparisons.level, e.df) * e.se;
        Effect {
            estimate: back(e.mean),
            lower: back(e.mean - reach),
            upper: back(e.mean + reach),
            df: Some(e.df).filter(|df| df.is_finite()),
        }
    }

    /// Average of a contrast over `[low, high]` (Gauss-Legendre, two points a piece).
    fn average(&self, contrast: impl Fn(f64) -> Contrast, support: [f64; 2]) -> Option<Estimate> {
        self.average_contrast(contrast, support).map(|contrast| self.posterior.estimate(&contrast))
    }

    fn average_contrast(&self, contrast: impl Fn(f64) -> Contrast, [low, high]: [f64; 2]) -> Option<Contrast> {
        if high <= low {
            return None;
        }
        let h = (high - low) / PIECES as f64;
        let offset = 0.5 / libm::sqrt(3.0);
        let mut sum: Option<Contrast> = None;
        for k in 0..PIECES {
            let middle = low + h * (k as f64 + 0.5);
            for t in [middle - h * offset, middle + h * offset] {
                let weight = 0.5 / PIECES as f64;
                let part = contrast(t);
                sum = Some(match sum {
                    None => part.times(weight),
                    Some(sum) => sum.plus(weight, &part),
                });
            }
        }
        sum
    }

    pub(crate) fn pair_effects(&self, differences: &[Difference]) -> Vec<PairEffects> {
        (self.comparisons().iter().zip(differences))
            .map(|(comparison, difference)| self.pair_effect(comparison, difference))
            .collect()
    }

    fn pair_effect(&self, comparison: &Comparison, difference: &Difference) -> PairEffects {
        let gap = |t: f64| comparison.at(self.fit, t);
        let support = self.overlap(comparison).filter(|_| !self.is_lone(comparison));
        let asked = self.plan.comparisons.landmark;
        let inside = |t: &f64| support.is_some_and(|[low, high]| *t >= low && *t <= high);
        let landmark_time = asked.or(difference.at_visits.time.last().copied()).filter(inside);
        let average = support.and_then(|support| self.average(gap, support));
        let ratio = self.is_ratio();
        let span = support.map_or(0.0, |[low, high]| high - low);
        let (onset, onset_direction) = match support.and_then(|_| self.onset(difference, &gap)) {
            Some((onset, direction)) => (Some(onset), Some(direction)),
            None => (None, None),
        };
        PairEffects {
            landmark_time,
            landmark: landmark_time.map(|t| self.interval(self.posterior.estimate(&gap(t)), |x| self.back(x))),
            average: average.map(|e| self.interval(e, |x| self.back(x))),
            area: average.filter(|_| !ratio).map(|e| self.interval(e, |x| x * span)),
            onset,
            onset_direction,
            to_level: comparison.pair().and_then(|pair| self.later(pair)),
            level_p: average.filter(|e| e.se > 0.0).map(|e| 2.0 * t_sf(e.mean.abs() / e.se, e.df)),
            shape_p: support.and_then(|support| self.shape_p(support, &gap)),
        }
    }

    /// Departures of the gap from its average: one test over the whole support.
    fn shape_p(&self, support: [f64; 2], gap: &impl Fn(f64) -> Contrast) -> Option<f64> {
        let average = self.average_contrast(gap, support)?;
        let members: Vec<(Contrast, Estimate)> = (self.inside(support).iter())
            .map(|&t| {
                let contrast = gap(t).plus(-1.0, &average);
                let estimate = self.posterior.estimate(&contrast);
                (contrast, estimate)
            })
            .filter(|(_, e)| e.se > 0.0)
            .collect();
        let most = members.iter().map(|(_, e)| *e).max_by(|a, b| telling(a).total_cmp(&telling(b)))?;
        let contrasts: Vec<Contrast> = members.into_iter().map(|(c, _)| c).collect();
        let maxima = self.posterior.family(&contrasts, SHAPE_DIRECTIONS, self.plan.seed);
        Some(maxima.tail(most.mean.abs() / most.se, Some(most.df).filter(|df| df.is_finite())).clamp(0.0, 1.0))
    }

    fn is_ratio(&self) -> bool {
        self.plan.is_ratio()
    }

    /// The onset beyond the margin, in the direction in which the gap ends.
    fn onset(&self, difference: &Difference, gap: &impl Fn(f64) -> Contrast) -> Option<(TimeEffect, Direction)> {
        let support = difference.support?;
        let [low, high] = difference.margin;
        if !(high > 0.0) || support[1] <= support[0] {
            return None;
        }
        let points = self.inside(support);
        let at_end = self.posterior.estimate(&gap(support[1])).mean;
        let above = at_end >= 0.0;
        let beyond = |x: f64| if above { x - high } else { low - x };
        let limit = |t: f64, towards: f64| {
            let e = self.posterior.estimate(&gap(t));
            beyond(e.mean + if above { towards } else { -towards } * self.critical_at(difference, e.df) * e.se)
        };
        let last_run = |value: &dyn Fn(f64) -> f64| {
            let at: Vec<f64> = points.iter().map(|&t| value(t)).collect();
            let run = runs_above_zero(&points, &at, value).into_iter().last().filter(|run| run.open_end)?;
            Some((run.start, run.open_start))
        };
        let (already_at_start, never) = self.onset_chances(&points, gap, &beyond);
        let earliest = last_run(&|t| limit(t, 1.0));
        let direction = if above { Direction::Above } else { Direction::Below };
        Some((
            TimeEffect {
                estimate: last_run(&|t| limit(t, 0.0)).map(|run| run.0),
                lower: earliest.map(|run| run.0),
                upper: last_run(&|t| limit(t, -1.0)).map(|run| run.0),
                at_or_before_start: earliest.is_some_and(|run| run.1),
                already_at_start,
                never,
            },
            direction,
        ))
    }

    /// Critical value of the gaps' band.
    fn critical_at(&self, difference: &Difference, df: f64) -> f64 {
        match &difference.critical {
            Critical::One(value) => *value,
            Critical::Many(values) => {
                // The value at the grid point whose degrees of freedom are nearest.
                let near = (difference.grid.df.iter().zip(values))
                    .filter_map(|(d, v)| Some(((d.as_ref()? - df).abs(), v.as_ref()?)))
                    .min_by(|a, b| a.0.total_cmp(&b.0));
                near.map_or(f64::INFINITY, |(_, value)| *value)
            }
        }
    }

    /// Shares of posterior draws that are beyond from the first time on, and that are not beyond at the end.
    fn onset_chances(
        &self,
        points: &[f64],
        gap: &impl Fn(f64) -> Contrast,
        beyond: &impl Fn(f64) -> f64,
    ) -> (f64, f64) {
        let (mut whole, mut never) = (0, 0);
        self.draw(points, gap, |values| {
            let last = values.len() - 1;
            whole += usize::from(values.iter().all(|&x| beyond(x) > 0.0));
            never += usize::from(beyond(values[last]) <= 0.0);
        });
        (whole as f64 / DRAWS as f64, never as f64 / DRAWS as f64)
    }

    fn draw(&self, points: &[f64], contrast: &impl Fn(f64) -> Contrast, mut each: impl FnMut(&[f64])) {
        let contrasts: Vec<Contrast> = points.iter().map(|&t| contrast(t)).collect();
        self.draw_from(&contrasts, &mut each);
    }

    fn draw_from(&self, contrasts: &[Contrast], mut each: impl FnMut(&[f64])) {
        let df = contrasts.iter().map(|c| self.posterior.estimate(c).df).fold(f64::INFINITY, f64::min);
        let joint = self.posterior.joint(contrasts);
        let mut rng = Rng::stream(self.plan.seed, 77);
        let mut values = Vec::new();
        for _ in 0..DRAWS {
            let stretch = if df.is_finite() { libm::sqrt(df / rng.chi2(df)) } else { 1.0 };
            joint.draw(&mut rng, stretch, &mut values);
            each(&values);
        }
    }

    pub(crate) fn group_effects(&self) -> Vec<GroupEffects> {
        (0..self.cohort.groups.len()).map(|g| self.group_effect(g)).collect()
    }

    fn group_effect(&self, g: usize) -> GroupEffects {
        let support = self.cohort.supports[g];
        let span = support[1] - support[0];
        let course = |t: f64| self.fit.course(g, t);
        let average = self.average(course, support);
        let ratio = self.is_ratio();
        let over = self.growth_over(support);
        let growth = over.map(|[start, end]| {
            let change = course(end).plus(-1.0, &course(start)).times(1.0 / (end - start));
            self.posterior.estimate(&change)
        });
        let [peak, nadir] = self.extremes(g);
        GroupEffects {
            average: average.map(|e| self.interval(e, |x| self.back_course(x))),
            area: average.filter(|_| !ratio).map(|e| self.interval(e, |x| x * span)),
            growth_over: over,
            to_level: self.to_level(g),
            growth: growth.map(|e| self.interval(e, |x| self.back(x))),
            doubling_time: growth.filter(|_| ratio && !self.plan.is_logit()).and_then(|e| self.doubling(e)),
            peak,
            nadir,
        }
    }

    /// The stretch over which growth is taken: the plan's, as far as the group was followed.
    fn growth_over(&self, [low, high]: [f64; 2]) -> Option<[f64; 2]> {
        let [start, end] = self.plan.comparisons.growth_over.unwrap_or([low, high]);
        let (start, end) = (start.max(low), end.min(high));
        (end > start).then_some([start, end])
    }

    /// When a course reaches the plan's level first, coming from where it starts.
    fn to_level(&self, g: usize) -> Option<TimeEffect> {
        let points = self.inside(self.cohort.supports[g]);
        let course = |t: f64| self.fit.course(g, t);
        let value = |t: f64| self.posterior.estimate(&course(t)).mean;
        let level = self.level_sought()?;
        let side = if value(*points.first()?) < level { 1.0 } else { -1.0 };
        let beyond = |t: f64| side * (value(t) - level);
        let at: Vec<f64> = points.iter().map(|&t| beyond(t)).collect();
        let estimate = runs_above_zero(&points, &at, beyond).first().map(|run| run.start);
        let mut times = Vec::with_capacity(DRAWS);
        self.draw(&points, &course, |values| times.push(reached(&points, values, level, side)));
        let share = |wanted: f64| times.iter().filter(|&&t| t == wanted).count() as f64 / DRAWS as f64;
        let (already_at_start, never) = (share(f64::NEG_INFINITY), share(f64::INFINITY));
        times.sort_by(f64::total_cmp);
        let q = |share: f64| times[((share * DRAWS as f64) as usize).min(DRAWS - 1)];
        let (lower, upper) = (q(0.5 - 0.5 * self.plan.comparisons.level), q(0.5 + 0.5 * self.plan.comparisons.level));
        let start = points[0];
        Some(TimeEffect {
            estimate,
            lower: (lower < f64::INFINITY).then_some(lower.max(start)),
            upper: (upper < f64::INFINITY).then_some(upper.max(start)),
            at_or_before_start: lower == f64::NEG_INFINITY,
            already_at_start,
            never,
        })
    }

    /// How much later `to` reaches the level than `from`; `None` where one does not in over a fortieth of the draws.
    fn later(&self, (from, to): (usize, usize)) -> Option<Effect> {
        let level = self.level_sought()?;
        let first = |g: usize| self.inside(self.cohort.supports[g]);
        let (a, b) = (first(from), first(to));
        // One list of contrasts, drawn together: the courses may share uncertainty.
        let places: Vec<(usize, f64)> = a.iter().map(|&t| (from, t)).chain(b.iter().map(|&t| (to, t))).collect();
        let contrasts: Vec<Contrast> = places.iter().map(|&(g, t)| self.fit.course(g, t)).collect();
        let fitted: Vec<f64> = contrasts.iter().map(|c| self.posterior.estimate(c).mean).collect();
        let side = |value: f64| if value < level { 1.0 } else { -1.0 };
        let sides = (side(fitted[0]), side(fitted[a.len()]));
        let gap = |values: &[f64]| {
            let (own_a, own_b) = values.split_at(a.len());
            reached(&b, own_b, level, sides.1) - reached(&a, own_a, level, sides.0)
        };
        let estimate = Some(gap(&fitted)).filter(|gap| gap.is_finite())?;
        let mut gaps = Vec::with_capacity(DRAWS);
        self.draw_from(&contrasts, |values| gaps.push(gap(values)));
        gaps.retain(|gap| gap.is_finite());
        (gaps.len() * 40 >= DRAWS * 39).then(|| quantiles(estimate, gaps, self.plan.comparisons.level))
    }

    /// The level whose day is sought, on the modelled scale.
    fn level_sought(&self) -> Option<f64> {
        let level = self.plan.comparisons.target?;
        let level = match (self.plan.is_logit(), self.is_ratio()) {
            (true, _) => libm::log(level / (1.0 - level)),
            (false, true) => libm::log(level),
            _ => level,
        };
        level.is_finite().then_some(level)
    }

    /// `ln 2` over the growth rate; none where the interval of the rate holds zero.
    fn doubling(&self, growth: Estimate) -> Option<Effect> {
        let rate = self.interval(growth, |x| x);
        let time = |rate: f64| std::f64::consts::LN_2 / rate;
        (rate.lower * rate.upper > 0.0).then(|| Effect {
            estimate: time(rate.estimate),
            lower: time(rate.upper),
            upper: time(rate.lower),
            df: rate.df,
        })
    }

    /// Highest and lowest point of a course.
    fn extremes(&self, g: usize) -> [Option<Extreme>; 2] {
        let points = self.inside(self.cohort.supports[g]);
        if points.len() < 3 {
            return [None, None];
        }
        let course = |t: f64| self.fit.course(g, t);
        let top = |values: &[f64], sign: f64| {
            (0..values.len()).max_by(|&a, &b| (sign * values[a]).total_cmp(&(sign * values[b]))).unwrap_or(0)
        };
        let signs = [1.0, -1.0];
        let mut times = [Vec::with_capacity(DRAWS), Vec::with_capacity(DRAWS)];
        let mut heights = times.clone();
        self.draw(&points, &course, |values| {
            for (k, &sign) in signs.iter().enumerate() {
                let at = top(values, sign);
                times[k].push(points[at]);
                heights[k].push(self.back_course(values[at]));
            }
        });
        let fitted: Vec<f64> = points.iter().map(|&t| self.posterior.estimate(&course(t)).mean).collect();
        let level = self.plan.comparisons.level;
        let mut parts = times.into_iter().zip(heights).zip(signs).map(|((times, heights), sign)| {
            let at = top(&fitted, sign);
            Extreme {
                time: quantiles(points[at], times, level),
                height: quantiles(self.back_course(fitted[at]), heights, level),
                at_end: at == 0 || at + 1 == points.len(),
            }
        });
        [parts.next(), parts.next()]
    }
}

/// How much a point says by itself: minus the log of its chance, so that few degrees of freedom count.
fn telling(e: &Estimate) -> f64 {
    -libm::log(t_sf(e.mean.abs() / e.se, e.df).max(1e-300))
}

/// When a course first lies on the other side of `level`, between points by a straight line; minus infinity where
/// it does from the first point on, infinity where it never does. `side` is 1 where it comes from below.
fn reached(points: &[f64], values: &[f64], level: f64, side: f64) -> f64 {
    let beyond = |k: usize| side * (values[k] - level);
    match (0..points.len()).find(|&k| beyond(k) >= 0.0) {
        None => f64::INFINITY,
        Some(0) => f64::NEG_INFINITY,
        Some(k) => {
            let (a, b) = (beyond(k - 1), beyond(k));
            points[k - 1] + (points[k] - points[k - 1]) * (-a / (b - a))
        }
    }
}

/// An estimate with the quantiles of posterior draws that leave out half of `1 - level` on each side.
fn quantiles(estimate: f64, mut draws: Vec<f64>, level: f64) -> Effect {
    draws.sort_by(f64::total_cmp);
    let at = |share: f64| draws[((share * draws.len() as f64) as usize).min(draws.len() - 1)];
    Effect { estimate, lower: at(0.5 - 0.5 * level), upper: at(0.5 + 0.5 * level), df: None }
}
