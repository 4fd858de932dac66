//! The rules, role by role.

use super::*;
use crate::names::words;
use crate::number::number;

impl Finder<'_> {
    pub(super) fn subject_by_name(&mut self) {
        if !self.is_open(Role::Subject) {
            return;
        }
        // A column whose every cell is different numbers the rows, not the subjects.
        let rows = self.table.rows();
        let repeated: Vec<usize> = self
            .free()
            .into_iter()
            .filter(|&column| rows < 4 || self.profiles[column].distinct * 10 <= rows * 9)
            .collect();
        self.take_by_name(Role::Subject, &repeated, 3);
    }

    pub(super) fn time_by_name(&mut self) {
        if !self.is_open(Role::Time) {
            return;
        }
        let timely: Vec<usize> = self.free().into_iter().filter(|&column| self.profiles[column].is_timely()).collect();
        let changing: Vec<usize> = match self.roles.column(Role::Subject) {
            Some(subject) => timely.iter().copied().filter(|&column| self.varying(subject, column).0 > 0).collect(),
            None => timely.clone(),
        };
        if self.take_by_name(Role::Time, &changing, 2) {
            return;
        }
        // A clear name with cells that cannot be read: reading it will say which.
        let clear: Vec<usize> = self
            .free()
            .into_iter()
            .filter(|&column| {
                let profile = &self.profiles[column];
                let some_times = (profile.numbers + profile.worded_times) * 2 >= profile.present();
                profile.distinct > 1 && (some_times || clarity(self.name(column), Role::Time) == 4)
            })
            .collect();
        self.take_by_name(Role::Time, &clear, 3);
    }

    pub(super) fn subject_by_contents(&mut self) {
        if !self.is_open(Role::Subject) {
            return;
        }
        let rows = self.table.rows();
        let Some(time) = self.roles.column(Role::Time) else {
            let free = self.free();
            self.take_by_name(Role::Subject, &free, 3);
            return;
        };
        let mut candidates = Vec::new();
        for column in self.free() {
            let profile = &self.profiles[column];
            let label = profile.whole == profile.numbers;
            let other =
                [Role::Group, Role::Cluster, Role::Response].iter().any(|&role| clarity(self.name(column), role) >= 2);
            let fits = label
                && !other
                && !is_beside(self.name(column))
                && profile.distinct >= 2
                && profile.distinct * 2 <= rows;
            if fits && self.repeats(&[column, time]) < 0.05 {
                candidates.push(column);
            }
        }
        self.take_only(
            Role::Subject,
            &candidates,
            "Its labels come back at different times, and no other column does so.",
        );
        if self.is_open(Role::Subject) && candidates.is_empty() {
            let free = self.free();
            self.take_by_name(Role::Subject, &free, 3);
        }
    }

    pub(super) fn time_by_contents(&mut self) {
        let (true, Some(subject)) = (self.is_open(Role::Time), self.roles.column(Role::Subject)) else {
            return;
        };
        let rows = self.table.rows();
        let mut candidates = Vec::new();
        for column in self.free() {
            let profile = &self.profiles[column];
            let named_else =
                [Role::Group, Role::Cluster, Role::Response].iter().any(|&role| clarity(self.name(column), role) >= 3);
            let shared = profile.distinct >= 2 && profile.distinct * 2 <= rows;
            if profile.is_timely() && shared && !named_else && self.repeats(&[subject, column]) < 0.05 {
                candidates.push(column);
            }
        }
        self.take_only(Role::Time, &candidates, "Its values come back in different subjects, once in each.");
    }

    /// Takes a single candidate, asks about several.
    fn take_only(&mut self, role: Role, candidates: &[usize], reason: &str) {
        match candidates {
            [] => {}
            [one] => {
                self.roles.set(role, *one, reason);
                self.close(role);
            }
            rivals => {
                self.ask(role, rivals);
                self.close(role);
            }
        }
    }

    pub(super) fn cluster(&mut self) {
        if !self.is_open(Role::Cluster) {
            return;
        }
        self.close(Role::Cluster);
        let mut candidates = Vec::new();
        for column in self.free() {
            if clarity(self.name(column), Role::Cluster) >= 3 && self.profiles[column].distinct > 1 {
                match self.why_no_cluster(column) {
                    Some(why) => self
                        .roles
                        .forget(Role::Cluster, format!("Column {} {why}: not used.", quoted(self.name(column)))),
                    None => candidates.push(column),
                }
            }
        }
        match candidates.as_slice() {
            [] if self.roles.reasons[Role::Cluster as usize].is_empty() => {
                self.roles.forget(Role::Cluster, "No column is named like a cage, litter or site.".to_string());
            }
            [] => {}
            [one] => {
                let name = quoted(self.name(*one));
                self.roles.set(
                    Role::Cluster,
                    *one,
                    format!(
                        "The name {name} says so, each subject has one of its values, and several subjects share one."
                    ),
                );
            }
            _ => {
                self.take_by_name(Role::Cluster, &candidates, 3);
            }
        }
    }

    /// Why a column named like a cage, litter or site is none by its values.
    fn why_no_cluster(&mut self, column: usize) -> Option<&'static str> {
        if self.is_only_response(column) {
            return Some("holds the only further numbers, so it is the response and no cluster");
        }
        let subject = self.roles.column(Role::Subject)?;
        let key: Vec<usize> = [Some(subject), self.roles.column(Role::Group)].into_iter().flatten().collect();
        let (changing, subjects, values) = self.within(&key, column);
        if changing > 0 {
            return Some("changes within subjects");
        }
        (values >= subjects && subjects > 1).then_some("has one subject in each")
    }

    /// Numbers, where no other column is left that could be the response.
    fn is_only_response(&self, column: usize) -> bool {
        let numeric = |column: usize| self.profiles[column].is_numeric(0.5);
        self.is_open(Role::Response)
            && numeric(column)
            && !self.free().into_iter().any(|other| other != column && numeric(other))
    }

    /// Over the subjects told apart by `key`: how many have several values of a column, how many there
    /// are, and how many values the column has.
    fn within(&mut self, key: &[usize], column: usize) -> (usize, usize, usize) {
        let mut keys = vec![[0u32; 3]; self.table.rows()];
        for (slot, &part) in key.iter().take(2).chain([&column]).enumerate() {
            let codes = self.codes_of(part);
            keys.iter_mut().zip(codes).for_each(|(key, &code)| key[slot.min(2)] = code);
        }
        if key.len() == 1 {
            // Subject, no second part, value.
            keys.iter_mut().for_each(|key| *key = [key[0], 0, key[1]]);
        }
        keys.retain(|key| key[0] != 0 && key[2] != 0);
        keys.sort_unstable();
        keys.dedup();
        let per_subject = keys.chunk_by(|a, b| a[..2] == b[..2]);
        let (mut changing, mut subjects) = (0, 0);
        for values in per_subject {
            subjects += 1;
            changing += usize::from(values.len() > 1);
        }
        let mut values: Vec<u32> = keys.iter().map(|key| key[2]).collect();
        values.sort_unstable();
        values.dedup();
        (changing, subjects, values.len())
    }

    pub(super) fn group(&mut self) {
        if !self.is_open(Role::Group) {
            return;
        }
        let few: Vec<usize> = self
            .free()
            .into_iter()
            .filter(|&column| self.profiles[column].distinct <= self.table.rows() / 2 + 1)
            .collect();
        let candidates = self.group_candidates();
        let named: Vec<usize> = few
            .into_iter()
            .filter(|&column| {
                let clear = clarity(self.name(column), Role::Group);
                let words = clear == 3 && self.profiles[column].numbers == 0 && self.profiles[column].distinct <= 60;
                clear >= 4 || words || candidates.contains(&column) || self.restarts_under(column)
            })
            .collect();
        if self.take_by_name(Role::Group, &named, 3) {
            return;
        }
        let beside: Vec<usize> = candidates.iter().copied().filter(|&column| is_beside(self.name(column))).collect();
        let plain: Vec<usize> = candidates.iter().copied().filter(|column| !beside.contains(column)).collect();
        let best = self.without_copies(if plain.is_empty() { beside } else { plain });
        let best = if best.is_empty() { self.restarting() } else { best };
        if let ([], Some(place)) = (best.as_slice(), self.few_places()) {
            let reason = "It is named like a site or cage, but no other column divides the subjects, and it does so into few parts.";
            self.roles.set(Role::Group, place, reason);
            self.close(Role::Group);
            return;
        }
        self.take_only(
            Role::Group,
            &best,
            "It has few values, each subject has one of them, and several subjects share it.",
        );
        if self.is_open(Role::Group) {
            self.close(Role::Group);
            let columns = 0..self.table.columns.len();
            let empty: Vec<usize> = columns
                .filter(|&column| self.profiles[column].present() == 0 && clarity(self.name(column), Role::Group) >= 3)
                .collect();
            let reason = match empty.first() {
                Some(&column) => format!("Column {} is empty: all are one group.", quoted(self.name(column))),
                None => "No column has few values that several subjects share: all are one group.".to_string(),
            };
            self.roles.forget(Role::Group, reason);
        }
    }

    /// Columns that are constant within subjects and shared by several of them.
    fn group_candidates(&mut self) -> Vec<usize> {
        let Some(subject) = self.roles.column(Role::Subject) else {
            return Vec::new();
        };
        let mut found = Vec::new();
        for column in self.free() {
            let levels = self.profiles[column].distinct;
            let is_response = clarity(self.name(column), Role::Response) >= 3 && self.profiles[column].is_numeric(0.5);
            let is_cluster = clarity(self.name(column), Role::Cluster) >= 3;
            if !(2..=200).contains(&levels) || is_response || is_cluster {
                continue;
            }
            let (varies, subjects) = self.varying(subject, column);
            if varies * 20 <= subjects && levels * 2 <= subjects && levels <= 60 {
                found.push(column);
            }
        }
        found
    }

    /// The only column named like a site or cage, where it divides the subjects into two to four parts of three or more.
    fn few_places(&mut self) -> Option<usize> {
        let subject = self.roles.column(Role::Subject)?;
        let named: Vec<usize> =
            self.free().into_iter().filter(|&column| clarity(self.name(column), Role::Cluster) >= 3).collect();
        let [column] = named.as_slice() else { return None };
        if !self.is_open(Role::Cluster) || self.is_only_response(*column) {
            return None;
        }
        let (changing, subjects, values) = self.within(&[subject], *column);
        (changing == 0 && (2..=4).contains(&values) && values * 3 <= subjects).then_some(*column)
    }

    /// True where ids restart under each value: alone they come back at one time, with the column they do not.
    fn restarts_under(&mut self, column: usize) -> bool {
        let (Some(subject), Some(time)) = (self.roles.column(Role::Subject), self.roles.column(Role::Time)) else {
            return false;
        };
        let levels = self.profiles[column].distinct;
        (2..=60).contains(&levels)
            && self.repeats(&[subject, time]) > 0.2
            && self.repeats(&[subject, column, time]) < 0.02
    }

    /// Columns of words under which ids restart.
    fn restarting(&mut self) -> Vec<usize> {
        let words: Vec<usize> = self.free().into_iter().filter(|&column| self.profiles[column].numbers == 0).collect();
        words.into_iter().filter(|&column| self.restarts_under(column)).collect()
    }

    pub(super) fn response(&mut self) {
        if !self.is_open(Role::Response) {
            return;
        }
        let numeric: Vec<usize> = self
            .free()
            .into_iter()
            .filter(|&column| {
                self.profiles[column].is_numeric(0.5)
                    && self.profiles[column].worded_times * 2 < self.profiles[column].rows
            })
            .filter(|&column| !self.counts_rows(column))
            .collect();
        let changing: Vec<usize> = match self.roles.column(Role::Subject) {
            Some(subject) => numeric.iter().copied().filter(|&column| self.varying(subject, column).0 > 0).collect(),
            None => numeric.clone(),
        };
        let candidates = if changing.is_empty() { numeric } else { changing };
        if candidates.len() != 1 {
            // `y` and `value` settle it; of several measurements none is the clearer for its name.
            let named: Vec<usize> =
                candidates.iter().copied().filter(|&column| clarity(self.name(column), Role::Response) >= 2).collect();
            if self.take_by_name(Role::Response, &candidates, 4) {
                return;
            }
            match named.as_slice() {
                [] => {}
                [_] => {
                    self.take_by_name(Role::Response, &named, 2);
                }
                rivals => {
                    self.ask(Role::Response, rivals);
                    self.close(Role::Response);
                }
            }
        }
        if !self.is_open(Role::Response) {
            return;
        }
        self.take_only(
            Role::Response,
            &candidates,
            "It is the only further column of numbers that changes within subjects.",
        );
        if self.is_open(Role::Response) {
            // A clear name without numbers: reading it will say so.
            let free = self.free();
            self.take_by_name(Role::Response, &free, 3);
        }
    }

    /// 1, 2, 3, ... down the rows, without a name that says otherwise: a number of the row.
    fn counts_rows(&self, column: usize) -> bool {
        const NAMES: [&str; 10] = ["column", "row", "rows", "index", "no", "nr", "number", "id", "obs", "unnamed"];
        if !words(self.name(column)).first().is_some_and(|word| NAMES.contains(&word.as_str())) {
            return false;
        }
        let profile = &self.profiles[column];
        let mut before: Option<f64> = None;
        profile.rows >= 3
            && profile.whole == profile.rows
            && (0..profile.rows).all(|row| {
                let value = number(self.table.cell(row, column), profile.decimal).unwrap_or(f64::NAN);
                let next = before.is_none_or(|before| value == before + 1.0);
                before = Some(value);
                next
            })
    }

    /// A needed role without any candidate is a question with all columns as choices.
    pub(super) fn ask_for_missing(&mut self, roles: &[Role]) {
        for &role in roles {
            if !self.is_open(role) {
                continue;
            }
            let choices: Vec<String> = self
                .free()
                .into_iter()
                .filter(|&column| matches!(self.table.columns[column].source, Source::Cell(_)))
                .map(|column| self.name(column).to_string())
                .collect();
            let empty: Vec<String> = (0..self.table.columns.len())
                .filter(|&column| !self.roles.taken(column) && self.profiles[column].present() == 0)
                .map(|column| self.name(column).to_string())
                .collect();
            let text = match choices.is_empty() {
                true if !empty.is_empty() => format!(
                    "No column is left for the {role}: no cell holds a value in {}. The table needs a subject, a time and a response column.",
                    listed(&empty)
                ),
                true => format!(
                    "No column is left for the {role}. The table needs a subject, a time and a response column."
                ),
                false => format!(
                    "No column is clearly the {role}. The columns left are {}. Which one is it?",
                    listed(&choices)
                ),
            };
            self.roles.reasons[role as usize] = "Open: no column is clearly meant.".to_string();
            self.put(Question { topic: Topic::Column(role), text, choices, needs_answer: true });
        }
    }
}
