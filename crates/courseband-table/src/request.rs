//! What is asked of a table.

use std::fmt;

/// The part a column plays.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Role {
    /// Who was measured.
    Subject,
    /// When.
    Time,
    /// In which group.
    Group,
    /// What was measured.
    Response,
    /// Cage, litter, site.
    Cluster,
}

impl Role {
    /// All roles, in the order in which they are reported.
    pub const ALL: [Role; 5] = [Role::Subject, Role::Time, Role::Group, Role::Response, Role::Cluster];

    /// `subject`, `time`, `group`, `response` or `cluster`.
    pub fn word(self) -> &'static str {
        match self {
            Role::Subject => "subject",
            Role::Time => "time",
            Role::Group => "group",
            Role::Response => "response",
            Role::Cluster => "cluster",
        }
    }

    /// True where a table cannot be used without such a column.
    pub fn is_needed(self) -> bool {
        matches!(self, Role::Subject | Role::Time | Role::Response)
    }
}

impl fmt::Display for Role {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.word())
    }
}

/// How a role finds its column.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub enum ColumnRequest {
    /// Infer it and say why.
    #[default]
    Infer,
    /// There is none.
    Absent,
    /// This column, by its name as in the header.
    Named(String),
}

/// A row, or one cell of a wide table, left out.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Exclusion {
    /// Line in the file; the header is line 1.
    pub row: usize,
    /// In a wide table: only this column's cell. `None` leaves out the whole row.
    pub column: Option<String>,
    /// Why.
    pub reason: String,
}

/// Two spellings of one group.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Merge {
    /// The spelling to give up.
    pub from: String,
    /// The spelling to keep.
    pub into: String,
}

/// Where time is zero.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum DayZero {
    /// Times as written; dates count from the earliest date in the table.
    #[default]
    Common,
    /// Each subject's own first row is time zero.
    PerSubject,
}

/// How dates such as 3/4/2024 are read.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum DateOrder {
    /// 3 April.
    DayFirst,
    /// 4 March.
    MonthFirst,
}

/// What it means that an id occurs under several groups at overlapping times.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SharedIds {
    /// Different subjects: numbering restarts in each group.
    Different,
    /// The same subject under each: a crossover, which is not handled.
    Same,
    /// An id or a group is mistyped somewhere.
    Mistake,
}

/// How a table lays out its measurements.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Layout {
    /// One row per measurement.
    Long,
    /// One row per subject, one column per time.
    WideByTime,
    /// One row per time, one column per subject.
    WideBySubject,
}

/// What is asked of a table. The default infers everything.
#[derive(Debug, Clone, Default)]
pub struct Request {
    /// Who was measured.
    pub subject: ColumnRequest,
    /// When.
    pub time: ColumnRequest,
    /// In which group; absent puts all subjects into one.
    pub group: ColumnRequest,
    /// What was measured.
    pub response: ColumnRequest,
    /// Cage, litter, site.
    pub cluster: ColumnRequest,
    /// Further explanatory columns, by name.
    pub covariates: Vec<String>,
    /// Rows left out.
    pub exclusions: Vec<Exclusion>,
    /// Group spellings to unite.
    pub merges: Vec<Merge>,
    /// Where time is zero.
    pub day_zero: DayZero,
    /// How ambiguous dates are read; `None` decides by the column and refuses if it cannot.
    pub date_order: Option<DateOrder>,
    /// What ids under several groups mean; `None` takes different subjects, and asks.
    pub shared_ids: Option<SharedIds>,
    /// How the table is laid out; `None` decides by its header and cells.
    pub layout: Option<Layout>,
    /// Takes a response such as `<0.5` or `>500` as a limit beyond which it lies, instead of leaving it out.
    pub limits: bool,
}

impl Request {
    /// What was asked for a role.
    pub fn column(&self, role: Role) -> &ColumnRequest {
        match role {
            Role::Subject => &self.subject,
            Role::Time => &self.time,
            Role::Group => &self.group,
            Role::Response => &self.response,
            Role::Cluster => &self.cluster,
        }
    }
}
