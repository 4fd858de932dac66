//! What one subject, or one cluster, does to the gaps.

use super::{Check, CheckPlot, PlotSeries, Subject};
use crate::evaluate::Evaluation;
use crate::sentences::{capital, number, plain};
use courseband_engine::special::t_sf;
use courseband_engine::{ClusterEffects, Residual};

/// Lines of the plot besides that of all together.
const MOST_LINES: usize = 60;

impl Subject<'_> {
    /// Every subject, or every cluster where groups differ between clusters, left out in turn.
    pub(super) fn influence(&self, residuals: &[Residual]) -> Option<Check> {
        let evaluation = Evaluation::new(self.plan, self.cohort, self.fit, None);
        let (mut contrasts, mut places) = (Vec::new(), Vec::new());
        let comparisons = evaluation.comparisons();
        for (at, comparison) in comparisons.iter().enumerate() {
            if let Some([low, high]) = evaluation.overlap(comparison) {
                for &t in self.cohort.visits.iter().filter(|&&t| t >= low && t <= high) {
                    contrasts.push(comparison.at(self.fit, t));
                    places.push((at, t));
                }
            }
        }
        if contrasts.is_empty() {
            return None;
        }
        let (sets, by_cluster) = self.sets(residuals);
        let influence = self.fit.influence_of(&contrasts, &sets);
        let most = influence.iter().max_by(|a, b| a.largest.total_cmp(&b.largest))?;
        let group = &self.cohort.groups[self.cohort.data.subjects[most.subject].group];
        // Without one of n, a gap moves by about one n-th of its spread; one standard error is large.
        let lit = most.largest > 1.0;
        let (at, time) = places[most.at];
        let together = sets.iter().find(|set| set.first() == Some(&most.subject))?;
        let mut trial = self.plan.clone();
        for &subject in together {
            let more = self.without(subject, None).exclusions.split_off(self.plan.exclusions.len());
            trial.exclusions.extend(more);
        }
        let trial = Some(trial);
        let word = if by_cluster { "cluster" } else { &self.plan.words.subject };
        let name =
            if by_cluster { format!("of {}", self.names[most.subject]) } else { self.names[most.subject].clone() };
        let (a, b) = (&comparisons[at].from, &comparisons[at].to);
        let own: Vec<usize> = (0..places.len()).filter(|&k| places[k].0 == at).collect();
        Some(Check {
            key: "influence".into(),
            title: "One decides".into(),
            lit,
            p: None,
            seen: format!(
                "Without {word} {name} ({}) the gap {b} to {a} moves most, by {} of its standard errors at {} {}.",
                group.name,
                number(most.largest, 2),
                self.time_word(),
                plain(time)
            ),
            means: if lit {
                format!("The conclusion leans on this {word}.")
            } else {
                format!("No single {word} moves a gap by more than one standard error.")
            },
            advice: if lit {
                "Look at its rows in Data. Leave it out only for a reason that does not come from its values, and report both."
                    .to_string()
            } else {
                String::new()
            },
            trial,
            consequence: None,
            more: Vec::new(),
            plot: self.movement(&influence, &contrasts, &places, &own, (a, b, &name)),
        })
    }

    /// The gap of the pair that moves most with everybody and its band, and without each that moves it much.
    fn movement(
        &self,
        influence: &[courseband_engine::Influence],
        contrasts: &[courseband_engine::Contrast],
        places: &[(usize, f64)],
        own: &[usize],
        (from, to, most): (&str, &str, &str),
    ) -> CheckPlot {
        let posterior = self.fit.corrected();
        let times: Vec<f64> = own.iter().map(|&k| places[k].1).collect();
        let full: Vec<_> = own.iter().map(|&k| posterior.estimate(&contrasts[k])).collect();
        let mut order: Vec<&courseband_engine::Influence> = influence.iter().filter(|i| !i.values.is_empty()).collect();
        order.sort_by(|a, b| b.largest.total_cmp(&a.largest));
        let line = |name: String, y: Vec<f64>| PlotSeries { name, group: None, joined: true, x: times.clone(), y };
        let mut series = vec![line(String::new(), full.iter().map(|e| e.mean).collect())];
        series.extend(order.iter().take(MOST_LINES).enumerate().map(|(rank, one)| {
            let name = if rank == 0 { format!("without {most}") } else { self.names[one.subject].clone() };
            line(name, own.iter().map(|&k| one.values[k]).collect())
        }));
        CheckPlot {
            across: "time".into(),
            up: format!("gap {to} to {from} with everybody, and without each in turn"),
            series,
            envelope: full.iter().map(|e| [e.mean - e.se, e.mean + e.se]).collect(),
            says: "grey: one standard error around the gap with everybody".into(),
        }
    }

    /// A subject far from the others of its group at all its visits.
    pub(super) fn odd_subject(&self) -> Option<Check> {
        let count = self.cohort.data.subjects.len();
        let spare = count.checked_sub(self.cohort.groups.len() + 1).filter(|&spare| spare >= 4)?;
        if count > super::MOST_LEFT_OUT || self.plan.subjects == crate::plan::SubjectEffects::None {
            return None;
        }
        let odd = self.fit.odd_subject()?;
        // As an externally studentised residual, over all subjects (Bonferroni).
        let p = (2.0 * count as f64 * t_sf(odd.distance.abs(), spare as f64)).min(1.0);
        // Twice the alarm of the other checks: with few subjects less would be blind.
        let lit = p < 2.0 * super::ALARM;
        let word = &self.plan.words.subject;
        let name = &self.names[odd.subject];
        let group = &self.cohort.groups[self.cohort.data.subjects[odd.subject].group].name;
        let all = &self.residuals;
        let means = (0..count).map(|s| {
            let own: Vec<f64> = all.iter().filter(|r| r.subject == s).map(|r| r.around_course).collect();
            own.iter().sum::<f64>() / own.len().max(1) as f64
        });
        let series = PlotSeries {
            name: String::new(),
            group: None,
            joined: false,
            x: (0..count).map(|k| k as f64 + 1.0).collect(),
            y: means.collect(),
        };
        Some(Check {
            key: "subject".into(),
            title: format!("An outlying {word}"),
            lit,
            p: Some(p),
            seen: format!(
                "{} {name} ({group}) lies farthest from its group's course, by {} standard deviations of the others.",
                capital(word),
                number(odd.distance.abs(), 1)
            ),
            means: if lit {
                format!("One {word} widens every band and pulls its group's course.")
            } else {
                String::new()
            },
            advice: if lit {
                format!(
                    "Look at what is known of this {word}. Leave it out only for a reason that does not come from its values."
                )
            } else {
                String::new()
            },
            trial: Some(self.without(odd.subject, None)),
            consequence: None,
            more: Vec::new(),
            plot: CheckPlot {
                across: format!("{word}, in the order of the table"),
                up: "mean distance from the group's course".into(),
                series: vec![series],
                ..CheckPlot::default()
            },
        })
    }

    /// What is left out together, and whether these are clusters.
    fn sets(&self, residuals: &[Residual]) -> (Vec<Vec<usize>>, bool) {
        let housing = &self.cohort.housing;
        let nested = housing.summary.as_ref().is_some_and(|s| s.nested);
        if housing.effects == ClusterEffects::None || !nested {
            return (self.left_out(residuals).into_iter().map(|s| vec![s]).collect(), false);
        }
        let mut sets: std::collections::BTreeMap<usize, Vec<usize>> = std::collections::BTreeMap::new();
        for (k, subject) in self.cohort.data.subjects.iter().enumerate() {
            sets.entry(subject.cluster.unwrap_or(usize::MAX - k)).or_default().push(k);
        }
        (sets.into_values().collect(), true)
    }
}
