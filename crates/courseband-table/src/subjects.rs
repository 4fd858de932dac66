//! Who is who: ids that restart in each group, missing groups, subjects that change group.

use crate::error::{GroupChange, TableError};
use crate::groups::is_near;
use crate::labels::Labels;
use crate::text::{folded, quoted};
use std::collections::HashMap;

/// One subject: an id in one group.
#[derive(Debug, Clone)]
pub(crate) struct Subject {
    pub(crate) id: u32,
    pub(crate) group: u32,
    first_row: usize,
    earliest: f64,
    latest: f64,
    rows: usize,
}

/// The subjects, in order of first appearance, and the subject of each row.
#[derive(Debug, Default)]
pub(crate) struct Subjects {
    pub(crate) list: Vec<Subject>,
    /// Index into `list`; [`Labels::NONE`] where the group is not known.
    pub(crate) of_row: Vec<u32>,
    /// True for ids under several groups.
    pub(crate) restarts: Vec<bool>,
    /// Rows whose group was taken from the subject's other rows.
    pub(crate) filled: Vec<usize>,
}

/// Tells the subjects apart. All slices have one entry per row.
pub(crate) fn tell_apart(ids: &Labels, groups: &Labels, times: &[f64]) -> Subjects {
    let mut known: HashMap<(u32, u32), u32> = HashMap::new();
    let mut found = Subjects { of_row: vec![Labels::NONE; times.len()], ..Subjects::default() };
    let mut last = ((Labels::NONE, Labels::NONE), 0);
    for (row, (&id, &group)) in ids.index.iter().zip(&groups.index).enumerate() {
        if group == Labels::NONE {
            continue;
        }
        if last.0 != (id, group) {
            let slot = *known.entry((id, group)).or_insert_with(|| {
                found.list.push(Subject {
                    id,
                    group,
                    first_row: row,
                    earliest: times[row],
                    latest: times[row],
                    rows: 0,
                });
                found.list.len() as u32 - 1
            });
            last = ((id, group), slot);
        }
        let subject = &mut found.list[last.1 as usize];
        subject.earliest = subject.earliest.min(times[row]);
        subject.latest = subject.latest.max(times[row]);
        subject.rows += 1;
        found.of_row[row] = last.1;
    }
    found.fill_missing_groups(ids);
    found.order();
    found
}

impl Subjects {
    /// A row without a group belongs to the id's only subject.
    fn fill_missing_groups(&mut self, ids: &Labels) {
        let mut only = vec![(0usize, 0u32); ids.names.len()];
        for (index, subject) in self.list.iter().enumerate() {
            let entry = &mut only[subject.id as usize];
            *entry = (entry.0 + 1, index as u32);
        }
        self.restarts = only.iter().map(|(count, _)| *count > 1).collect();
        for (row, slot) in self.of_row.iter_mut().enumerate() {
            if *slot == Labels::NONE
                && let (1, index) = only[ids.index[row] as usize]
            {
                *slot = index;
                let subject = &mut self.list[index as usize];
                subject.first_row = subject.first_row.min(row);
                subject.rows += 1;
                self.filled.push(row);
            }
        }
    }

    /// Order of first appearance, also where the first row had no group.
    fn order(&mut self) {
        let mut order: Vec<u32> = (0..self.list.len() as u32).collect();
        order.sort_by_key(|&index| self.list[index as usize].first_row);
        let mut place = vec![0; order.len()];
        order.iter().enumerate().for_each(|(at, &index)| place[index as usize] = at as u32);
        self.list = order.iter().map(|&index| self.list[index as usize].clone()).collect();
        self.of_row.iter_mut().filter(|slot| **slot != Labels::NONE).for_each(|slot| *slot = place[*slot as usize]);
    }

    /// Subjects by id, for ids under several groups.
    fn shared_ids(&self) -> Vec<(u32, Vec<usize>)> {
        let mut shared: Vec<(u32, Vec<usize>)> = Vec::new();
        let mut place: HashMap<u32, usize> = HashMap::new();
        for (index, subject) in self.list.iter().enumerate().filter(|(_, subject)| self.restarts[subject.id as usize]) {
            let at = *place.entry(subject.id).or_insert_with(|| {
                shared.push((subject.id, Vec::new()));
                shared.len() - 1
            });
            shared[at].1.push(index);
        }
        shared
    }

    /// Refuses ids whose groups do not overlap in time; says which ids do, in words.
    ///
    /// # Errors
    /// [`TableError::ChangesGroup`].
    pub(crate) fn check_shared_ids(
        &self,
        ids: &Labels,
        groups: &Labels,
        column: &str,
        group_column: &str,
        line: impl Fn(usize) -> usize,
    ) -> Result<Option<String>, TableError> {
        let shared = self.shared_ids();
        for (id, subjects) in &shared {
            if let Some((first, second)) = self.apart_in_time(subjects) {
                return Err(self.changes_group(*id, first, second, ids, groups, column, line));
            }
        }
        if shared.is_empty() {
            return Ok(None);
        }
        let names: Vec<&str> = shared.iter().map(|(id, _)| ids.names[*id as usize].as_str()).collect();
        let who = match names.as_slice() {
            [one] => format!("Id {} occurs", quoted(one)),
            [one, two] => format!("Ids {} and {} occur", quoted(one), quoted(two)),
            [first, .., last] => format!("{} ids, {} to {}, occur", names.len(), quoted(first), quoted(last)),
            [] => String::new(),
        };
        let every = shared.iter().all(|(_, subjects)| subjects.len() == groups.names.len());
        let under = if every { "every" } else { "more than one" };
        Ok(Some(format!("{who} under {under} {group_column} at overlapping times")))
    }

    /// Rows of ids under several groups, but for those of the group that an id clearly stands in most.
    pub(crate) fn doubtful_rows(&self) -> Vec<usize> {
        let mut doubtful = vec![false; self.list.len()];
        for (_, subjects) in self.shared_ids() {
            let most = subjects.iter().map(|&subject| self.list[subject].rows).max().unwrap_or(0);
            let at_most: Vec<usize> = subjects.iter().copied().filter(|&s| self.list[s].rows == most).collect();
            subjects.iter().for_each(|&subject| doubtful[subject] = at_most != [subject]);
        }
        let is_doubtful = |slot: u32| slot != Labels::NONE && doubtful[slot as usize];
        (0..self.of_row.len()).filter(|&row| is_doubtful(self.of_row[row])).collect()
    }

    /// Two subjects of one id with time between them: they are not all linked by overlapping times.
    fn apart_in_time(&self, subjects: &[usize]) -> Option<(usize, usize)> {
        let mut order = subjects.to_vec();
        order.sort_by(|&a, &b| self.list[a].earliest.total_cmp(&self.list[b].earliest));
        let mut latest = self.list[order[0]].latest;
        for pair in order.windows(2) {
            if self.list[pair[1]].earliest > latest {
                return Some((pair[0], pair[1]));
            }
            latest = latest.max(self.list[pair[1]].latest);
        }
        None
    }

    fn changes_group(
        &self,
        id: u32,
        first: usize,
        second: usize,
        ids: &Labels,
        groups: &Labels,
        column: &str,
        line: impl Fn(usize) -> usize,
    ) -> TableError {
        let rows = |subject: usize| -> Vec<usize> {
            let own = self.of_row.iter().enumerate().filter(|(_, of)| **of == subject as u32);
            own.map(|(row, _)| line(row)).collect()
        };
        let name = |subject: usize| groups.names[self.list[subject].group as usize].clone();
        let near = is_near(&folded(&name(first)), &folded(&name(second)));
        TableError::ChangesGroup(Box::new(GroupChange {
            column: column.to_string(),
            subject: ids.names[id as usize].clone(),
            first: (name(first), rows(first)),
            second: (name(second), rows(second)),
            near,
        }))
    }
}
