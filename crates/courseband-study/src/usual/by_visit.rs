//! The plan's rows as subjects by visits, where visits are shared.

use super::print::{counted, days};
use crate::cohort::Cohort;
use courseband_engine::usual::Panel;

/// Rows at visits that subjects share.
pub(super) struct ByVisit {
    /// On the modelled scale; replicates averaged.
    pub(super) panel: Panel,
    /// Rows of each subject at each shared visit.
    rows: Vec<Vec<usize>>,
    /// Rows at times that are not shared.
    pub(super) unshared_rows: usize,
}

/// A visit is shared where at least half of the subjects followed at that time have a value.
const LEAST_SHARE: f64 = 0.5;
/// Below this share of rows at shared visits the times count as irregular.
const LEAST_ROWS: f64 = 0.8;
/// Most shared visits.
const MOST_VISITS: usize = 300;

impl ByVisit {
    /// Rows by visit, or why that is not possible.
    pub(super) fn new(cohort: &Cohort, time_word: &str, subjects: &str) -> Result<ByVisit, String> {
        let shared = shared_visits(cohort);
        let total = cohort.data.rows();
        let at = |t: f64| shared.binary_search_by(|v| v.total_cmp(&t)).ok();
        let on_shared = cohort.data.subjects.iter().flat_map(|s| &s.times).filter(|&&t| at(t).is_some()).count();
        if shared.len() < 2 || (on_shared as f64) < LEAST_ROWS * total as f64 {
            return Err(irregular(cohort, time_word, subjects, shared.len(), on_shared));
        }
        if shared.len() > MOST_VISITS {
            return Err(format!(
                "There are {} shared visits; analyses by visit are offered for at most {MOST_VISITS}.",
                shared.len()
            ));
        }
        let mut panel = Panel {
            group_of_subject: cohort.data.subjects.iter().map(|s| s.group).collect(),
            groups: cohort.data.groups,
            times: shared.clone(),
            values: Vec::with_capacity(cohort.data.subjects.len()),
        };
        let mut rows = Vec::new();
        for subject in &cohort.data.subjects {
            let mut sums = vec![(0.0, 0_usize); shared.len()];
            for (&t, &y) in subject.times.iter().zip(&subject.responses) {
                if let Some(visit) = at(t) {
                    sums[visit].0 += y;
                    sums[visit].1 += 1;
                }
            }
            rows.push(sums.iter().map(|(_, count)| *count).collect());
            panel.values.push(sums.iter().map(|&(sum, count)| (count > 0).then(|| sum / count as f64)).collect());
        }
        Ok(ByVisit { panel, rows, unshared_rows: total - on_shared })
    }

    /// Rows of a subject at shared visits.
    pub(super) fn rows_of(&self, subject: usize) -> usize {
        self.rows[subject].iter().sum()
    }

    /// Rows at the shared visits that `keep` marks.
    pub(super) fn rows_at(&self, keep: &[bool]) -> usize {
        let of_subject = |row: &Vec<usize>| row.iter().zip(keep).filter(|(_, k)| **k).map(|(n, _)| n).sum::<usize>();
        self.rows.iter().map(of_subject).sum()
    }

    /// The same without visits for which `keep` is false.
    pub(super) fn only(&self, keep: &[bool]) -> Panel {
        let kept = |row: &[Option<f64>]| row.iter().zip(keep).filter(|(_, k)| **k).map(|(y, _)| *y).collect();
        Panel {
            group_of_subject: self.panel.group_of_subject.clone(),
            groups: self.panel.groups,
            times: self.panel.times.iter().zip(keep).filter(|(_, k)| **k).map(|(t, _)| *t).collect(),
            values: self.panel.values.iter().map(|row| kept(row)).collect(),
        }
    }
}

fn shared_visits(cohort: &Cohort) -> Vec<f64> {
    let ends = |end: fn(&[f64]) -> Option<&f64>| {
        let mut sorted: Vec<f64> = cohort.data.subjects.iter().filter_map(|s| end(&s.times).copied()).collect();
        sorted.sort_by(f64::total_cmp);
        sorted
    };
    let (first, last) = (ends(|t| t.first()), ends(|t| t.last()));
    let is_shared = |(k, t): (usize, &f64)| {
        let begun = first.partition_point(|x| x <= t);
        let ended = last.partition_point(|x| x < t);
        let seen: usize = cohort.groups.iter().map(|g| g.at_visit[k]).sum();
        (seen >= 2 && seen as f64 >= LEAST_SHARE * (begun - ended) as f64).then_some(*t)
    };
    cohort.visits.iter().enumerate().filter_map(is_shared).collect()
}

fn irregular(cohort: &Cohort, time_word: &str, subjects: &str, shared: usize, rows: usize) -> String {
    let mut seen: Vec<usize> =
        (0..cohort.visits.len()).map(|k| cohort.groups.iter().map(|g| g.at_visit[k]).sum()).collect();
    seen.sort_unstable();
    let middle = seen[seen.len() / 2];
    let most = if shared < 2 {
        "too few of them are shared".to_string()
    } else {
        format!("only {rows} of {} rows fall on times that at least half share", cohort.data.rows())
    };
    format!(
        "The {} {subjects} were measured at {}, half of them shared by {middle} {subjects} or fewer: {most}. Analyses by \
         {time_word} need common visits. The curves and the straight lines use every row at its own time.",
        cohort.data.subjects.len(),
        counted(cohort.visits.len(), "time", "different times"),
    )
}

/// What all analyses by visit must say: replicates averaged, rows at unshared times.
pub(super) fn notes(cohort: &Cohort, by_visit: Option<&ByVisit>, time_word: &str, log: bool) -> Vec<String> {
    let mut notes = Vec::new();
    let repeated = |s: &courseband_engine::SubjectRows| s.times.windows(2).filter(|w| w[0] == w[1]).count();
    let extra: usize = cohort.data.subjects.iter().map(repeated).sum();
    if extra > 0 {
        let scale = if log { ", on the log scale" } else { "" };
        notes.push(format!(
            "Several rows of one subject at one time are averaged{scale} in every usual analysis but the straight lines: \
             {extra} rows are second or further ones."
        ));
    }
    if let Some(by_visit) = by_visit
        && by_visit.unshared_rows > 0
    {
        let shared = |t: &f64| by_visit.panel.times.contains(t);
        let unshared: Vec<f64> = cohort.visits.iter().copied().filter(|t| !shared(t)).collect();
        notes.push(format!(
            "{} at {} are not used by the analyses by visit: fewer than half of those followed have a value there.",
            counted(by_visit.unshared_rows, "row", "rows"),
            days(time_word, &unshared)
        ));
    }
    notes
}
