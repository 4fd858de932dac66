//! Planned removal told apart from missed visits, and the time to a level: Kaplan-Meier curves with log-rank tests.

use crate::cohort::Cohort;
use crate::plan::{Plan, Transform};
use crate::refusal::Refusal;
use crate::sentences::{joined, number, plain};
use courseband_engine::usual::{kaplan_meier, log_rank};
use courseband_table::{Observations, Table};
use serde::Serialize;

/// Times to an event, group by group.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct EventTimes {
    /// One per group.
    pub groups: Vec<EventGroup>,
    /// Chance of such different times, were they alike in all groups (log-rank); `null` where it is undefined.
    pub p: Option<f64>,
    /// What is seen, in one sentence.
    pub sentence: String,
}

/// Times to an event in one group.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct EventGroup {
    /// Group.
    pub group: String,
    /// Subjects.
    pub subjects: usize,
    /// Subjects with the event; the others were last seen without it.
    pub events: usize,
    /// Times at which the share without the event falls, and that share just after.
    pub time: Vec<f64>,
    /// Share without the event.
    pub share: Vec<f64>,
    /// Lower limits.
    pub lower: Vec<Option<f64>>,
    /// Upper limits.
    pub upper: Vec<Option<f64>>,
    /// First time at which half or fewer are without it; `null` where that is not reached.
    pub median: Option<f64>,
}

/// Why each subject of the cohort was removed as planned; `None` for the others.
///
/// # Errors
/// A column or subject that the table does not have.
pub(crate) fn removals(
    table: &Table,
    observations: &Observations,
    cohort: &Cohort,
    plan: &Plan,
) -> Result<Vec<Option<String>>, Refusal> {
    if let Some(name) = plan.removed.iter().find(|name| !cohort.subject_names.contains(name)) {
        return Err(Refusal::plan(format!("removed names \"{name}\", which is no subject of the table.")));
    }
    if let Some(column) = plan.columns.removal.as_ref().filter(|column| !table.names().contains(column)) {
        return Err(Refusal::plan(format!("columns.removal is \"{column}\", which is no column of the table.")));
    }
    let written = |subject: usize| {
        let column = plan.columns.removal.as_ref()?;
        let lines = cohort.places[subject].iter().map(|&k| observations.line[k] as usize);
        let mut cells = lines.filter_map(|line| table.cell_at(line, column)).map(str::trim);
        let told = cells.rfind(|cell| !cell.is_empty() && !is_no(cell))?;
        Some(told.to_string())
    };
    let by_hand = |subject: usize| plan.removed.contains(&cohort.subject_names[subject]).then(|| "by hand".to_string());
    Ok((0..cohort.data.subjects.len()).map(|subject| written(subject).or_else(|| by_hand(subject))).collect())
}

/// Cells that say that nothing happened.
fn is_no(cell: &str) -> bool {
    ["0", "no", "n", "none", "false", "-", "na", "n/a", "."].contains(&cell.to_lowercase().as_str())
}

/// Time to planned removal; those who miss visits otherwise, and those followed to the end, were last seen without it.
/// `None` where nobody is known to have been removed.
pub(crate) fn removal_times(cohort: &Cohort, removed: &[Option<String>], level: f64) -> Option<EventTimes> {
    let events: Vec<bool> = removed.iter().map(Option::is_some).collect();
    let ends = cohort.data.subjects.iter().map(|s| s.times.last().copied().unwrap_or(0.0)).collect();
    events.contains(&true).then(|| event_times(cohort, ends, &events, level, "Removed as planned"))
}

/// Time to the plan's level, coming from where a subject starts: the first visit at or beyond it. `None` without a level.
pub(crate) fn level_times(cohort: &Cohort, plan: &Plan, level: f64) -> Option<EventTimes> {
    let target = plan.comparisons.target?;
    let sought = if plan.response.transform == Transform::Log { libm::log(target) } else { target };
    let subjects = &cohort.data.subjects;
    let first: f64 = subjects.iter().filter_map(|s| s.responses.first()).sum::<f64>() / subjects.len().max(1) as f64;
    let side = if first < sought { 1.0 } else { -1.0 };
    let (mut times, mut events) = (Vec::new(), Vec::new());
    for subject in subjects {
        let at = subject.responses.iter().position(|y| side * (y - sought) >= 0.0);
        events.push(at.is_some());
        times.push(at.or(subject.times.len().checked_sub(1)).map_or(0.0, |k| subject.times[k]));
    }
    Some(event_times(cohort, times, &events, level, &format!("Have reached {}", plain(target))))
}

fn event_times(cohort: &Cohort, times: Vec<f64>, events: &[bool], level: f64, what: &str) -> EventTimes {
    let group: Vec<usize> = cohort.data.subjects.iter().map(|s| s.group).collect();
    let groups: Vec<EventGroup> = (cohort.groups.iter().enumerate())
        .map(|(g, info)| {
            let own: Vec<usize> = (0..group.len()).filter(|&k| group[k] == g).collect();
            let ends: Vec<f64> = own.iter().map(|&k| times[k]).collect();
            let had: Vec<bool> = own.iter().map(|&k| events[k]).collect();
            let curve = kaplan_meier(&ends, &had, level);
            EventGroup {
                group: info.name.clone(),
                subjects: own.len(),
                events: had.iter().filter(|&&e| e).count(),
                time: curve.steps.iter().map(|s| s.time).collect(),
                share: curve.steps.iter().map(|s| s.survival).collect(),
                lower: curve.steps.iter().map(|s| s.interval.map(|i| i.0)).collect(),
                upper: curve.steps.iter().map(|s| s.interval.map(|i| i.1)).collect(),
                median: curve.median,
            }
        })
        .collect();
    let p = log_rank(&times, events, &group, cohort.groups.len()).ok().map(|test| test.p);
    let counts: Vec<String> = (groups.iter())
        .map(|g| {
            let half = g.median.map_or_else(|| "half not reached".to_string(), |t| format!("half by {}", plain(t)));
            format!("{} of {} in {} ({half})", g.events, g.subjects, g.group)
        })
        .collect();
    let differ = p.map_or_else(String::new, |p| {
        let p =
            if p < 0.001 { "p < 0.001".to_string() } else { format!("p = {}", number(p, if p < 0.1 { 3 } else { 2 })) };
        format!("; log-rank {p}")
    });
    EventTimes { sentence: format!("{what}, as seen at visits: {}{differ}.", joined(&counts)), groups, p }
}
