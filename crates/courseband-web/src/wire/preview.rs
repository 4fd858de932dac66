//! What the reader understood of a table.

use courseband_table as table;
use courseband_table::{ColumnsUsed, Question, Reading, Role, Topic};
use serde::Serialize;
use std::collections::BTreeMap;

/// What the reader understood of a table.
#[derive(Debug, Serialize)]
pub(crate) struct Preview {
    columns: Vec<Column>,
    rows: Vec<Row>,
    total_rows: usize,
    /// How the text was read, in words.
    format: String,
    problems: Vec<Problem>,
    questions: Vec<Asked>,
    notes: Vec<String>,
    near_spellings: Vec<NearSpelling>,
    response_unit: Option<String>,
}

/// A column of the table as it stands.
#[derive(Debug, Serialize)]
struct Column {
    name: String,
    role: Option<&'static str>,
    reason: String,
    unit: Option<String>,
    missing: usize,
}

#[derive(Debug, Serialize)]
struct Row {
    line: usize,
    cells: Vec<String>,
}

#[derive(Debug, Serialize)]
struct Problem {
    row: usize,
    column: String,
    value: String,
    message: String,
}

/// A question with its answers; an answer is a part of the plan's `columns`.
#[derive(Debug, Serialize)]
struct Asked {
    id: String,
    text: String,
    answers: Vec<Answer>,
    /// Nothing can be computed without an answer; otherwise the first is assumed.
    needs_answer: bool,
}

#[derive(Debug, Serialize)]
struct Answer {
    label: String,
    detail: String,
    columns: BTreeMap<&'static str, String>,
}

#[derive(Debug, Serialize)]
struct NearSpelling {
    from: String,
    into: String,
}

impl Preview {
    pub(crate) fn new(shown: &table::Preview, delimiter: char, reading: &Reading) -> Self {
        let roles = RolesByColumn::new(reading);
        Preview {
            columns: shown.columns.iter().map(|column| roles.column(column)).collect(),
            rows: shown.rows.iter().map(|row| Row { line: row.line, cells: row.cells.clone() }).collect(),
            total_rows: shown.total_rows,
            format: format(delimiter, reading.layout),
            problems: reading.problems.iter().map(problem).collect(),
            questions: reading.questions.iter().map(asked).collect(),
            notes: reading.notes.clone(),
            near_spellings: (reading.near_spellings.iter())
                .map(|merge| NearSpelling { from: merge.from.clone(), into: merge.into.clone() })
                .collect(),
            response_unit: reading.response_unit.clone(),
        }
    }
}

/// Which column plays which part, and why.
struct RolesByColumn<'a> {
    roles: Vec<(&'a str, Role)>,
    reading: &'a Reading,
}

impl<'a> RolesByColumn<'a> {
    fn new(reading: &'a Reading) -> Self {
        let roles = Role::ALL.iter().filter_map(|&role| Some((column_of(&reading.columns, role)?, role))).collect();
        RolesByColumn { roles, reading }
    }

    fn column(&self, column: &table::PreviewColumn) -> Column {
        let role = self.roles.iter().find(|(name, _)| *name == column.name).map(|(_, role)| *role);
        let reason = self.reading.reasons.iter().find(|r| Some(r.role) == role).map(|r| r.reason.clone());
        Column {
            name: column.name.clone(),
            role: role.map(Role::word),
            reason: reason.unwrap_or_default(),
            unit: column.unit.clone(),
            missing: column.missing,
        }
    }
}

fn column_of(columns: &ColumnsUsed, role: Role) -> Option<&str> {
    match role {
        Role::Subject => columns.subject.as_deref(),
        Role::Time => columns.time.as_deref(),
        Role::Group => columns.group.as_deref(),
        Role::Response => columns.response.as_deref(),
        Role::Cluster => columns.cluster.as_deref(),
    }
}

fn format(delimiter: char, layout: table::Layout) -> String {
    let delimiter = match delimiter {
        '\t' => "tabs",
        ',' => "commas",
        ';' => "semicolons",
        _ => "other signs",
    };
    let layout = match layout {
        table::Layout::Long => "one row per measurement",
        table::Layout::WideByTime => "one row per subject, one column per time",
        table::Layout::WideBySubject => "one row per time, one column per subject",
    };
    format!("Columns separated by {delimiter}; {layout}.")
}

fn problem(problem: &table::Problem) -> Problem {
    Problem {
        row: problem.row,
        column: problem.column.clone(),
        value: problem.value.clone(),
        message: problem.message.clone(),
    }
}

fn asked(question: &Question) -> Asked {
    let id = match question.topic {
        Topic::Column(role) => role.word().to_string(),
        Topic::Ids => "ids".to_string(),
    };
    let answers = question.choices.iter().map(|choice| match question.topic {
        Topic::Column(role) => Answer {
            label: choice.clone(),
            detail: format!("Take this column as {role}."),
            columns: BTreeMap::from([(role.word(), choice.clone())]),
        },
        Topic::Ids => Answer { label: choice.clone(), detail: String::new(), columns: BTreeMap::new() },
    });
    Asked { id, text: question.text.clone(), answers: answers.collect(), needs_answer: question.needs_answer }
}

#[cfg(test)]
mod tests {
    use courseband_table::{Request, Table};

    #[test]
    fn roles_and_questions_reach_the_page() {
        let text = "mouse,group,day,area\n1,a,0,5\n1,a,3,4\n1,b,0,6\n1,b,3,5\n2,a,0,5\n2,a,3,4\n2,b,0,5\n2,b,3,5\n";
        let table = Table::read(text.as_bytes()).expect("a table");
        let reading = table.observe(&Request::default()).expect("usable");
        let preview = super::Preview::new(&table.preview(3), table.sheet().delimiter(), &reading);
        let roles: Vec<_> = preview.columns.iter().map(|c| c.role).collect();
        assert_eq!(roles, [Some("subject"), Some("group"), Some("time"), Some("response")]);
        assert_eq!(preview.rows.len(), 3);
        assert_eq!(preview.total_rows, 8);
        assert!(preview.format.contains("commas"), "{}", preview.format);
        let question = preview.questions.first().expect("ids restart");
        assert_eq!(question.id, "ids");
        assert!(!question.needs_answer && question.answers.len() >= 2);
    }
}
