//! What the reader understood of a table, as text for a person.

use courseband_study::{Plan, Refusal, Study};
use std::fmt::Write;

/// The report of `courseband check`.
pub(crate) fn report(bytes: &[u8], plan: &Plan) -> Result<String, Refusal> {
    let mut study = Study::open(bytes)?;
    study.reading(plan)?;
    let place = study.table().sheet().place().map(|(sheet, cells)| format!("Workbook: sheet {sheet}, cells {cells}"));
    let reading = study.reading(plan)?;
    let observations = &reading.observations;
    let mut text = String::new();
    // Writing to a string cannot fail.
    let mut line = |words: String| {
        let _ = writeln!(text, "{words}");
    };
    if let Some(place) = place {
        line(place);
    }
    line(format!("Layout: {}", layout(reading.layout)));
    line("Columns:".into());
    for reason in &reading.reasons {
        line(format!("  {:<9} {}: {}", reason.role.word(), reason.column.as_deref().unwrap_or("none"), reason.reason));
    }
    line(format!(
        "Usable rows: {}, subjects: {}, excluded on request: {}",
        observations.response.len(),
        observations.subjects.len(),
        reading.excluded
    ));
    for (g, name) in observations.groups.iter().enumerate() {
        let subjects = observations.subjects.iter().filter(|s| s.group as usize == g).count();
        line(format!("  group {name}: {subjects} subjects"));
    }
    for question in &reading.questions {
        let need = if question.needs_answer { "Question that needs an answer" } else { "Question" };
        line(format!("{need}: {} ({})", question.text, question.choices.join(" / ")));
    }
    for note in &reading.notes {
        line(format!("Note: {note}"));
    }
    let total: usize = reading.problem_counts.iter().map(|(_, count)| count).sum();
    line(format!("Problems: {total}"));
    for problem in &reading.problems {
        line(format!("  row {}, {}, \"{}\": {}", problem.row, problem.column, problem.value, problem.message));
    }
    if total > reading.problems.len() {
        line(format!("  and {} more", total - reading.problems.len()));
    }
    Ok(text)
}

fn layout(layout: courseband_table::Layout) -> &'static str {
    match layout {
        courseband_table::Layout::Long => "one row per measurement",
        courseband_table::Layout::WideByTime => "one row per subject, one column per time",
        courseband_table::Layout::WideBySubject => "one row per time, one column per subject",
    }
}
