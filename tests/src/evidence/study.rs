//! One simulated study: which promises were kept.

use super::cell::{Cell, Truth};
use courseband_engine::{
    Calibration, Contrast, CriticalValues, Estimate, Fit, Posterior, calibrated_quantile, fit, runs_above_zero,
};

const LEVEL: f64 = 0.95;
/// Points of the grid on which coverage is judged, ends included; visits are among them.
const POINTS: usize = 57;
/// Margin of the onset, in between-subject SDs.
const MARGIN: f64 = 0.5;

/// What one band kept.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Outcome {
    /// The whole true difference lies inside.
    pub covered: bool,
    /// Share of the time at which it lies inside.
    pub across: f64,
    /// Some stretch excludes zero.
    pub stretch: bool,
    /// The true onset lies in the onset's interval; `None` where the truth has none.
    pub onset: Option<bool>,
    /// The true area lies in its interval.
    pub area: bool,
    /// Mean width of the band.
    pub width: f64,
    /// The fit failed.
    pub failed: bool,
}

/// Study number `index` of a cell: the quick band and, where `refits` is above zero, the calibrated one.
#[must_use]
pub fn simulate(cell: &Cell, index: u64, refits: u64) -> (Outcome, Option<Outcome>) {
    let failed = Outcome { failed: true, onset: (cell.truth == Truth::Late).then_some(false), ..Outcome::default() };
    let Ok(fitted) = fit(&cell.table(index), &cell.model()) else {
        return (failed, (refits > 0).then_some(failed));
    };
    let judge = Judge::new(cell, &fitted);
    let quick = judge.outcome(&judge.quick(index));
    let calibrated = (refits > 0).then(|| {
        let families = vec![judge.contrasts.clone()];
        let Some(calibration) = Calibration::new(fitted.clone(), families, index) else {
            return failed;
        };
        let kept: Vec<f64> = (0..refits).map(|k| calibration.refit(k)[0]).collect();
        judge.outcome(&CriticalValues::fixed(calibrated_quantile(&kept, LEVEL).0))
    });
    (quick, calibrated)
}

struct Judge<'a> {
    cell: &'a Cell,
    fit: &'a Fit,
    posterior: Posterior<'a>,
    times: Vec<f64>,
    contrasts: Vec<Contrast>,
    estimates: Vec<Estimate>,
}

impl<'a> Judge<'a> {
    fn new(cell: &'a Cell, fit: &'a Fit) -> Self {
        let posterior = fit.corrected();
        let times: Vec<f64> = (0..POINTS).map(|k| 20.0 * k as f64 / (POINTS - 1) as f64).collect();
        let contrasts: Vec<Contrast> = times.iter().map(|&t| fit.gap(0, 1, t)).collect();
        let estimates = contrasts.iter().map(|c| posterior.estimate(c)).collect();
        Judge { cell, fit, posterior, times, contrasts, estimates }
    }

    fn quick(&self, seed: u64) -> CriticalValues {
        let maxima = self.posterior.family(&self.contrasts, 4096, seed);
        let least = self.estimates.iter().map(|e| e.df).fold(f64::INFINITY, f64::min);
        let most = self.estimates.iter().map(|e| e.df).fold(1.0, f64::max);
        CriticalValues::simultaneous(&maxima, LEVEL, least, most)
    }

    fn outcome(&self, critical: &CriticalValues) -> Outcome {
        let reach: Vec<f64> = self.estimates.iter().map(|e| critical.at(e.df) * e.se).collect();
        let inside = |k: usize| (self.estimates[k].mean - self.cell.difference(self.times[k])).abs() <= reach[k];
        let kept = (0..POINTS).filter(|&k| inside(k)).count();
        Outcome {
            covered: kept == POINTS,
            across: kept as f64 / POINTS as f64,
            stretch: (0..POINTS).any(|k| self.estimates[k].mean.abs() > reach[k]),
            onset: (self.cell.truth == Truth::Late).then(|| self.onset(&reach)),
            area: self.area(),
            width: 2.0 * reach.iter().sum::<f64>() / POINTS as f64,
            failed: false,
        }
    }

    /// Does the band's onset interval hold the true onset?
    fn onset(&self, reach: &[f64]) -> bool {
        let last = |side: f64| {
            let at: Vec<f64> = (0..POINTS).map(|k| self.estimates[k].mean + side * reach[k] - MARGIN).collect();
            let between = |t: f64| {
                let k = self.times.partition_point(|&x| x < t).clamp(1, POINTS - 1);
                let share = (t - self.times[k - 1]) / (self.times[k] - self.times[k - 1]);
                at[k - 1] + share * (at[k] - at[k - 1])
            };
            runs_above_zero(&self.times, &at, between).into_iter().last().filter(|run| run.open_end).map(|r| r.start)
        };
        // The true gap passes the margin a third of the way up its rise.
        let truth = 20.0 * (0.6 + 0.4 * MARGIN / 1.5);
        last(1.0).is_some_and(|t| t <= truth) && last(-1.0).is_none_or(|t| t >= truth)
    }

    /// Does the t interval of the mean difference hold the truth?
    fn area(&self) -> bool {
        let pieces = 200;
        let mut sum: Option<Contrast> = None;
        let mut truth = 0.0;
        for k in 0..pieces {
            let t = 20.0 * (k as f64 + 0.5) / f64::from(pieces);
            truth += self.cell.difference(t) / f64::from(pieces);
            let part = self.fit.gap(0, 1, t).times(1.0 / f64::from(pieces));
            sum = Some(match sum {
                None => part,
                Some(sum) => sum.plus(1.0, &part),
            });
        }
        let Some(contrast) = sum else { return false };
        let e = self.posterior.estimate(&contrast);
        (e.mean - truth).abs() <= CriticalValues::pointwise(LEVEL).at(e.df) * e.se
    }
}
