//! The plan's choices about the table: columns, rows left out, how cells are read, words.

use serde::{Deserialize, Deserializer, Serialize, Serializer};

/// How a role finds its column: `null` infers it, `false` says there is none.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub enum ColumnChoice {
    /// Infer, and say what was inferred and why (`null`).
    #[default]
    Infer,
    /// There is none (`false`).
    Absent,
    /// This column, by its name.
    Named(String),
}

impl Serialize for ColumnChoice {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match self {
            ColumnChoice::Infer => serializer.serialize_none(),
            ColumnChoice::Absent => serializer.serialize_bool(false),
            ColumnChoice::Named(name) => serializer.serialize_str(name),
        }
    }
}

impl<'de> Deserialize<'de> for ColumnChoice {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        #[derive(Deserialize)]
        #[serde(untagged)]
        enum Wire {
            Flag(bool),
            Name(String),
        }
        match Option::<Wire>::deserialize(deserializer).map_err(|_| {
            serde::de::Error::custom("a column is null (infer it), false (there is none) or a name in quotes")
        })? {
            None => Ok(ColumnChoice::Infer),
            Some(Wire::Flag(false)) => Ok(ColumnChoice::Absent),
            Some(Wire::Flag(true)) => Err(serde::de::Error::custom(
                "a column is null (infer it), false (there is none) or a name in quotes, not true",
            )),
            Some(Wire::Name(name)) => Ok(ColumnChoice::Named(name)),
        }
    }
}

/// Which column plays which part.
#[derive(Debug, Clone, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Columns {
    /// Who was measured.
    pub subject: ColumnChoice,
    /// When.
    pub time: ColumnChoice,
    /// In which group.
    pub group: ColumnChoice,
    /// What was measured.
    pub response: ColumnChoice,
    /// Cage, litter, site.
    pub cluster: ColumnChoice,
    /// Further explanatory columns.
    pub covariates: Vec<String>,
    /// Those of them, numbers, whose effect may bend.
    pub bending: Vec<String>,
    /// Repeat of the experiment, batch or plate that every group has a part in.
    pub block: Option<String>,
    /// A second factor of the subjects, crossed with the groups, such as the genotype.
    pub crossed: Option<String>,
    /// What is written where a subject was removed as planned, such as at a humane end point; empty elsewhere.
    pub removal: Option<String>,
    /// Number of trials of every row, for a binomial response.
    pub total: Option<String>,
}

/// One row left out.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Exclusion {
    /// Line in the file; the header is line 1.
    pub row: usize,
    /// Why.
    pub reason: String,
    /// In a wide table: only this column's cell; absent: the whole row.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub column: Option<String>,
}

/// How cells are read.
#[derive(Debug, Clone, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct ReadingChoice {
    /// Where time is zero.
    pub day_zero: DayZero,
    /// How dates such as 3/4/2024 are read; `null` decides by the column.
    pub date_order: Option<DateOrder>,
    /// How the table is laid out; `null` decides by its header and cells.
    pub layout: Option<Layout>,
    /// Group spellings to unite.
    pub merges: Vec<Merge>,
    /// Sheet of a workbook; `null`: the first that is a table.
    pub sheet: Option<String>,
    /// Cells of that sheet, such as `B3:F90`; `null`: all.
    pub cells: Option<String>,
    /// What it means that ids occur under several groups at overlapping times; `null`: not said, and
    /// taken for different subjects.
    pub shared_ids: Option<SharedIds>,
    /// Groups in the order in which they are shown, and in which doses rise; those left out follow as they come.
    pub group_order: Vec<String>,
}

/// What it means that an id occurs under several groups at overlapping times.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum SharedIds {
    /// Different subjects: numbering restarts in each group.
    Different,
    /// The same subjects: a crossover, which is refused.
    Same,
    /// An id or a group is mistyped: refused with the rows.
    Mistake,
}

/// Where time is zero.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum DayZero {
    /// Times as written; dates count from the earliest in the table.
    #[default]
    Common,
    /// Each subject's first row.
    PerSubject,
}

/// How ambiguous dates are read.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum DateOrder {
    /// 3/4 is 3 April.
    DayFirst,
    /// 3/4 is 4 March.
    MonthFirst,
}

/// How a table is laid out.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Layout {
    /// One row per measurement.
    Long,
    /// One row per subject, one column per time.
    WideByTime,
    /// One row per time, one column per subject.
    WideBySubject,
}

/// Two spellings of one group.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Merge {
    /// The spelling to give up.
    pub from: String,
    /// The spelling to keep.
    pub into: String,
}

/// Words for what was followed; they change sentences, never numbers.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Words {
    /// One subject.
    pub subject: String,
    /// Several of them.
    pub subjects: String,
    /// One time unit; `null`: as read from the table.
    pub time: Option<String>,
    /// The response; `null`: its column's name.
    pub response: Option<String>,
}

impl Default for Words {
    fn default() -> Self {
        Words { subject: "subject".into(), subjects: "subjects".into(), time: None, response: None }
    }
}
