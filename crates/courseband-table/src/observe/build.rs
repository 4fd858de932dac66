//! The last steps: clusters, explanatory columns, day zero, sorting.

use super::*;
use crate::checks;

impl Observer<'_> {
    /// The cluster of each subject.
    pub(super) fn clusters(&mut self, subjects: &Subjects) -> Result<(Vec<Option<u32>>, Vec<String>), TableError> {
        let mut of_subject: Vec<Option<u32>> = vec![None; subjects.list.len()];
        let Some(column) = self.roles.column(Role::Cluster) else {
            return Ok((of_subject, Vec::new()));
        };
        let labels = Labels::trimmed(self.cells(column));
        let mut first_row = vec![0; subjects.list.len()];
        for (kept, (&subject, &cluster)) in subjects.of_row.iter().zip(&labels.index).enumerate() {
            if subject == Labels::NONE || cluster == Labels::NONE {
                continue;
            }
            let slot = &mut of_subject[subject as usize];
            match *slot {
                None => (*slot, first_row[subject as usize]) = (Some(cluster), kept),
                Some(before) if before == cluster => {}
                Some(before) => {
                    let id = self.table.cell(self.kept[kept] as usize, self.needed(Role::Subject)?).trim().to_string();
                    return Err(TableError::ChangesCluster {
                        column: self.name(column).to_string(),
                        subject: id,
                        first: (labels.names[before as usize].clone(), self.line(first_row[subject as usize])),
                        second: (labels.names[cluster as usize].clone(), self.line(kept)),
                    });
                }
            }
        }
        let without = of_subject.iter().filter(|cluster| cluster.is_none()).count();
        if without > 0 {
            self.notes.push(format!("{} in column {}.", counted_without(without), quoted(self.name(column))));
        }
        Ok((of_subject, labels.names))
    }

    /// Explanatory columns per kept row: NaN or [`Labels::NONE`] where missing.
    pub(super) fn covariates(&mut self) -> Vec<Covariate> {
        self.roles
            .covariates
            .iter()
            .map(|&column| {
                let profile = &self.profiles[column];
                let values = match profile.is_numeric(0.8) {
                    true => CovariateValues::Numeric(
                        self.cells(column).map(|cell| number(cell, profile.decimal).unwrap_or(f64::NAN)).collect(),
                    ),
                    false => {
                        let mut labels = Labels::as_written(self.cells(column));
                        groups::unite(&mut labels, &[], &mut Vec::new());
                        CovariateValues::Categorical { levels: labels.names, index: labels.index }
                    }
                };
                Covariate { name: self.name(column).to_string(), values }
            })
            .collect()
    }

    /// Times from day zero as asked for.
    pub(super) fn zeroed(&mut self, times: Times, subjects: &Subjects) -> Times {
        let mut first = vec![f64::INFINITY; subjects.list.len()];
        let known = |slot: u32| slot != Labels::NONE;
        for (&slot, &time) in subjects.of_row.iter().zip(&times.values).filter(|(slot, _)| known(**slot)) {
            first[slot as usize] = first[slot as usize].min(time);
        }
        let mut times = times;
        match self.request.day_zero {
            DayZero::PerSubject => {
                for (&slot, time) in subjects.of_row.iter().zip(&mut times.values).filter(|(slot, _)| known(**slot)) {
                    *time -= first[slot as usize];
                }
                self.notes.push("Time counts from each subject's own first row.".to_string());
            }
            DayZero::Common if times.are_dates => self.note_late_starts(&first, &times),
            DayZero::Common => {}
        }
        times
    }

    fn note_late_starts(&mut self, first: &[f64], times: &Times) {
        let range = |values: &[f64]| {
            let low = values.iter().copied().fold(f64::INFINITY, f64::min);
            values.iter().copied().fold(f64::NEG_INFINITY, f64::max) - low
        };
        self.notes.push("Time counts in days since the earliest date in the table.".to_string());
        if range(first) > 0.25 * range(&times.values) && range(first) > 2.0 {
            self.notes.push(format!(
                "Subjects start up to {} days apart. Day zero can be each subject's own first row instead.",
                range(first).round()
            ));
        }
    }

    /// True per kept row that can be computed with; lists rows without a group or an explanatory value.
    pub(super) fn usable(&mut self, subjects: &Subjects, responses: &[f64], covariates: &[Covariate]) -> Vec<bool> {
        let mut usable: Vec<bool> = responses.iter().map(|value| value.is_finite()).collect();
        for (kept, ok) in usable.iter_mut().enumerate() {
            let row = self.kept[kept] as usize;
            if subjects.of_row[kept] == Labels::NONE {
                *ok = false;
                if let Some(column) = self.roles.column(Role::Group) {
                    let shown = self.table.shown_column(row, column);
                    self.problems.add(
                        ProblemKind::MissingGroup,
                        self.table.line(row),
                        shown,
                        self.table.cell(row, column),
                        || {
                            "No group, here or in a single group of the subject's other rows: the row is left out."
                                .to_string()
                        },
                    );
                }
                continue;
            }
            for (covariate, &column) in covariates.iter().zip(&self.roles.covariates) {
                let missing = match &covariate.values {
                    CovariateValues::Numeric(values) => !values[kept].is_finite(),
                    CovariateValues::Categorical { index, .. } => index[kept] == Labels::NONE,
                };
                if missing && *ok {
                    *ok = false;
                    let shown = self.table.shown_column(row, column);
                    self.problems.add(
                        ProblemKind::MissingCovariate,
                        self.table.line(row),
                        shown,
                        self.table.cell(row, column),
                        || "No value that can be read: the row is left out.".to_string(),
                    );
                }
            }
        }
        usable
    }

    /// Sorted observations, and the problems that only show when sorted.
    pub(super) fn build(
        &mut self,
        ids: Labels,
        groups: &mut Labels,
        subjects: Subjects,
        clusters: (Vec<Option<u32>>, Vec<String>),
        times: Times,
        responses: Vec<f64>,
        covariates: Vec<Covariate>,
        usable: Vec<bool>,
    ) -> Result<Observations, TableError> {
        let mut order: Vec<u32> = (0..usable.len() as u32).filter(|&kept| usable[kept as usize]).collect();
        let key = |kept: u32| (subjects.of_row[kept as usize], times.values[kept as usize]);
        order.sort_by(|&a, &b| {
            let (a, b) = (key(a), key(b));
            a.0.cmp(&b.0).then(a.1.total_cmp(&b.1))
        });
        if order.is_empty() {
            return Err(TableError::NothingLeft { why: self.problems.summary() });
        }
        let subject_codes = Compact::new(subjects.list.len(), order.iter().map(|&kept| subjects.of_row[kept as usize]));
        let used = |index: &u32| &subjects.list[*index as usize];
        let group_codes = Compact::new(groups.names.len(), subject_codes.kept.iter().map(|index| used(index).group));
        let cluster_codes =
            Compact::new(clusters.1.len(), subject_codes.kept.iter().filter_map(|index| clusters.0[*index as usize]));
        let info = subject_codes.kept.iter().map(|index| {
            let subject = used(index);
            let id = &ids.names[subject.id as usize];
            let name = match subjects.restarts[subject.id as usize] {
                true => format!("{id} ({})", groups.names[subject.group as usize]),
                false => id.clone(),
            };
            let cluster = clusters.0[*index as usize].map(|cluster| cluster_codes.new[cluster as usize]);
            SubjectInfo { name, group: group_codes.new[subject.group as usize], cluster }
        });
        let time_column = self.needed(Role::Time)?;
        let wide = self.table.layout != crate::request::Layout::Long;
        let observations = Observations {
            subjects: info.collect(),
            groups: group_codes.names(&groups.names),
            cells: Vec::new(),
            clusters: cluster_codes.names(&clusters.1),
            subject: order.iter().map(|&kept| subject_codes.new[subjects.of_row[kept as usize] as usize]).collect(),
            time: order.iter().map(|&kept| times.values[kept as usize]).collect(),
            response: order.iter().map(|&kept| responses[kept as usize]).collect(),
            limit: match self.limits.iter().any(|&side| side != 0) {
                true => order.iter().map(|&kept| self.limits[kept as usize]).collect(),
                false => Vec::new(),
            },
            line: order.iter().map(|&kept| self.line(kept as usize) as u32).collect(),
            cell: match wide {
                true => order.iter().map(|&kept| self.table.places[self.kept[kept as usize] as usize].column).collect(),
                false => Vec::new(),
            },
            measured: if wide { self.table.sheet_names.clone() } else { Vec::new() },
            covariates: covariates.into_iter().map(|covariate| sorted(covariate, &order)).collect(),
            time_word: times.unit.map_or_else(|| self.name(time_column).to_string(), |unit| unit.word().to_string()),
        };
        let rows: Vec<u32> = order.iter().map(|&kept| self.kept[kept as usize]).collect();
        checks::check(&observations, self.table, &self.roles, &rows, &mut self.problems, &mut self.notes);
        Ok(observations)
    }
}

fn counted_without(subjects: usize) -> String {
    if subjects == 1 { "1 subject has no entry".to_string() } else { format!("{subjects} subjects have no entry") }
}

fn sorted(covariate: Covariate, order: &[u32]) -> Covariate {
    let values = match covariate.values {
        CovariateValues::Numeric(values) => {
            CovariateValues::Numeric(order.iter().map(|&kept| values[kept as usize]).collect())
        }
        CovariateValues::Categorical { levels, index } => {
            let codes = Compact::new(levels.len(), order.iter().map(|&kept| index[kept as usize]));
            let index = order.iter().map(|&kept| codes.new[index[kept as usize] as usize]).collect();
            CovariateValues::Categorical { levels: codes.names(&levels), index }
        }
    };
    Covariate { name: covariate.name, values }
}

/// Renumbers codes so that unused ones drop out; the order stays.
struct Compact {
    /// Old codes still used, ascending.
    kept: Vec<u32>,
    /// New code by old code.
    new: Vec<u32>,
}

impl Compact {
    fn new(count: usize, used: impl Iterator<Item = u32>) -> Compact {
        let mut is_used = vec![false; count];
        used.for_each(|code| is_used[code as usize] = true);
        let mut compact = Compact { kept: Vec::new(), new: vec![0; count] };
        for old in (0..count).filter(|&old| is_used[old]) {
            compact.new[old] = compact.kept.len() as u32;
            compact.kept.push(old as u32);
        }
        compact
    }

    fn names(&self, old: &[String]) -> Vec<String> {
        self.kept.iter().map(|&code| old[code as usize].clone()).collect()
    }
}
