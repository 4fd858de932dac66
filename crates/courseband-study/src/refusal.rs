//! Why a plan or a table cannot be used.

use std::fmt;

/// Why a plan or a table cannot be used: one message that says what, where, and what to do.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Refusal {
    /// `plan`, `table` or `question` (a choice that only a person can make).
    pub about: &'static str,
    /// In plain words.
    pub message: String,
}

impl Refusal {
    pub(crate) fn plan(message: impl Into<String>) -> Self {
        Refusal { about: "plan", message: message.into() }
    }

    pub(crate) fn table(message: impl Into<String>) -> Self {
        Refusal { about: "table", message: message.into() }
    }
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for Refusal {}

impl From<courseband_table::TableError> for Refusal {
    fn from(error: courseband_table::TableError) -> Self {
        Refusal::table(error.to_string())
    }
}
