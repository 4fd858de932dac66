//! What the reader understood of a table.

use courseband_table as table;
use courseband_table::{ColumnsUsed, ProblemKind, Question, Reading, Role, Table, Topic};
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
    layout: &'static str,
    /// Where the table stands in a workbook.
    workbook: Option<Workbook>,
    /// Why the table cannot be used as asked; the rest then only shows it.
    refusal: Option<String>,
}

/// Where the table stands in a workbook.
#[derive(Debug, Serialize)]
struct Workbook {
    sheets: Vec<String>,
    sheet: String,
    /// Cells in use, such as `A1 to F90`.
    cells: String,
}

/// A column of the table as it stands.
#[derive(Debug, Serialize)]
struct Column {
    name: String,
    role: Option<&'static str>,
    reason: String,
    unit: Option<String>,
    missing: usize,
    /// In a wide table: it holds measurements.
    measured: bool,
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
    /// The value is fitted, or would be.
    kept: bool,
    /// Nothing can be computed before it is mended or left out.
    stops: bool,
}

/// A question with its answers; an answer is a part of the plan's `columns` or `reading`.
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
    reading: BTreeMap<&'static str, &'static str>,
}

#[derive(Debug, Serialize)]
struct NearSpelling {
    from: String,
    into: String,
}

impl Preview {
    /// The first `rows` rows, and those further down where a cell stops the reading.
    /// `sheets`: of the workbook, none for text.
    pub(crate) fn new(
        table: &Table,
        sheets: &[String],
        rows: usize,
        reading: &Reading,
        refusal: Option<String>,
    ) -> Self {
        let shown = table.preview(rows);
        let roles = RolesByColumn::new(reading);
        let last = shown.rows.last().map_or(0, |row| row.line);
        let mut stopping: Vec<usize> =
            reading.problems.iter().filter(|one| stops(one) && one.row > last).map(|one| one.row).collect();
        stopping.dedup();
        stopping.truncate(rows);
        let further = table.rows_at(&stopping);
        Preview {
            columns: shown.columns.iter().map(|column| roles.column(column)).collect(),
            rows: (shown.rows.into_iter().chain(further)).map(|row| Row { line: row.line, cells: row.cells }).collect(),
            total_rows: shown.total_rows,
            format: format(table, reading.layout),
            workbook: table.sheet().place().map(|(sheet, cells)| Workbook {
                sheets: sheets.to_vec(),
                sheet: sheet.to_string(),
                cells: cells.to_string(),
            }),
            layout: layout_word(reading.layout),
            refusal,
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
            measured: self.reading.measured.contains(&column.name),
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

fn format(table: &Table, layout: table::Layout) -> String {
    let layout = match layout {
        table::Layout::Long => "one row per measurement",
        table::Layout::WideByTime => "one row per subject, one column per time",
        table::Layout::WideBySubject => "one row per time, one column per subject",
    };
    if let Some((_, cells)) = table.sheet().place() {
        return format!("Cells {cells} of a workbook; {layout}.");
    }
    let delimiter = match table.sheet().delimiter() {
        '\t' => "tabs",
        ',' => "commas",
        ';' => "semicolons",
        _ => "other signs",
    };
    format!("Columns separated by {delimiter}; {layout}.")
}

fn layout_word(layout: table::Layout) -> &'static str {
    match layout {
        table::Layout::Long => "long",
        table::Layout::WideByTime => "wide-by-time",
        table::Layout::WideBySubject => "wide-by-subject",
    }
}

fn stops(problem: &table::Problem) -> bool {
    matches!(problem.kind, ProblemKind::StopsReading | ProblemKind::SharedId)
}

fn problem(problem: &table::Problem) -> Problem {
    Problem {
        row: problem.row,
        column: problem.column.clone(),
        value: problem.value.clone(),
        message: problem.message.clone(),
        kept: !problem.kind.leaves_out(),
        stops: stops(problem),
    }
}

fn asked(question: &Question) -> Asked {
    let id = match question.topic {
        Topic::Column(role) => role.word().to_string(),
        Topic::Ids => "ids".to_string(),
    };
    let answers = question.choices.iter().enumerate().map(|(at, choice)| match question.topic {
        Topic::Column(role) => Answer {
            label: choice.clone(),
            detail: format!("Take this column as {role}."),
            columns: BTreeMap::from([(role.word(), choice.clone())]),
            reading: BTreeMap::new(),
        },
        Topic::Ids => shared_ids(choice, at),
    });
    // Somebody is there to answer: nothing is assumed.
    let needs_answer = question.needs_answer || question.topic == Topic::Ids;
    Asked { id, text: question.text.clone(), answers: answers.collect(), needs_answer }
}

/// The answer number `at` to what ids under several groups mean.
fn shared_ids(choice: &str, at: usize) -> Answer {
    let (word, detail) = match at {
        0 => ("different", "Each is followed in its own group. The analysis goes on."),
        1 => ("same", "A crossover: it cannot be analysed here, and nothing is computed."),
        _ => ("mistake", "The rows in question are listed, to be corrected or left out."),
    };
    let label = choice.split_once(':').map_or(choice, |(label, _)| label).to_string();
    Answer {
        label,
        detail: detail.to_string(),
        columns: BTreeMap::new(),
        reading: BTreeMap::from([("shared_ids", word)]),
    }
}

#[cfg(test)]
mod tests {
    use courseband_table::{Request, Table};

    #[test]
    fn roles_and_questions_reach_the_page() {
        let text = "mouse,group,day,area\n1,a,0,5\n1,a,3,4\n1,b,0,6\n1,b,3,5\n2,a,0,5\n2,a,3,4\n2,b,0,5\n2,b,3,5\n";
        let table = Table::read(text.as_bytes()).expect("a table");
        let reading = table.observe(&Request::default()).expect("usable");
        let preview = super::Preview::new(&table, &[], 3, &reading, None);
        let roles: Vec<_> = preview.columns.iter().map(|c| c.role).collect();
        assert_eq!(roles, [Some("subject"), Some("group"), Some("time"), Some("response")]);
        assert_eq!(preview.rows.len(), 3);
        assert_eq!(preview.total_rows, 8);
        assert!(preview.format.contains("commas"), "{}", preview.format);
        let question = preview.questions.first().expect("ids restart");
        assert_eq!(question.id, "ids");
        assert!(question.needs_answer, "somebody is there to answer");
        let words: Vec<_> = question.answers.iter().filter_map(|answer| answer.reading.get("shared_ids")).collect();
        assert_eq!(words, [&"different", &"same", &"mistake"]);
    }

    #[test]
    fn a_cell_that_stops_the_reading_is_shown_wherever_it_stands() {
        let mut text = "mouse,group,day,area\n".to_string();
        for mouse in 0..9 {
            (0..3).for_each(|day| text.push_str(&format!("m{mouse},{},{day},5\n", mouse % 2)));
        }
        let text = text.replace("m8,0,1,5", "m8,0,soon,5").replace("m7,1,2,5", ",1,2,5");
        let table = Table::read(text.as_bytes()).expect("a table");
        let refusal = table.observe(&Request::default()).expect_err("unusable").to_string();
        let preview = super::Preview::new(&table, &[], 5, &table.outline(&Request::default()), Some(refusal));
        let stops: Vec<_> =
            preview.problems.iter().filter(|one| one.stops).map(|one| (one.row, &*one.column)).collect();
        assert_eq!(stops, [(25, "mouse"), (27, "day")]);
        assert_eq!(preview.rows.iter().map(|row| row.line).collect::<Vec<_>>(), [2, 3, 4, 5, 6, 25, 27]);
        assert_eq!(preview.columns[2].role, Some("time"));
    }
}
