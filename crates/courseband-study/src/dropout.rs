//! Who leaves, and what if those who left had gone on otherwise.

use crate::cohort::Cohort;
use crate::endings::{EventTimes, level_times, removal_times, removals};
use crate::evaluate::Evaluation;
use crate::findings::Stretch;
use crate::plan::{Plan, Transform};
use crate::refusal::Refusal;
use crate::sentences::{joined, number, plain};
use crate::study::Study;
use courseband_engine::special::{DirectionMaxima, normal_quantile};
use courseband_engine::usual::{kaplan_meier, log_rank, pool_curves};
use courseband_engine::{AfterLeaving, CriticalValues, Data, Filling, Imputer, fit};
use serde::{Deserialize, Serialize};

/// More distinct times than this are no shared visits that somebody could have missed.
const MOST_VISITS: usize = 40;
/// Random directions behind the pooled band.
const DIRECTIONS: usize = 4096;

/// Who leaves when.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct DropoutFindings {
    /// One per group.
    pub groups: Vec<Leaving>,
    /// Everybody who leaves before the last visit.
    pub leavers: Vec<Leaver>,
    /// Chance of such different leaving times, were they alike in all groups (log-rank); `null` where it is undefined.
    pub p: Option<f64>,
    /// What is seen, in plain sentences.
    pub sentences: Vec<String>,
    /// Time to planned removal; `null` where nobody is known to have been removed.
    pub removal: Option<EventTimes>,
    /// Time to the plan's level (`comparisons.target`); `null` without one.
    pub level: Option<EventTimes>,
    /// What the main analysis assumes and estimates.
    pub estimand: String,
    /// Why rows after leaving cannot be filled in here; `null` where they can.
    pub no_sensitivity: Option<String>,
}

/// Leaving in one group.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Leaving {
    /// Group.
    pub group: String,
    /// Subjects.
    pub subjects: usize,
    /// How many leave before the last visit.
    pub left: usize,
    /// Times at which the share still followed falls, and that share just after (Kaplan & Meier 1958).
    pub time: Vec<f64>,
    /// Share still followed.
    pub share: Vec<f64>,
    /// Lower limits.
    pub lower: Vec<Option<f64>>,
    /// Upper limits.
    pub upper: Vec<Option<f64>>,
    /// Mean distance of the leavers' last values from their group's course, in standard deviations of a subject's value at
    /// that time; `null` without leavers.
    pub leavers_last: Option<f64>,
}

/// One who leaves.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Leaver {
    /// Name.
    pub subject: String,
    /// Group.
    pub group: String,
    /// Time last seen.
    pub last_time: f64,
    /// Value then, in the response's unit.
    pub last_value: f64,
    /// The group's course then.
    pub course: f64,
    /// Why it was removed as planned; `null` where it missed visits, or nothing is known.
    pub removed: Option<String>,
}

/// What those who left are taken to do.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Sensitivity {
    /// Shift per time unit since last seen, on the modelled scale.
    pub delta: f64,
    /// Groups that it applies to; empty: all.
    pub groups: Vec<String>,
    /// `own`: their own group's course goes on; `jump`: the reference group's; `increments`: changes as in the reference group.
    pub after: After,
    /// The reference group, for the last two.
    pub reference: Option<String>,
    /// Number of imputed tables.
    pub tables: usize,
}

/// What the mean is after leaving.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum After {
    /// As in the own group.
    #[default]
    Own,
    /// As in the reference group.
    Jump,
    /// Changed as in the reference group.
    Increments,
}

impl Default for Sensitivity {
    fn default() -> Self {
        Sensitivity { delta: 0.0, groups: Vec::new(), after: After::Own, reference: None, tables: 50 }
    }
}

/// Pooled gaps under one assumption.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SensitivityFindings {
    /// The assumption.
    pub asked: Sensitivity,
    /// One per compared pair.
    pub pairs: Vec<PooledGap>,
    /// Tables that could not be fitted; the rest are pooled.
    pub failed: usize,
}

/// A pair's pooled gap at the visits.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PooledGap {
    /// What the difference is between.
    pub kind: crate::comparison::ComparisonKind,
    /// Group.
    pub from: String,
    /// Group.
    pub to: String,
    /// Visits.
    pub time: Vec<f64>,
    /// Gap on the modelled scale.
    pub estimate: Vec<f64>,
    /// Lower limit of the band over these visits and all pairs at once.
    pub lower: Vec<f64>,
    /// Upper limit.
    pub upper: Vec<f64>,
    /// Share of the variance that is due to what is missing.
    pub missing_share: Vec<f64>,
    /// Visits at which the main analysis and this one both show the pair apart, in one direction.
    pub still_apart: Vec<f64>,
    /// Visits at which the main analysis shows it apart.
    pub main_apart: Vec<f64>,
}

impl Study {
    /// Who leaves when.
    ///
    /// # Errors
    /// A plan or table that cannot be used, or a fit that failed.
    pub fn dropout(&mut self, plan: &Plan) -> Result<DropoutFindings, Refusal> {
        plan.check()?;
        plan.need_normal("Last values before leaving")?;
        self.answered(plan)?;
        let Some(reading) = self.kept_reading() else { return Err(Refusal::table("The table could not be read.")) };
        let cohort = Cohort::new(reading, plan)?;
        let removed = removals(self.table(), &reading.observations, &cohort, plan)?;
        let fitted = fit(&cohort.data, &cohort.model(plan))
            .map_err(|error| Refusal::plan(crate::remarks::failure(&error, &cohort.groups)))?;
        let ends: Vec<f64> = cohort.data.subjects.iter().filter_map(|s| s.times.last().copied()).collect();
        let group: Vec<usize> = cohort.data.subjects.iter().map(|s| s.group).collect();
        let planned = planned_ends(&cohort);
        let events: Vec<bool> = ends.iter().zip(&group).map(|(&t, &g)| t < planned[g]).collect();
        let log = plan.response.transform == Transform::Log;
        let back = |y: f64| if log { libm::exp(y) } else { y };
        let posterior = fitted.plug_in();
        let residuals = fitted.residuals();
        let mut leavers = Vec::new();
        let mut distances: Vec<Vec<f64>> = vec![Vec::new(); cohort.groups.len()];
        for (k, subject) in cohort.data.subjects.iter().enumerate().filter(|(k, _)| events[*k]) {
            let (t, y) = (ends[k], subject.responses.last().copied().unwrap_or(0.0));
            let course = posterior.estimate(&fitted.course(subject.group, t)).mean;
            let scale = residuals.iter().rfind(|r| r.subject == k).map(|r| (r.around_course, r.independent));
            if let Some((around, _)) = scale {
                let covariance = fitted.subject_covariance(subject.group);
                let since = t - cohort.visits.first().copied().unwrap_or(0.0);
                let z = [1.0, since];
                let pairs = covariance
                    .iter()
                    .enumerate()
                    .flat_map(|(a, row)| row.iter().enumerate().map(move |(b, d)| z[a] * d * z[b]));
                let between: f64 = pairs.sum();
                let sd = fitted.residual_sd(subject.group);
                distances[subject.group].push(around / libm::sqrt(between + sd * sd));
            }
            leavers.push(Leaver {
                subject: cohort.subject_names[k].clone(),
                group: cohort.groups[subject.group].name.clone(),
                last_time: t,
                last_value: back(y),
                course: back(course),
                removed: removed[k].clone(),
            });
        }
        let groups: Vec<Leaving> = (0..cohort.groups.len())
            .map(|g| {
                let own: Vec<usize> = (0..group.len()).filter(|&k| group[k] == g).collect();
                let times: Vec<f64> = own.iter().map(|&k| ends[k]).collect();
                let left: Vec<bool> = own.iter().map(|&k| events[k]).collect();
                let curve = kaplan_meier(&times, &left, plan.comparisons.level);
                let mean = distances[g].iter().sum::<f64>() / distances[g].len().max(1) as f64;
                Leaving {
                    group: cohort.groups[g].name.clone(),
                    subjects: own.len(),
                    left: left.iter().filter(|&&l| l).count(),
                    time: curve.steps.iter().map(|s| s.time).collect(),
                    share: curve.steps.iter().map(|s| s.survival).collect(),
                    lower: curve.steps.iter().map(|s| s.interval.map(|i| i.0)).collect(),
                    upper: curve.steps.iter().map(|s| s.interval.map(|i| i.1)).collect(),
                    leavers_last: (!distances[g].is_empty()).then_some(mean),
                }
            })
            .collect();
        let p = log_rank(&ends, &events, &group, cohort.groups.len()).ok().map(|test| test.p);
        let mut sentences = sentences(&groups, p, plan);
        sentences.extend(ends_said(
            &cohort,
            &planned,
            plan,
            self.kept_reading().map(|r| r.observations.time_word.as_str()),
        ));
        let removal = removal_times(&cohort, &removed, plan.comparisons.level);
        let level = level_times(&cohort, plan, plan.comparisons.level);
        sentences.extend(removal.iter().chain(&level).map(|times| times.sentence.clone()));
        let no_sensitivity = refused(&cohort, &events);
        let estimand = estimand(plan);
        Ok(DropoutFindings { groups, leavers, p, sentences, removal, level, estimand, no_sensitivity })
    }

    /// Gaps when those who left are taken to go on as asked, pooled over imputed tables (Rubin 1987; degrees of freedom
    /// of Barnard & Rubin 1999, conservative under a reference group).
    ///
    /// # Errors
    /// A plan or table that cannot be used, or rows that cannot be filled in.
    pub fn sensitivity(&mut self, plan: &Plan, asked: &Sensitivity) -> Result<SensitivityFindings, Refusal> {
        plan.check()?;
        plan.need_normal("Rows after leaving")?;
        let cohort = Cohort::new(self.answered(plan)?, plan)?;
        let model = cohort.model(plan);
        let failure = |error| Refusal::plan(crate::remarks::failure(&error, &cohort.groups));
        let fitted = fit(&cohort.data, &model).map_err(failure)?;
        let filling = filling(&cohort, asked)?;
        let evaluation = Evaluation::new(plan, &cohort, &fitted, None);
        let main = evaluation.differences();
        let mut places = Vec::new();
        let comparisons = evaluation.comparisons();
        for (k, comparison) in comparisons.iter().enumerate() {
            if let Some([low, high]) = evaluation.overlap(comparison) {
                places.extend(cohort.visits.iter().filter(|&&t| t >= low && t <= high).map(|&t| (k, t)));
            }
        }
        let imputer = Imputer::new(fitted.clone(), &cohort.data, plan.seed).ok_or_else(|| {
            Refusal::plan("Rows after leaving cannot be filled in beside clusters, adjustments or blocks. Leave these out of the plan here.")
        })?;
        let (mut curves, mut covariances, mut failed) = (Vec::new(), Vec::new(), 0);
        let mut most_df = f64::INFINITY;
        for index in 0..asked.tables.clamp(2, 500) as u64 {
            let again = imputer.table(&filling, index).and_then(|table: Data| fit(&table, &model).ok());
            let Some(again) = again else {
                failed += 1;
                continue;
            };
            let contrasts: Vec<_> = places.iter().map(|&(k, t)| comparisons[k].at(&again, t)).collect();
            let posterior = again.corrected();
            let estimates: Vec<_> = contrasts.iter().map(|c| posterior.estimate(c)).collect();
            most_df = estimates.iter().map(|e| e.df).fold(most_df, f64::min);
            curves.push(estimates.iter().map(|e| e.mean).collect::<Vec<f64>>());
            covariances.push(posterior.joint(&contrasts).covariance());
        }
        let pooled = pool_curves(&curves, &covariances, most_df)
            .ok_or_else(|| Refusal::plan("Too few of the imputed tables could be fitted. Choose a simpler model."))?;
        let m = places.len();
        let se: Vec<f64> = (0..m).map(|j| libm::sqrt(pooled.covariance[j * m + j].max(0.0))).collect();
        let (rows, rank) = courseband_engine::correlation_rows(&pooled.covariance, m);
        let maxima = DirectionMaxima::new(&rows, m, rank, DIRECTIONS, plan.seed);
        let least = pooled.df.iter().copied().fold(f64::INFINITY, f64::min).max(1.0);
        let critical = CriticalValues::simultaneous(&maxima, plan.comparisons.level, least, least).at(least);
        let pairs = main.iter().enumerate().map(|(k, d)| {
            let own: Vec<usize> = (0..m).filter(|&j| places[j].0 == k).collect();
            let inside = |t: f64| d.stretches.iter().find(|s: &&Stretch| t >= s.start - 1e-9 && t <= s.end + 1e-9);
            let main_apart: Vec<f64> = own.iter().map(|&j| places[j].1).filter(|&t| inside(t).is_some()).collect();
            let still = own.iter().filter(|&&j| {
                let (low, high) = (pooled.estimate[j] - critical * se[j], pooled.estimate[j] + critical * se[j]);
                match inside(places[j].1).and_then(|s| s.direction) {
                    Some(crate::findings::Direction::Above) => low > 0.0,
                    Some(crate::findings::Direction::Below) => high < 0.0,
                    None => false,
                }
            });
            PooledGap {
                kind: d.kind,
                from: d.from.clone(),
                to: d.to.clone(),
                time: own.iter().map(|&j| places[j].1).collect(),
                estimate: own.iter().map(|&j| pooled.estimate[j]).collect(),
                lower: own.iter().map(|&j| pooled.estimate[j] - critical * se[j]).collect(),
                upper: own.iter().map(|&j| pooled.estimate[j] + critical * se[j]).collect(),
                missing_share: own.iter().map(|&j| pooled.missing_share[j]).collect(),
                still_apart: still.map(|&j| places[j].1).collect(),
                main_apart,
            }
        });
        Ok(SensitivityFindings { asked: asked.clone(), pairs: pairs.collect(), failed })
    }
}

fn refused(cohort: &Cohort, events: &[bool]) -> Option<String> {
    if !events.iter().any(|&e| e) {
        return Some("Everybody is followed to the last visit, so there is nothing to fill in.".into());
    }
    if cohort.visits.len() > MOST_VISITS {
        return Some(format!(
            "There are {} distinct times: without shared visits nobody can say which were missed.",
            cohort.visits.len()
        ));
    }
    let shared = cohort.data.shared.columns() > 0 || cohort.model(&Plan::default()).clusters.count() > 0;
    shared.then(|| "Rows after leaving cannot be filled in beside clusters, adjustments or blocks.".into())
}

fn filling(cohort: &Cohort, asked: &Sensitivity) -> Result<Filling, Refusal> {
    let events: Vec<bool> =
        (cohort.data.subjects.iter()).map(|s| s.times.last().copied() < cohort.visits.last().copied()).collect();
    if let Some(reason) = refused(cohort, &events) {
        return Err(Refusal::plan(reason));
    }
    let index = |name: &String| {
        cohort
            .groups
            .iter()
            .position(|g| &g.name == name)
            .ok_or_else(|| Refusal::plan(format!("\"{name}\" is no group of the table.")))
    };
    let reference = match (&asked.reference, asked.after) {
        (_, After::Own) => None,
        (Some(name), _) => Some(index(name)?),
        (None, _) => return Err(Refusal::plan("Name the reference group.")),
    };
    let shifted: Vec<usize> = asked.groups.iter().map(index).collect::<Result<_, _>>()?;
    let later = |s: &courseband_engine::SubjectRows| {
        let last = s.times.last().copied().unwrap_or(f64::INFINITY);
        cohort.visits.iter().copied().filter(|&t| t > last).collect()
    };
    let after = |g: usize| match (asked.after, reference) {
        (After::Jump, Some(r)) if r != g => AfterLeaving::Jump(r),
        (After::Increments, Some(r)) if r != g => AfterLeaving::Increments(r),
        _ => AfterLeaving::Own,
    };
    let groups = cohort.groups.len();
    Ok(Filling {
        times: cohort.data.subjects.iter().map(later).collect(),
        after: (0..groups).map(after).collect(),
        shift: (0..groups)
            .map(|g| if shifted.is_empty() || shifted.contains(&g) { asked.delta } else { 0.0 })
            .collect(),
    })
}

/// When each group's follow-up ends as planned: its own last visit. Where nobody shares the last visit, within a
/// twentieth of the follow-up of it.
fn planned_ends(cohort: &Cohort) -> Vec<f64> {
    let first = cohort.visits.first().copied().unwrap_or(0.0);
    (0..cohort.groups.len())
        .map(|g| {
            let end = cohort.supports[g][1];
            let own = || cohort.data.subjects.iter().filter(|s| s.group == g);
            let there = own().filter(|s| s.times.last() == Some(&end)).count();
            let shared = there > 1 || own().count() < 3;
            if shared { end } else { end - 0.05 * (end - first) }
        })
        .collect()
}

/// What is taken as the planned end, where that is not the last visit of all.
fn ends_said(cohort: &Cohort, planned: &[f64], plan: &Plan, time_word: Option<&str>) -> Vec<String> {
    let last = cohort.visits.last().copied().unwrap_or(0.0);
    let word = plan.words.time.as_deref().or(time_word).unwrap_or("time");
    let mut all = Vec::new();
    let early = |g: &usize| cohort.supports[*g][1] < last - 0.05 * (last - cohort.visits[0]);
    for g in (0..planned.len()).filter(early) {
        all.push(format!(
            "{} ends at {word} {}, before the others: that is taken as its planned end.",
            cohort.groups[g].name,
            plain(cohort.supports[g][1])
        ));
    }
    if (0..planned.len()).any(|g| planned[g] < cohort.supports[g][1]) {
        all.push("Days of the last visit differ between subjects: being seen in the last twentieth of the follow-up counts as staying.".into());
    }
    all
}

fn sentences(groups: &[Leaving], p: Option<f64>, plan: &Plan) -> Vec<String> {
    let words = &plan.words.subjects;
    let counts: Vec<String> = groups.iter().map(|g| format!("{} of {} in {}", g.left, g.subjects, g.group)).collect();
    let mut all = vec![format!("Before the last visit leave: {}.", joined(&counts))];
    if let Some(p) = p {
        let how = if p < 0.05 {
            "Leaving differs between the groups"
        } else {
            "Leaving is not shown to differ between the groups"
        };
        let p = if p < 0.001 { "p < 0.001".into() } else { format!("p = {}", number(p, if p < 0.1 { 3 } else { 2 })) };
        all.push(format!("{how} (log-rank {p})."));
    }
    for g in groups {
        // Normal limits at 5 %, shared by the groups.
        let limit = normal_quantile(1.0 - 0.025 / groups.len() as f64);
        if let Some(last) = g.leavers_last.filter(|last| last.abs() * libm::sqrt(g.left as f64) > limit && g.left >= 3)
        {
            let side = if last > 0.0 { "above" } else { "below" };
            all.push(format!(
                "In {} those who leave were last seen {} their group's course, by {} standard deviations on average: \
                 who leaves seems to depend on the values.",
                g.group,
                side,
                number(last.abs(), 1)
            ));
        }
    }
    if groups.iter().all(|g| g.left == 0) {
        return vec![format!(
            "All {words} are followed to the last visit, {}.",
            plain(groups.iter().map(|g| g.subjects as f64).sum())
        )];
    }
    all
}

fn estimand(plan: &Plan) -> String {
    format!(
        "The main analysis estimates the courses as if every {} had been followed through all visits. It holds if whether a visit is \
         missing depends only on what was measured before, the value that led to removal among it (missing at random). If that value \
         is not in the table, this fails.",
        plan.words.subject
    )
}
