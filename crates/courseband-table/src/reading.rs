//! What was read: observations, and everything that must be known about them.

use crate::observations::Observations;
use crate::request::{Layout, Merge, Role};

/// What was read from a table.
#[derive(Debug, Clone)]
pub struct Reading {
    /// What the rest of the program computes with. Empty while a question needs an answer.
    pub observations: Observations,
    /// Columns as used.
    pub columns: ColumnsUsed,
    /// Why each column was taken, one per role.
    pub reasons: Vec<Reason>,
    /// What was found wrong, by row; at most [`crate::LISTED_PER_KIND`] of each kind.
    pub problems: Vec<Problem>,
    /// How many problems there are of each kind, listed or not.
    pub problem_counts: Vec<(ProblemKind, usize)>,
    /// What else must be known, in plain words.
    pub notes: Vec<String>,
    /// What a person must or may decide.
    pub questions: Vec<Question>,
    /// Group names that may be misspelt, with the name they may stand for: to be offered, not done.
    pub near_spellings: Vec<Merge>,
    /// How the table lays out its measurements.
    pub layout: Layout,
    /// Unit of the response where the header gives one, such as `mm`.
    pub response_unit: Option<String>,
    /// Rows left out on request.
    pub excluded: usize,
    /// In a wide table: the columns that hold the measurements, by name.
    pub measured: Vec<String>,
}

impl Reading {
    /// The first question that must be answered before anything can be computed.
    pub fn open_question(&self) -> Option<&Question> {
        self.questions.iter().find(|question| question.needs_answer)
    }
}

/// Columns as used. A role without a column is `None`.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct ColumnsUsed {
    /// Subject column.
    pub subject: Option<String>,
    /// Time column.
    pub time: Option<String>,
    /// Group column.
    pub group: Option<String>,
    /// Response column.
    pub response: Option<String>,
    /// Cluster column.
    pub cluster: Option<String>,
    /// Further explanatory columns.
    pub covariates: Vec<String>,
}

/// Why a column was taken for a role.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reason {
    /// The role.
    pub role: Role,
    /// The column, or `None`.
    pub column: Option<String>,
    /// In plain words.
    pub reason: String,
}

/// Something wrong in one place of the table.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Problem {
    /// What it is.
    pub kind: ProblemKind,
    /// Line in the file; the header is line 1.
    pub row: usize,
    /// Column name.
    pub column: String,
    /// The cell as written (shortened if very long).
    pub value: String,
    /// What it is and what was done.
    pub message: String,
}

/// Kinds of problems.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum ProblemKind {
    /// The response is missing; the row is left out.
    MissingResponse,
    /// The response is not a number; the row is left out.
    NotANumber,
    /// The response is below or above a limit, such as `<0.5`; the row is left out.
    BeyondLimit,
    /// The response has its unit glued to it; the row is left out.
    UnitInCell,
    /// The response is infinite or too large; the row is left out.
    NotFinite,
    /// The group is missing and not known from other rows; the row is left out.
    MissingGroup,
    /// A further explanatory column is missing or unreadable; the row is left out.
    MissingCovariate,
    /// A rare group name that is one letter away from a common one; kept.
    NearSpelling,
    /// Subject ids that differ only by case; kept as different subjects.
    NearId,
    /// Several rows of one subject at one time; all are kept.
    Duplicate,
    /// A subject with one row; kept.
    OneObservation,
    /// A value far from its subject's other values; kept.
    FarFromCourse,
    /// More cells in the row than in the header; the surplus is not read.
    SurplusCells,
    /// A cell without which the table cannot be used, such as an unreadable time.
    StopsReading,
    /// A row of an id that is said to be under several groups by mistake.
    SharedId,
}

impl ProblemKind {
    pub(crate) const COUNT: usize = 15;

    /// True where the row, or the cell of a wide table, is left out already.
    pub fn leaves_out(self) -> bool {
        matches!(
            self,
            ProblemKind::MissingResponse
                | ProblemKind::NotANumber
                | ProblemKind::BeyondLimit
                | ProblemKind::UnitInCell
                | ProblemKind::NotFinite
                | ProblemKind::MissingGroup
                | ProblemKind::MissingCovariate
        )
    }

    /// The kind in a few words, for a count.
    pub fn words(self) -> &'static str {
        match self {
            ProblemKind::MissingResponse => "missing responses",
            ProblemKind::NotANumber => "responses that are not numbers",
            ProblemKind::BeyondLimit => "responses given as below or above a limit",
            ProblemKind::UnitInCell => "responses with a unit in the cell",
            ProblemKind::NotFinite => "responses that are not finite",
            ProblemKind::MissingGroup => "missing groups",
            ProblemKind::MissingCovariate => "missing explanatory values",
            ProblemKind::NearSpelling => "rows with a rare spelling of a group",
            ProblemKind::NearId => "ids that differ only by case",
            ProblemKind::Duplicate => "further rows of a subject at one time",
            ProblemKind::OneObservation => "subjects with one observation",
            ProblemKind::FarFromCourse => "values far from their subject's course",
            ProblemKind::SurplusCells => "rows with more cells than the header",
            ProblemKind::StopsReading => "cells that stop the reading",
            ProblemKind::SharedId => "rows of ids under several groups",
        }
    }
}

/// What a question is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Topic {
    /// Which column plays a role. Choices are column names.
    Column(Role),
    /// What ids under several groups mean. Choices are those of [`crate::SharedIds`], in its order;
    /// without an answer the first is assumed.
    Ids,
}

/// What a person must or may decide.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Question {
    /// What it is about.
    pub topic: Topic,
    /// The question, in plain words.
    pub text: String,
    /// The answers to choose from.
    pub choices: Vec<String>,
    /// True where nothing can be computed without an answer. Otherwise the first choice is assumed.
    pub needs_answer: bool,
}

impl Question {
    /// The question as a refusal, for places where nobody can answer it.
    pub fn refusal(&self) -> String {
        match self.topic {
            Topic::Column(role) => format!("{} Name the {role} column in the plan (columns, {role}).", self.text),
            Topic::Ids => format!("{} What it means stands in the plan (reading, shared_ids).", self.text),
        }
    }
}
