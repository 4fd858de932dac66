//! Plots of what the model leaves, with envelopes of simulated tables that obey the model.

use super::scatter::means_in_bins;
use super::{CheckPlot, PlotSeries, Subject};
use courseband_engine::special::normal_quantile;
use courseband_engine::{Residual, envelope};

/// Later visits of a subject that one visit is paired with.
const NEIGHBOURS: usize = 12;
/// Fewer simulated tables than this make no envelope.
const FEWEST: usize = 39;
const SAYS: &str = "grey: 95 of 100 simulated tables that obey the model, fitted alike, lie wholly inside";

impl Subject<'_> {
    /// The envelope of a plot's heights over the simulated tables, with its words.
    fn envelope_of(&self, heights: impl Fn(&[Residual]) -> Vec<f64>) -> (Vec<[f64; 2]>, String) {
        let curves: Vec<Vec<f64>> = self.simulated.iter().map(|one| heights(one)).collect();
        let length = heights(&self.residuals).len();
        let alike = curves.len() >= FEWEST && curves.iter().all(|curve| curve.len() == length);
        if alike { (envelope(&curves), SAYS.into()) } else { (Vec::new(), String::new()) }
    }

    /// Products of independent residuals by the time between them: their correlation over real lags.
    pub(super) fn lag_plot(&self) -> CheckPlot {
        let heights = |residuals: &[Residual]| binned(residuals, &|a, b| a.independent * b.independent);
        self.by_lag("correlation of what the model leaves", heights)
    }

    /// Half squared differences of distances from the course, by the time between them (Diggle, Heagerty, Liang &
    /// Zeger 2002, Analysis of Longitudinal Data, sec 3.4).
    pub(super) fn semivariogram(&self) -> CheckPlot {
        let half_square = |a: &Residual, b: &Residual| {
            let d = a.around_course - b.around_course;
            0.5 * d * d
        };
        self.by_lag("semivariogram: half the squared difference of two visits", |r| binned(r, &half_square))
    }

    fn by_lag(&self, up: &str, heights: impl Fn(&[Residual]) -> (Vec<f64>, Vec<f64>)) -> CheckPlot {
        let (x, y) = heights(&self.residuals);
        let (envelope, says) = self.envelope_of(|residuals| heights(residuals).1);
        let series = vec![PlotSeries { name: String::new(), group: None, joined: true, x, y }];
        CheckPlot { across: "time between two visits".into(), up: up.into(), series, envelope, says }
    }

    /// Sorted residuals against normal quantiles.
    pub(super) fn quantile_plot(&self) -> CheckPlot {
        let heights = |residuals: &[Residual]| {
            let mut y: Vec<f64> = residuals.iter().map(|r| r.independent).collect();
            y.sort_by(f64::total_cmp);
            y
        };
        let y = heights(&self.residuals);
        let n = y.len() as f64;
        let x = (0..y.len()).map(|k| normal_quantile((k as f64 + 0.5) / n)).collect();
        let (envelope, says) = self.envelope_of(heights);
        CheckPlot {
            across: "what the normal distribution expects".into(),
            up: "what the model leaves, in standard deviations".into(),
            series: vec![PlotSeries { name: String::new(), group: None, joined: false, x, y }],
            envelope,
            says,
        }
    }
}

/// Means of `value` over pairs of one subject's visits, in bins of the time between them.
fn binned(residuals: &[Residual], value: &dyn Fn(&Residual, &Residual) -> f64) -> (Vec<f64>, Vec<f64>) {
    let mut pairs: Vec<(f64, f64)> = Vec::new();
    for (k, a) in residuals.iter().enumerate() {
        let later = residuals[k + 1..].iter().take_while(|b| b.subject == a.subject).take(NEIGHBOURS);
        pairs.extend(later.map(|b| (b.time - a.time, value(a, b))));
    }
    pairs.sort_by(|a, b| a.0.total_cmp(&b.0));
    let bins = means_in_bins(&pairs, 12);
    (bins.iter().map(|bin| bin.x).collect(), bins.iter().map(|bin| bin.y).collect())
}
