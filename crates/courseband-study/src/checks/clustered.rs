//! Do subjects of one cage, litter or site go together, and would it matter?

use super::models::edge;
use super::{ALARM, Check, CheckPlot, PlotSeries, Subject};
use crate::plan::ClusterChoice;
use crate::sentences::number;
use courseband_engine::{ClusterEffects, Model, fit};

impl Subject<'_> {
    /// Clusters that the model leaves out are tested (one variance on its edge: Self & Liang 1987, case 5); those that
    /// it holds are left out as a trial. `None` where no cluster holds several subjects.
    pub(super) fn clustered(&self) -> Option<Check> {
        let summary = self.cohort.housing.summary.as_ref()?;
        let count = self.cohort.data.subjects.len();
        if summary.count >= count || summary.count <= self.cohort.groups.len() {
            return None;
        }
        let effects = self.cohort.housing.effects;
        let mut trial = self.plan.clone();
        let (p, sd) = if effects == ClusterEffects::None {
            trial.clusters = ClusterChoice::Intercept;
            let model = Model { clusters: ClusterEffects::Intercept, ..self.cohort.model(self.plan) };
            let other = fit(&self.cohort.data, &model).ok()?;
            (Some(edge((other.log_reml() - self.fit.log_reml()).max(0.0))), other.cluster_covariance())
        } else {
            trial.clusters = ClusterChoice::None;
            (None, self.fit.cluster_covariance())
        };
        let sd = libm::sqrt(sd.first().and_then(|row| row.first()).copied().unwrap_or(0.0));
        let lit = p.is_some_and(|p| p < ALARM);
        let subjects = &self.plan.words.subjects;
        let spread = format!("a standard deviation of {} from cluster to cluster", number(sd, 3));
        let seen = match (effects, lit) {
            (ClusterEffects::None, true) => {
                format!("{subjects} of one cluster go together: {spread}, which the model does not hold.")
            }
            (ClusterEffects::None, false) => format!("{subjects} of one cluster do not go together beyond chance."),
            _ => format!("The model lets clusters differ, with {spread}."),
        };
        let means = match (lit, summary.nested) {
            (true, true) => format!(
                "Groups differ between clusters, so the bands are too narrow: the {subjects} are not independent."
            ),
            (true, false) => "Groups differ within clusters, so the bands are wider than they need to be.".into(),
            (false, _) => String::new(),
        };
        let advice = match effects {
            ClusterEffects::None if lit => "Let clusters differ in level.".into(),
            ClusterEffects::None => String::new(),
            _ => {
                "To see what clusters do, try the model without them; keep them where treatment was given per cluster."
                    .into()
            }
        };
        Some(Check {
            key: "clusters".into(),
            title: "Clusters go together".into(),
            lit,
            p,
            seen: crate::sentences::capital(&seen),
            means,
            advice,
            trial: Some(trial),
            consequence: None,
            more: Vec::new(),
            plot: self.cluster_plot(),
        })
    }

    /// Mean distance from the group's course of every subject, by the number of its cluster.
    fn cluster_plot(&self) -> CheckPlot {
        let mut numbers = std::collections::BTreeMap::new();
        let subjects = &self.cohort.data.subjects;
        subjects.iter().filter_map(|s| s.cluster).for_each(|c| {
            let next = numbers.len() + 1;
            numbers.entry(c).or_insert(next);
        });
        let mut sums = vec![(0.0, 0.0); subjects.len()];
        for r in &self.residuals {
            sums[r.subject].0 += r.around_course;
            sums[r.subject].1 += 1.0;
        }
        let series = (self.cohort.groups.iter().enumerate())
            .map(|(g, info)| {
                let own = (0..subjects.len()).filter(|&s| subjects[s].group == g && sums[s].1 > 0.0);
                let points =
                    own.filter_map(|s| Some((*numbers.get(&subjects[s].cluster?)? as f64, sums[s].0 / sums[s].1)));
                let (x, y) = points.unzip();
                PlotSeries { name: info.name.clone(), group: None, joined: false, x, y }
            })
            .collect();
        CheckPlot {
            across: "cluster, in the order of the table".into(),
            up: "mean distance from the group's course".into(),
            series,
            ..CheckPlot::default()
        }
    }
}
