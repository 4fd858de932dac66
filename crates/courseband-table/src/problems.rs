//! Problems as they are found, with a limit on how many are listed.

use crate::reading::{Problem, ProblemKind};
use crate::text::shortened;

/// At most this many problems of one kind are listed; all are counted.
pub const LISTED_PER_KIND: usize = 1000;

/// Collects problems.
#[derive(Debug, Default)]
pub(crate) struct Problems {
    list: Vec<Problem>,
    counts: [usize; ProblemKind::COUNT],
}

impl Problems {
    /// Counts a problem and lists it while there are not too many of its kind.
    pub(crate) fn add(
        &mut self,
        kind: ProblemKind,
        row: usize,
        column: &str,
        value: &str,
        message: impl FnOnce() -> String,
    ) {
        let count = &mut self.counts[kind as usize];
        *count += 1;
        if *count <= LISTED_PER_KIND {
            self.list.push(Problem {
                kind,
                row,
                column: column.to_string(),
                value: shortened(value),
                message: message(),
            });
        }
    }

    /// Those listed so far.
    pub(crate) fn listed(&self) -> &[Problem] {
        &self.list
    }

    pub(crate) fn count(&self, kind: ProblemKind) -> usize {
        self.counts[kind as usize]
    }

    /// Counts in words: `3 missing groups, 1 missing responses`.
    pub(crate) fn summary(&self) -> String {
        let counted = KINDS
            .iter()
            .filter(|&&kind| self.count(kind) > 0)
            .map(|&kind| format!("{} {}", self.count(kind), kind.words()));
        counted.collect::<Vec<_>>().join(", ")
    }

    /// Problems by row, counts by kind, and a note for each kind with more than are listed.
    pub(crate) fn finish(mut self, notes: &mut Vec<String>) -> (Vec<Problem>, Vec<(ProblemKind, usize)>) {
        self.list.sort_by(|a, b| (a.row, a.kind, &a.column).cmp(&(b.row, b.kind, &b.column)));
        let counts: Vec<(ProblemKind, usize)> =
            KINDS.iter().map(|&kind| (kind, self.count(kind))).filter(|(_, count)| *count > 0).collect();
        for (kind, count) in &counts {
            if *count > LISTED_PER_KIND {
                notes.push(format!("There are {count} {}; the first {LISTED_PER_KIND} are listed.", kind.words()));
            }
        }
        (self.list, counts)
    }
}

const KINDS: [ProblemKind; ProblemKind::COUNT] = [
    ProblemKind::MissingResponse,
    ProblemKind::NotANumber,
    ProblemKind::BeyondLimit,
    ProblemKind::UnitInCell,
    ProblemKind::NotFinite,
    ProblemKind::MissingGroup,
    ProblemKind::MissingCovariate,
    ProblemKind::NearSpelling,
    ProblemKind::NearId,
    ProblemKind::Duplicate,
    ProblemKind::OneObservation,
    ProblemKind::FarFromCourse,
    ProblemKind::SurplusCells,
    ProblemKind::StopsReading,
    ProblemKind::SharedId,
];
