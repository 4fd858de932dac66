//! Which column plays which part, from names and contents, with the reason in words.

use crate::error::TableError;
use crate::long::{LongTable, Source};
use crate::names::{clarity, is_beside};
use crate::number::is_missing_label;
use crate::profile::Profile;
use crate::reading::{Question, Reason, Topic};
use crate::request::{ColumnRequest, Request, Role};
use crate::text::{folded, listed, quoted};
use std::collections::HashMap;

/// A role's column, if any, and why.
#[derive(Debug, Clone, Default)]
pub(crate) struct Roles {
    columns: [Option<usize>; 5],
    reasons: [String; 5],
    pub(crate) covariates: Vec<usize>,
    pub(crate) questions: Vec<Question>,
}

impl Roles {
    pub(crate) fn column(&self, role: Role) -> Option<usize> {
        self.columns[role as usize]
    }

    /// Reasons for reporting, one per role.
    pub(crate) fn reasons(&self, table: &LongTable<'_>) -> Vec<Reason> {
        let one = |&role: &Role| Reason {
            role,
            column: self.column(role).map(|column| table.columns[column].name.clone()),
            reason: self.reasons[role as usize].clone(),
        };
        Role::ALL.iter().map(one).collect()
    }

    pub(crate) fn forget(&mut self, role: Role, reason: String) {
        self.columns[role as usize] = None;
        self.reasons[role as usize] = reason;
    }

    fn set(&mut self, role: Role, column: usize, reason: impl Into<String>) {
        self.columns[role as usize] = Some(column);
        self.reasons[role as usize] = reason.into();
    }

    fn taken(&self, column: usize) -> bool {
        self.columns.contains(&Some(column)) || self.covariates.contains(&column)
    }
}

/// Finds each role's column.
///
/// # Errors
/// Named columns that do not exist or are named twice; a needed role said to be absent.
pub(crate) fn find_roles(table: &LongTable<'_>, profiles: &[Profile], request: &Request) -> Result<Roles, TableError> {
    let mut finder = Finder { table, profiles, roles: Roles::default(), open: Vec::new(), codes: HashMap::new() };
    finder.apply(request)?;
    finder.subject_by_name();
    finder.time_by_name();
    finder.subject_by_contents();
    finder.time_by_contents();
    finder.ask_for_missing(&[Role::Subject, Role::Time]);
    finder.group();
    finder.cluster();
    finder.response();
    finder.ask_for_missing(&[Role::Response]);
    Ok(finder.roles)
}

struct Finder<'a> {
    table: &'a LongTable<'a>,
    profiles: &'a [Profile],
    roles: Roles,
    /// Roles to infer.
    open: Vec<Role>,
    /// Interned cells of columns looked at closely, folded.
    codes: HashMap<usize, Vec<u32>>,
}

impl<'a> Finder<'a> {
    fn apply(&mut self, request: &Request) -> Result<(), TableError> {
        let mut used: Vec<(usize, String)> = Vec::new();
        for role in Role::ALL {
            match request.column(role) {
                ColumnRequest::Infer => self.open.push(role),
                ColumnRequest::Absent if role.is_needed() => return Err(TableError::Needed { role }),
                ColumnRequest::Absent => self.roles.reasons[role as usize] = "Said to be absent.".to_string(),
                ColumnRequest::Named(name) => {
                    let column = self.named(name, role.word())?;
                    claim(&mut used, column, name, role.word())?;
                    self.roles.set(role, column, "Named.");
                }
            }
        }
        for name in &request.covariates {
            let column = self.named(name, "explanatory column")?;
            claim(&mut used, column, name, "explanatory column")?;
            self.roles.covariates.push(column);
        }
        for preset in &self.table.presets {
            if self.open.contains(&preset.role) && !self.roles.taken(preset.column) {
                self.close(preset.role);
                self.roles.set(preset.role, preset.column, preset.reason.clone());
            }
        }
        Ok(())
    }

    fn named(&self, name: &str, purpose: &str) -> Result<usize, TableError> {
        self.table.find(name).ok_or_else(|| TableError::NoSuchColumn {
            name: name.to_string(),
            purpose: purpose.to_string(),
            columns: self.table.names(),
        })
    }

    fn close(&mut self, role: Role) {
        self.open.retain(|&open| open != role);
    }

    fn is_open(&self, role: Role) -> bool {
        self.open.contains(&role)
    }

    fn name(&self, column: usize) -> &'a str {
        &self.table.columns[column].name
    }

    fn free(&self) -> Vec<usize> {
        (0..self.table.columns.len())
            .filter(|&column| !self.roles.taken(column) && self.profiles[column].present() > 0)
            .collect()
    }

    /// Takes the column with the clearest name; asks where two are equally clear.
    fn take_by_name(&mut self, role: Role, candidates: &[usize], least: u8) -> bool {
        let clear = |column: usize| clarity(self.name(column), role);
        let best = candidates.iter().map(|&column| clear(column)).max().unwrap_or(0);
        if best < least {
            return false;
        }
        let first: Vec<usize> = candidates.iter().copied().filter(|&column| clear(column) == best).collect();
        let first = self.without_copies(first);
        match first.as_slice() {
            [one] => self.roles.set(role, *one, format!("The name {} says so.", quoted(self.name(*one)))),
            rivals => self.ask(role, rivals),
        }
        self.close(role);
        true
    }

    /// Columns that divide the rows exactly as an earlier one does add nothing.
    fn without_copies(&mut self, columns: Vec<usize>) -> Vec<usize> {
        let mut kept: Vec<usize> = Vec::new();
        for column in columns {
            let codes = self.codes_of(column).to_vec();
            if !kept.iter().any(|other| self.codes[other] == codes) {
                kept.push(column);
            }
        }
        kept
    }

    fn ask(&mut self, role: Role, rivals: &[usize]) {
        let names: Vec<String> = rivals.iter().map(|&column| self.name(column).to_string()).collect();
        let text = format!(
            "{} columns could be the {role}: {}. Which one is it?",
            capital_count(rivals.len()),
            listed(&names)
        );
        self.roles.reasons[role as usize] = format!("Open: {} could be meant.", listed(&names));
        self.put(Question { topic: Topic::Column(role), text, choices: names, needs_answer: true });
    }

    /// One question at a time: an answer often settles the next.
    fn put(&mut self, question: Question) {
        if self.roles.questions.is_empty() {
            self.roles.questions.push(question);
        }
    }

    /// Cells of a column as numbers in order of first appearance, folded; missing cells are 0.
    fn codes_of(&mut self, column: usize) -> &[u32] {
        let table = self.table;
        self.codes.entry(column).or_insert_with(|| {
            let mut known: HashMap<&str, u32> = HashMap::new();
            let mut by_fold: HashMap<String, u32> = HashMap::new();
            let mut last = ("", 0);
            (0..table.rows())
                .map(|row| {
                    let cell = table.cell(row, column);
                    if cell == last.0 {
                        return last.1;
                    }
                    let code = *known.entry(cell).or_insert_with(|| match is_missing_label(cell) {
                        true => 0,
                        false => {
                            let next = by_fold.len() as u32 + 1;
                            *by_fold.entry(folded(cell)).or_insert(next)
                        }
                    });
                    last = (cell, code);
                    code
                })
                .collect()
        })
    }

    /// How many values of `inner` have more than one value of `outer`, of how many.
    fn varying(&mut self, inner: usize, outer: usize) -> (usize, usize) {
        let table = self.table;
        let inner = self.codes_of(inner);
        let count = inner.iter().copied().max().unwrap_or(0) as usize + 1;
        let mut first: Vec<Option<&str>> = vec![None; count];
        let mut varies = vec![false; count];
        for (row, &unit) in inner.iter().enumerate() {
            let slot = unit as usize;
            if unit == 0 || varies[slot] {
                continue;
            }
            let cell = table.cell(row, outer);
            match first[slot] {
                Some(before) if before == cell || is_missing_label(cell) => {}
                Some(before) => varies[slot] = folded(before) != folded(cell),
                None if is_missing_label(cell) => {}
                None => first[slot] = Some(cell),
            }
        }
        (varies.iter().filter(|&&v| v).count(), first.iter().filter(|v| v.is_some()).count())
    }

    /// Share of rows whose combination of cells in up to three columns is not the first of its kind.
    fn repeats(&mut self, columns: &[usize]) -> f64 {
        let mut keys = vec![[0u32; 3]; self.table.rows()];
        for (slot, &column) in columns.iter().take(3).enumerate() {
            let codes = self.codes_of(column);
            keys.iter_mut().zip(codes).for_each(|(key, &code)| key[slot] = code);
        }
        let total = keys.len() as f64;
        keys.sort_unstable();
        keys.dedup();
        1.0 - keys.len() as f64 / total.max(1.0)
    }
}

fn claim(used: &mut Vec<(usize, String)>, column: usize, name: &str, purpose: &str) -> Result<(), TableError> {
    if let Some((_, before)) = used.iter().find(|(other, _)| *other == column) {
        return Err(TableError::ColumnTwice { name: name.to_string(), roles: [before.clone(), purpose.to_string()] });
    }
    used.push((column, purpose.to_string()));
    Ok(())
}

fn capital_count(count: usize) -> String {
    match count {
        2 => "Two".to_string(),
        3 => "Three".to_string(),
        4 => "Four".to_string(),
        other => other.to_string(),
    }
}

mod infer;
