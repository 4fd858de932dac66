//! Checks and plots of the scatter around the courses.

use super::{ALARM, Check, CheckPlot, PlotSeries, Subject};
use crate::sentences::{number, plain};
use courseband_engine::Residual;
use courseband_engine::special::{normal_sf, t_sf};

/// A bin of ascending x.
pub(super) struct Bin {
    pub(super) x: f64,
    pub(super) y: f64,
}

/// Means of y in bins of about equal count; equal x stay together.
pub(super) fn means_in_bins(pairs: &[(f64, f64)], bins: usize) -> Vec<Bin> {
    let size = pairs.len().div_ceil(bins).max(5);
    let mut result = Vec::new();
    let mut start = 0;
    while start < pairs.len() {
        let mut end = (start + size).min(pairs.len());
        while end < pairs.len() && pairs[end].0 == pairs[end - 1].0 {
            end += 1;
        }
        let count = (end - start) as f64;
        let mean = |f: &dyn Fn(&(f64, f64)) -> f64| pairs[start..end].iter().map(f).sum::<f64>() / count;
        result.push(Bin { x: mean(&|p| p.0), y: mean(&|p| p.1) });
        start = end;
    }
    result
}

impl Subject<'_> {
    /// Rows that are far from what the model predicts from the subject's other visits.
    pub(super) fn outlying(&self, residuals: &[Residual]) -> Check {
        let n = residuals.len() as f64;
        let far = residuals.iter().max_by(|a, b| a.given_rest.abs().total_cmp(&b.given_rest.abs()));
        // Bonferroni over rows.
        let p = far.map(|r| (2.0 * n * normal_sf(r.given_rest.abs())).min(1.0));
        let lit = p.is_some_and(|p| p < ALARM);
        let seen = match far {
            Some(r) if lit => format!(
                "{} {} at {} {} is {} standard deviations from what its group and its other visits suggest.",
                crate::sentences::capital(&self.plan.words.subject),
                self.names[r.subject],
                self.time_word(),
                plain(r.time),
                number(r.given_rest.abs(), 1)
            ),
            _ => "No row is far from what the model suggests.".into(),
        };
        let trial = far.map(|far| {
            let before = residuals.iter().take_while(|r| r.subject != far.subject).count();
            let own = residuals[before..].iter().position(|r| std::ptr::eq(r, far));
            self.without(far.subject, own)
        });
        Check {
            key: "outlying".into(),
            title: "An outlying value".into(),
            lit,
            p,
            seen,
            means: if lit { "One value can move a course and widen every band.".into() } else { String::new() },
            advice: if lit {
                "Check the value at its source. Leave it out only if it is an error, with that reason.".into()
            } else {
                String::new()
            },
            trial,
            consequence: None,
            more: Vec::new(),
            plot: self.quantile_plot(),
        }
    }

    /// Chances of so much skew, and of so much change of spread with level, were the scatter normal and even.
    pub(super) fn shape_of_scatter(&self, residuals: &[Residual]) -> (f64, f64) {
        let n = residuals.len() as f64;
        if n < 20.0 {
            return (1.0, 1.0);
        }
        let mean = residuals.iter().map(|r| r.independent).sum::<f64>() / n;
        let moment = |k: f64| residuals.iter().map(|r| libm::pow(r.independent - mean, k)).sum::<f64>() / n;
        let skew = moment(3.0) / moment(2.0).powf_by_three_halves();
        // Standard error of the skewness of normal samples (Fisher 1930).
        let se = libm::sqrt(6.0 * (n - 2.0) / ((n + 1.0) * (n + 3.0)));
        let lean = 2.0 * normal_sf((skew / se).abs());
        let x: Vec<f64> = residuals.iter().map(|r| r.course).collect();
        let y: Vec<f64> = residuals.iter().map(|r| r.independent.abs()).collect();
        (lean, slope_p(&x, &y))
    }

    pub(super) fn fitted_plot(&self, residuals: &[Residual]) -> CheckPlot {
        self.by_group(residuals, "course", "what the model leaves, in standard deviations", |r| r.course)
    }

    pub(super) fn time_plot(&self, residuals: &[Residual]) -> CheckPlot {
        self.by_group(residuals, "time", "what the model leaves, in standard deviations", |r| r.time)
    }

    fn by_group(&self, residuals: &[Residual], across: &str, up: &str, x: impl Fn(&Residual) -> f64) -> CheckPlot {
        let series = (self.cohort.groups.iter().enumerate())
            .map(|(g, info)| {
                let own: Vec<&Residual> = residuals.iter().filter(|r| r.group == g).collect();
                PlotSeries {
                    name: info.name.clone(),
                    group: None,
                    joined: false,
                    x: own.iter().map(|r| x(r)).collect(),
                    y: own.iter().map(|r| r.independent).collect(),
                }
            })
            .collect();
        CheckPlot { across: across.into(), up: up.into(), series, ..CheckPlot::default() }
    }

    /// Standard deviation around the course by time, a line per group.
    pub(super) fn spread_plot(&self, residuals: &[Residual]) -> CheckPlot {
        let series = (self.cohort.groups.iter().enumerate())
            .map(|(g, info)| {
                let mut squares: Vec<(f64, f64)> = (residuals.iter().filter(|r| r.group == g))
                    .map(|r| (r.time, r.around_course * r.around_course))
                    .collect();
                squares.sort_by(|a, b| a.0.total_cmp(&b.0));
                let bins = means_in_bins(&squares, 8);
                PlotSeries {
                    name: info.name.clone(),
                    group: None,
                    joined: true,
                    x: bins.iter().map(|bin| bin.x).collect(),
                    y: bins.iter().map(|bin| libm::sqrt(bin.y)).collect(),
                }
            })
            .collect();
        CheckPlot {
            across: "time".into(),
            up: "standard deviation around the course".into(),
            series,
            ..CheckPlot::default()
        }
    }

    /// Each subject's distance from its group's course, joined.
    pub(super) fn trend_plot(&self, residuals: &[Residual]) -> CheckPlot {
        let mut series: Vec<PlotSeries> = Vec::new();
        let mut last = None;
        for r in residuals {
            if last != Some(r.subject) {
                if series.len() == 60 {
                    break;
                }
                series.push(PlotSeries { name: self.names[r.subject].clone(), joined: true, ..PlotSeries::default() });
                last = Some(r.subject);
            }
            if let Some(own) = series.last_mut() {
                own.x.push(r.time);
                own.y.push(r.around_course);
            }
        }
        CheckPlot {
            across: "time".into(),
            up: "distance from the group's course".into(),
            series,
            ..CheckPlot::default()
        }
    }
}

/// Two-sided p of the slope of y on x (least squares).
fn slope_p(x: &[f64], y: &[f64]) -> f64 {
    let n = x.len() as f64;
    let (mx, my) = (x.iter().sum::<f64>() / n, y.iter().sum::<f64>() / n);
    let sum = |f: &dyn Fn(usize) -> f64| (0..x.len()).map(f).sum::<f64>();
    let sxx = sum(&|k| (x[k] - mx) * (x[k] - mx));
    let sxy = sum(&|k| (x[k] - mx) * (y[k] - my));
    let syy = sum(&|k| (y[k] - my) * (y[k] - my));
    let rest = (syy - sxy * sxy / sxx) / (n - 2.0);
    if !(sxx > 0.0 && rest > 0.0) {
        return 1.0;
    }
    2.0 * t_sf((sxy / libm::sqrt(rest * sxx)).abs(), n - 2.0)
}

/// `x^1.5`.
trait ThreeHalves {
    fn powf_by_three_halves(self) -> f64;
}

impl ThreeHalves for f64 {
    fn powf_by_three_halves(self) -> f64 {
        self * libm::sqrt(self)
    }
}
