//! The observations: what the rest of the program computes with.

/// Repeated measurements of subjects in groups, by column.
///
/// The vectors `subject`, `time`, `response` and `line` have one entry per
/// usable row and are sorted by subject (first appearance), then time, then line.
#[derive(Debug, Clone, Default)]
pub struct Observations {
    /// Who was measured, in order of first appearance.
    pub subjects: Vec<SubjectInfo>,
    /// Group names, in order of first appearance. One entry, `"all"`, without a group column.
    pub groups: Vec<String>,
    /// In a crossed design the two labels of every group; otherwise empty.
    pub cells: Vec<[String; 2]>,
    /// Cluster names (cage, litter, site), in order of first appearance; empty without a cluster column.
    pub clusters: Vec<String>,
    /// Index into `subjects`.
    pub subject: Vec<u32>,
    /// Time in `time_word` units.
    pub time: Vec<f64>,
    /// Response as measured; always finite.
    pub response: Vec<f64>,
    /// -1 where the true response lies below, 1 where above, 0 where it is the response; empty where no limits are read.
    pub limit: Vec<i8>,
    /// Line in the file; the header is line 1.
    pub line: Vec<u32>,
    /// In a wide table: the sheet's column that holds the measurement, an index into `measured`; empty in a long one.
    pub cell: Vec<u32>,
    /// Names of the sheet's columns in a wide table.
    pub measured: Vec<String>,
    /// Further explanatory columns asked for.
    pub covariates: Vec<Covariate>,
    /// One time unit in words: `day`, `week`, `hour` or, where unknown, the column's name.
    pub time_word: String,
}

impl Observations {
    /// How an exclusion names a measurement: its line, and in a wide table its column.
    #[must_use]
    pub fn place(&self, measurement: usize) -> (usize, Option<&str>) {
        let column = self.cell.get(measurement).and_then(|&at| self.measured.get(at as usize));
        (self.line[measurement] as usize, column.map(String::as_str))
    }
}

/// One subject. Belongs to one group and at most one cluster.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct SubjectInfo {
    /// Name as shown; where ids restart in each group, with the group's name added.
    pub name: String,
    /// Index into [`Observations::groups`].
    pub group: u32,
    /// Index into [`Observations::clusters`].
    pub cluster: Option<u32>,
}

/// A further explanatory column, one value per usable row.
#[derive(Debug, Clone)]
pub struct Covariate {
    /// Column name.
    pub name: String,
    /// Values.
    pub values: CovariateValues,
}

/// Numbers or categories.
#[derive(Debug, Clone)]
pub enum CovariateValues {
    /// One number per usable row.
    Numeric(Vec<f64>),
    /// Index into `levels` per usable row.
    Categorical {
        /// Category names, in order of first appearance.
        levels: Vec<String>,
        /// One per usable row.
        index: Vec<u32>,
    },
}
