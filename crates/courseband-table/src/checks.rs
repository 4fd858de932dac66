//! Problems that show in the sorted observations: duplicates, single observations, odd values.

mod course;

use crate::long::LongTable;
use crate::observations::Observations;
use crate::problems::Problems;
use crate::reading::ProblemKind;
use crate::request::Role;
use crate::roles::Roles;
use crate::text::{folded, quoted};
use std::collections::HashMap;

/// Looks at the sorted observations. `rows`: the row of the long form of each.
pub(crate) fn check(
    observations: &Observations,
    table: &LongTable<'_>,
    roles: &Roles,
    rows: &[u32],
    problems: &mut Problems,
    notes: &mut Vec<String>,
) {
    let mut lister = Lister { observations, table, roles, rows, problems };
    let runs = runs(&observations.subject);
    for &(start, end) in &runs {
        lister.duplicates(start, end);
        if end - start == 1 {
            lister.add(ProblemKind::OneObservation, start, Role::Subject, || {
                "This subject has one observation only. It is kept.".to_string()
            });
        }
    }
    for far in course::far_values(observations, &runs) {
        lister.add(ProblemKind::FarFromCourse, far.at, Role::Response, || {
            format!("Far from this subject's other values: about {} would lie between its neighbours. Check it; it is kept.", three_digits(far.expected))
        });
    }
    lister.near_ids();
    if let Some(note) = constant_start(observations) {
        notes.push(note);
    }
}

struct Lister<'a> {
    observations: &'a Observations,
    table: &'a LongTable<'a>,
    roles: &'a Roles,
    rows: &'a [u32],
    problems: &'a mut Problems,
}

impl Lister<'_> {
    fn add(&mut self, kind: ProblemKind, at: usize, role: Role, message: impl FnOnce() -> String) {
        let row = self.rows[at] as usize;
        if let Some(column) = self.roles.column(role) {
            let (shown, value) = (self.table.shown_column(row, column), self.table.cell(row, column));
            self.problems.add(kind, self.table.line(row), shown, value, message);
        }
    }

    /// Ids of one group that differ only by case, white space or leading zeros.
    fn near_ids(&mut self) {
        let observations = self.observations;
        let mut first: HashMap<(u32, String), usize> = HashMap::new();
        for (start, _) in runs(&observations.subject) {
            let own = observations.subject[start] as usize;
            let info = &observations.subjects[own];
            let earlier = *first.entry((info.group, loose_id(&info.name))).or_insert(own);
            if earlier != own {
                let (name, other) = (&info.name, &observations.subjects[earlier].name);
                self.add(ProblemKind::NearId, start, Role::Subject, || {
                    format!("Ids {} and {} are nearly the same. They are kept as two subjects; write one id alike throughout.", quoted(other), quoted(name))
                });
            }
        }
    }

    /// Later rows of a subject at a time that it has already.
    fn duplicates(&mut self, start: usize, end: usize) {
        let observations = self.observations;
        let mut first = start;
        for at in start + 1..end {
            if observations.time[at] != observations.time[first] {
                first = at;
                continue;
            }
            let name = &observations.subjects[observations.subject[at] as usize].name;
            let same = observations.response[at] == observations.response[first];
            let line = observations.line[first];
            self.add(ProblemKind::Duplicate, at, Role::Time, || {
                let hint = if same { " The values are equal: perhaps it was entered twice." } else { "" };
                format!("Subject {} has this time in row {line} already. Both rows are kept.{hint}", quoted(name))
            });
        }
    }
}

/// A number to three digits.
fn three_digits(value: f64) -> f64 {
    format!("{value:.2e}").parse().unwrap_or(value)
}

/// Equal for ids that a person may have meant to be one: case, white space and leading zeros apart.
fn loose_id(name: &str) -> String {
    let folded = folded(name);
    match folded.parse::<u64>() {
        Ok(number) => number.to_string(),
        Err(_) => folded,
    }
}

/// Start and end of each run of equal values.
fn runs(values: &[u32]) -> Vec<(usize, usize)> {
    let mut runs = Vec::new();
    let mut start = 0;
    for at in 1..=values.len() {
        if at == values.len() || values[at] != values[start] {
            runs.push((start, at));
            start = at;
        }
    }
    runs
}

/// All responses at the first time are equal, later ones are not: such as percent of each subject's own start.
fn constant_start(observations: &Observations) -> Option<String> {
    let first = observations.time.iter().copied().fold(f64::INFINITY, f64::min);
    let at_first = |wanted: bool| {
        observations
            .time
            .iter()
            .zip(&observations.response)
            .filter(move |(time, _)| (**time == first) == wanted)
            .map(|(_, value)| *value)
    };
    let value = at_first(true).next()?;
    let count = at_first(true).count();
    let constant = at_first(true).all(|other| other == value);
    let changes = at_first(false).any(|other| other != value);
    (count >= 3 && constant && changes).then(|| {
        format!(
            "All {count} responses at {} {first} are {value}. If they are in percent of each subject's own start, the start says nothing about the groups; the values as measured say more.",
            observations.time_word
        )
    })
}
